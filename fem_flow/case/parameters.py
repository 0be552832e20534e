"""The parameters of a part: what the case gives, checked against what the script declares."""

from __future__ import annotations

import keyword
import math
from pathlib import Path

from fem_flow.case.declaration import Declaration, Parameter
from fem_flow.case.words import Problem, choice, located, refuse
from fem_flow.units import DIMENSIONS, Dimension, convert, parse, phrase_of, quoted, root_of, split

RESERVED = ("script", "file", "unit", "kind", "inside")
"""Keys of ``[part]`` that cannot name a parameter."""


def parameter_values(case, declaration: Declaration) -> dict:
    """Value of every parameter: floats in the script's unit (angles in radians), counts int, switches bool, words str.

    Raises ``CaseError`` for an unknown parameter, a value of the wrong form or unit, and one outside its limits.
    """
    check_declaration(declaration)
    given, known = case.part.parameters, declaration.parameters
    for name in given:
        if name not in known:
            has = f"{declaration.name} has no such parameter"
            more = choice(name, known, "it has") if known else "; it has none"
            raise refuse(case.source, f"[part] {name}", f"is not known: {has}{more}", "unknown_parameter", known=list(known))
    values = {}
    for name, parameter in known.items():
        with located(case.source, f"[part] {name}"):
            values[name] = value_of(parameter, given.get(name, parameter.default), name, declaration)
    return values


def as_written(case, declaration: Declaration) -> dict:
    """Every parameter as a case file has it, defaults filled in."""
    return {name: case.part.parameters.get(name, p.default) for name, p in declaration.parameters.items()}


def value_of(parameter: Parameter, value, name: str, declaration: Declaration):
    """One checked value; raises ``Problem``."""
    default = parameter.default
    if parameter.choices is not None:
        if not isinstance(value, str):
            raise Problem(f'is {quoted(value)}; write a word in quotes, for example {name} = "{default}"', "bad_value")
        if value not in parameter.choices:
            raise Problem(
                f"is {quoted(value)}{choice(value, parameter.choices, 'it can be')}",
                "unknown_word",
                known=list(parameter.choices),
            )
        return value
    if isinstance(default, bool):
        if not isinstance(value, bool):
            raise Problem(f"is {quoted(value)}; write true or false, without quotes", "bad_value")
        return value
    if isinstance(default, (int, float)):
        number = _bare(value, name, default)
        _within(parameter, number, quoted(value), declaration)
        return number
    number = _measured(default, value, name, declaration.unit)
    limits = {
        k: None if getattr(parameter, k) is None else _measured(default, getattr(parameter, k), name, declaration.unit)
        for k in ("low", "high")
    }
    _within(parameter, number, quoted(value), declaration, **limits)
    return number


def _bare(value, name: str, default):
    """A count (int default) or a pure number (float default)."""
    kind = "count" if isinstance(default, int) else "pure number"
    if isinstance(value, str):
        parts = split(value)
        if parts and not parts[1]:
            raise Problem(f"is {quoted(value)}; write it without quotes, {name} = {value.strip()}", "bad_value")
        raise Problem(f"is {quoted(value)}; it is a {kind} without a unit, for example {name} = {default}", "bad_value")
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise Problem(f"is {quoted(value)}; it is a {kind}, for example {name} = {default}", "bad_value")
    if (isinstance(value, float) and not math.isfinite(value)) or abs(value) > 1e300:
        raise Problem(
            f"is {quoted(value)}, which is nothing to compute with; write for example {name} = {default}", "bad_value"
        )
    if kind == "count" and value != int(value):
        raise Problem(f"is {quoted(value)}; it is a count, write a whole number, for example {name} = {default}", "bad_value")
    return int(value) if kind == "count" else float(value)


def _measured(default: str, value, name: str, unit: str) -> float:
    """A quantity like the default: lengths, areas and volumes in powers of the script's unit, angles in rad, the rest in SI."""
    default_unit = split(default)[1]
    root = root_of(default_unit)
    parse(value, (Dimension(default_unit, phrase_of(root, default_unit), default),), name, default)
    return convert(*split(value), _target(root, unit))


def _target(root: tuple, unit: str) -> str:
    """The unit in which a script is handed a parameter with these root units."""
    names = dict(root)
    if set(names) == {"meter"} and names["meter"].is_integer():
        return unit if names["meter"] == 1 else f"({unit})^{int(names['meter'])}"
    known = next((d.unit for d in DIMENSIONS.values() if root_of(d.unit) == root), None)
    if known is None:
        raise Problem("is in a unit that no parameter can have", "declaration")
    return known


def _within(parameter: Parameter, number, shown: str, declaration: Declaration, low=..., high=...) -> None:
    low = parameter.low if low is ... else low
    high = parameter.high if high is ... else high
    slack = 1e-9 * abs(number)
    if (low is None or number >= low - slack) and (high is None or number <= high + slack):
        return
    if low is not None and high is not None:
        allowed = f"{parameter.low} to {parameter.high}"
    else:
        allowed = f"at least {parameter.low}" if high is None else f"at most {parameter.high}"
    raise Problem(f"is {shown}, outside its limits; {declaration.name} allows {allowed}", "out_of_range", low=low, high=high)


def check_declaration(declaration: Declaration) -> None:
    """Refuse a declaration that no case could meet; these are mistakes of whoever wrote the script."""
    source = Path(declaration.path).name
    if declaration.unit and root_of(declaration.unit) != root_of("m"):
        raise refuse(
            source, "unit", f'is {quoted(declaration.unit)}; write a length unit, for example unit = "mm"', "declaration"
        )
    for name, parameter in declaration.parameters.items():
        where = f"parameter {name}"
        if name in RESERVED or not name.isidentifier() or keyword.iskeyword(name) or name.startswith("_"):
            why = f"is reserved ({', '.join(RESERVED)})" if name in RESERVED else "is no name that a script can use as p.name"
            raise refuse(source, where, why, "declaration")
        if not isinstance(parameter, Parameter):
            raise refuse(
                source, where, 'is no Parameter; write for example Parameter("12 mm", low="2 mm", high="60 mm")', "declaration"
            )
        _check_parameter(source, where, name, parameter, declaration)


def _check_parameter(source, where, name, parameter: Parameter, declaration: Declaration) -> None:
    default = parameter.default
    if isinstance(default, str) and parameter.choices is None:
        parts = split(default)
        if not parts or root_of(parts[1]) is None or not parts[1]:
            raise refuse(
                source,
                where,
                f'has the default {quoted(default)}; write "12 mm" for a length, 12.0 for a pure number, or give choices '
                "for a word",
                "declaration",
            )
    try:
        value_of(parameter, default, name, declaration)
        low, high = (
            None if x is None or isinstance(default, (bool, int, float)) else _measured(default, x, name, declaration.unit)
            for x in (parameter.low, parameter.high)
        )
    except Problem as problem:
        text = str(problem).replace("outside its limits; " + declaration.name + " allows", "outside its own limits")
        raise refuse(source, where, f"is declared wrongly: its default or a limit {text}", "declaration") from None
    if low is not None and high is not None and low > high:
        raise refuse(source, where, f"has low {parameter.low} above high {parameter.high}", "declaration")
