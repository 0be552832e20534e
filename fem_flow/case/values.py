"""Checks of single values of a case, each a function ``check(value, key) -> value`` that raises ``Problem``."""

from __future__ import annotations

import os

from fem_flow.case.words import Problem
from fem_flow.units import DIMENSIONS, parse, quoted


class Fixed(dict):
    """A dict that cannot be changed, so that a frozen case cannot be changed through it."""

    def _refuse(self, *_, **__):
        raise TypeError("a case cannot be changed; case.with_(...) gives a changed copy")

    __setitem__ = __delitem__ = update = setdefault = pop = popitem = clear = __ior__ = _refuse

    def __reduce__(self):
        return Fixed, (dict(self),)


def plain(value, keep_none: bool = False):
    """Copy of nested tables with Python's plain types: NumPy scalars, paths and pint quantities turned, None left out."""
    if isinstance(value, dict):
        return {k: plain(v, keep_none) for k, v in value.items() if keep_none or v is not None}
    if isinstance(value, (list, tuple)):
        return [plain(v, keep_none) for v in value]
    if isinstance(value, os.PathLike):
        return os.fspath(value)
    if isinstance(value, str):
        return str(value)
    if hasattr(value, "magnitude") and hasattr(value, "units"):  # a pint quantity
        return f"{value.magnitude} {value.units:C}"
    if hasattr(value, "item") and getattr(value, "ndim", None) == 0:  # a NumPy scalar
        return value.item()
    if hasattr(value, "given"):  # a table of another case
        return plain(value.given(), keep_none)
    return value


def quantity(dimension: str, example: str, positive: bool = False, why: str = ""):
    """Text with a unit of that dimension."""

    def check(value, key):
        si, _ = parse(value, (DIMENSIONS[dimension],), key, example)
        if positive and si <= 0:
            raise Problem(f'is {quoted(value)}, but must be above zero{why}, for example {key} = "{example}"', "bad_value")
        return value.strip()

    return check


def _directed(wanted: tuple[str, ...], example: str, other: str):
    def check(value, key):
        si, _ = parse(value, tuple(DIMENSIONS[d] for d in wanted), key, example)
        if si < 0:
            raise Problem(f'is {quoted(value)}; for the other direction write {other} = "{value.strip()[1:]}"', "bad_value")
        if si == 0:
            raise Problem(f"is {quoted(value)}; for a port without flow write closed = true", "bad_value")
        return value.strip()

    return check


def flow(other: str):
    """A volume or mass flow; `other` is the key of the opposite direction."""
    return _directed(("volume flow", "mass flow"), "12 L/min", other)


def velocity(other: str):
    """A mean velocity; `other` is the key of the opposite direction."""
    return _directed(("velocity",), "0.5 m/s", other)


def share(example: str, low: float, high: float):
    """A share in percent within limits."""

    def check(value, key):
        si, _ = parse(value, (DIMENSIONS["share"],), key, example)
        if not low <= si <= high:
            raise Problem(
                f"is {quoted(value)}, outside {low:.0%} to {high:.0%}".replace("%", " %").replace("  ", " "), "out_of_range"
            )
        return value.strip()

    return check


def text(example: str, bare: str | None = None):
    """Any text; `bare` is the example for a number that needs a unit."""

    def check(value, key):
        if bare and isinstance(value, (int, float)) and not isinstance(value, bool):
            raise Problem(
                f'is {quoted(value)} without a unit; write it as text with a unit, for example {key} = "{bare}"', "missing_unit"
            )
        if not isinstance(value, str):
            raise Problem(f'is {quoted(value)}; write text in quotes, for example {key} = "{example}"', "bad_value")
        if not value.strip():
            raise Problem(f'is empty; write for example {key} = "{example}"', "bad_value")
        return value.strip()

    return check


def texts(example: str):
    """A list of texts."""

    def check(value, key):
        if not isinstance(value, (list, tuple)):
            raise Problem(f"is {quoted(value)}; write a list, for example {key} = {example}", "bad_value")
        if not value:
            raise Problem(f"is an empty list; write for example {key} = {example}", "bad_value")
        for item in value:
            if not isinstance(item, str) or not item.strip():
                raise Problem(f"holds {quoted(item)}; write names in quotes, for example {key} = {example}", "bad_value")
        return tuple(" ".join(item.split()) for item in value)

    return check


def flag(form: str, only: bool | None = None, instead: str = ""):
    """A switch; with `only`, the one value that says something."""

    def check(value, key):
        if not isinstance(value, bool):
            raise Problem(f"is {quoted(value)}; write {key} = {form}", "bad_value")
        if only is not None and value is not only:
            raise Problem(f"is {quoted(value)}, which says nothing; {instead}", "bad_value")
        return value

    return check


def whole(example: str, low: int):
    """A whole number not below `low`."""

    def check(value, key):
        if isinstance(value, bool) or not isinstance(value, int):
            raise Problem(f"is {quoted(value)}; write a whole number, for example {key} = {example}", "bad_value")
        if value < low:
            raise Problem(f"is {quoted(value)}, but must be at least {low}, for example {key} = {example}", "out_of_range")
        return value

    return check


def not_built(more: str = ""):
    """A key that is settled but not built in this version."""

    def check(value, key):
        raise Problem(f"is known but not built in this version{more}", "not_built")

    return check
