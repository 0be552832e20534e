"""Reading a case file, and turning what pydantic finds wrong into one clear sentence."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

from fem_flow.case.words import choice, nearest, refuse
from fem_flow.errors import CaseError
from fem_flow.units import quoted


def load(path: Path) -> dict:
    """The tables of a TOML file; raises ``CaseError`` where it cannot be read."""
    try:
        raw = path.read_bytes()
    except FileNotFoundError:
        others = [p.name for p in path.parent.glob("*.toml")] if path.parent.is_dir() else []
        near = nearest(path.name, others)
        raise _unreadable(path, f"there is no such file{f'; did you mean {near}?' if near else ''}", str(path)) from None
    except IsADirectoryError:
        raise _unreadable(path, "is a folder; give the case file itself", str(path)) from None
    except (OSError, ValueError) as error:
        raise _unreadable(path, f"cannot be read ({getattr(error, 'strerror', None) or error})", str(path)) from None
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise _unreadable(path, "is not UTF-8 text; save it as UTF-8") from None
    try:
        return tomllib.loads(text.replace("\r\n", "\n"))
    except RecursionError:
        raise _unreadable(path, "is nested too deeply for a case file") from None
    except tomllib.TOMLDecodeError as error:
        raise _unreadable(path, _syntax(text.replace("\r\n", "\n").split("\n"), str(error)), reason="not_toml") from None
    except ValueError:  # Python refuses to read integers of thousands of digits
        raise _unreadable(path, "holds a number with too many digits", reason="not_toml") from None


def _unreadable(path: Path, what: str, name: str | None = None, reason: str = "unreadable") -> CaseError:
    return CaseError(f"{name or path.name}: {what}", reason=reason, details={"file": str(path)})


def _syntax(lines: list[str], message: str) -> str:
    """What is wrong with the TOML, with the form that was probably meant."""
    if "twice" in message or "overwrite" in message or "already" in message:
        number = next((n for n in range(1, len(lines) + 1) if _given_twice(lines[:n])), None)
        if number:
            return f"line {number} gives {lines[number - 1].split('=')[0].strip()} a second time"
    found = re.search(r"\(at line (\d+), column \d+\)", message)
    if found and int(found[1]) <= len(lines):
        line = lines[int(found[1]) - 1]
        hint = _unquoted(line)
        return f"line {found[1]} is not valid TOML; {hint or message[: found.start()].strip() + ', in ' + quoted(line.strip())}"
    return f"is not valid TOML; {message[0].lower() + message[1:]}"


def _given_twice(lines: list[str]) -> bool:
    try:
        tomllib.loads("\n".join(lines))
    except ValueError as error:
        return any(word in str(error) for word in ("twice", "overwrite", "already"))
    return False


def _unquoted(line: str) -> str | None:
    """``write lift = "1.2 mm", in quotes`` for the most common slip."""
    if line.split("#")[0].count('"') % 2:
        return "a quotation mark is missing"
    found = re.fullmatch(r"\s*([\w.-]+)\s*=\s*([^\"'\[{#]*[^\"'\[{#\s])\s*(?:#.*)?", line)
    if not found:
        return None
    key, value = found[1], found[2]
    if value.lower() in ("true", "false"):
        return f"write {key} = {value.lower()}, in small letters"
    value = re.sub(r"^([+-]?\d+),(\d)", r"\1.\2", value)
    return f'write {key} = "{value}", in quotes'


def one_sentence(errors, model, data: dict, source: str | None) -> CaseError:
    """The first thing wrong as a ``CaseError``; unknown keys go first, for they explain what seems to be missing.

    Parameters
    ----------
    errors : pydantic.ValidationError of `model`
    model : the pydantic class
    data : what it was given
    source : file name, or None
    """
    found = errors.errors(include_url=False)
    error = next((e for e in found if e["type"] == "extra_forbidden"), found[0])
    loc, kind = [str(part) for part in error["loc"]], error["type"]
    problem = error.get("ctx", {}).get("error")
    if kind == "value_error" and problem is not None:
        return refuse(source, _where(loc, data), str(problem), problem.reason, **problem.details)
    if kind == "extra_forbidden":
        return _unknown_key(loc, model, data, source)
    if kind == "missing":
        example = {"part": 'script = "poppet_valve"', "fluid": 'name = "water" and temperature = "20 degC"'}.get(
            loc[-1], "its keys"
        )
        return refuse(source, _where(loc, data), f"is missing; a case needs this table, for example with {example}", "missing")
    if loc[0] in ("ports", "walls") and len(loc) <= 2:
        example = f"[{loc[0]}.{loc[1] if len(loc) > 1 else 'NAME'}]"
        return refuse(
            source,
            f"[{loc[0]}] {' '.join(loc[1:2])}".strip(),
            f"is {quoted(error['input'])}; write a table, for example {example}",
            "bad_value",
        )
    where = f"[{'.'.join(loc)}]"
    return refuse(
        source, where, f"is {quoted(error['input'])}; write a table, that is a line {where} with its keys below", "bad_value"
    )


def _where(loc: list[str], data: dict) -> str:
    """``[ports.inlet] flow_in`` from its path."""
    value, tables, rest = data, [], []
    for part in loc:
        value = value.get(part) if isinstance(value, dict) else None
        (tables if isinstance(value, dict) and not rest else rest).append(part)
    if len(loc) == 1 and not tables and loc[0] in ("part", "fluid"):
        return f"[{loc[0]}]"
    return " ".join([f"[{'.'.join(tables)}]"] * bool(tables) + rest[:1])


def _unknown_key(loc: list[str], model, data: dict, source: str | None) -> CaseError:
    table, key = loc[:-1], loc[-1]
    for part in table:
        field = model.model_fields.get(part) if hasattr(model, "model_fields") else None
        model = _table_class(field.annotation) if field else model
    known = list(model.model_fields)
    if not table:
        value = data.get(key)
        name = f"[{key}]" if isinstance(value, dict) else key
        return refuse(
            source,
            name,
            f"is not part of a case file{choice(key, known, 'it may have')}",
            "unknown_key",
            nearest=nearest(key, known),
            known=known,
        )
    return refuse(
        source,
        f"[{'.'.join(table)}] {key}",
        f"is not known{choice(key, known, 'this table may have')}",
        "unknown_key",
        nearest=nearest(key, known),
        known=known,
    )


def _table_class(annotation):
    """The model class in ``Table``, ``Table | None`` or ``dict[str, Table]``."""
    if hasattr(annotation, "model_fields"):
        return annotation
    return next(a for a in annotation.__args__ if hasattr(a, "model_fields"))
