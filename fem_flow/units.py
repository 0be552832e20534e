"""The one pint registry; reading quantities from text and printing them.

Text is one number and one unit (``"1.2 mm"``, ``"46 cSt"``, ``"40 degC"``). Nothing else is evaluated: the number and the unit
are told apart by a strict grammar before pint sees the unit, so a case file cannot make pint compute anything.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache, lru_cache

from fem_flow.errors import CaseError


class Problem(ValueError):
    """Something wrong with one value, worded without its place: ``is 1.2 without a unit; write ...``.

    The case room puts file and key in front and raises it as a ``CaseError``.
    """

    def __init__(self, text: str, reason: str, **details):
        super().__init__(text)
        self.reason = reason
        self.details = details


@dataclass(frozen=True)
class Dimension:
    """A kind of quantity: SI unit, how a sentence calls it, an example, and the plausible magnitudes [SI]; zero always is."""

    unit: str
    phrase: str
    example: str
    low: float = 0.0
    high: float = math.inf


DIMENSIONS: dict[str, Dimension] = {
    "length": Dimension("m", "a length", "1.2 mm", 1e-10, 1e5),
    "area": Dimension("m^2", "an area", "10 mm^2"),
    "volume": Dimension("m^3", "a volume", "10 mL"),
    "angle": Dimension("rad", "an angle", "45 deg"),
    "time": Dimension("s", "a time", "1 s"),
    "velocity": Dimension("m/s", "a velocity", "0.1 m/s", 1e-12, 1e4),
    "volume flow": Dimension("m^3/s", "a volume flow", "12 L/min", 1e-21, 1e5),
    "mass flow": Dimension("kg/s", "a mass flow", "10 kg/min", 1e-18, 1e8),
    "mass": Dimension("kg", "a mass", "1 kg"),
    "pressure": Dimension("Pa", "a pressure", "1 bar", 1e-9, 1e11),
    "density": Dimension("kg/m^3", "a density", "870 kg/m^3", 1e-6, 1e5),
    "viscosity": Dimension("Pa*s", "a dynamic viscosity", "40 mPa*s", 1e-7, 1e6),
    "kinematic viscosity": Dimension("m^2/s", "a kinematic viscosity", "46 cSt", 1e-10, 1e3),
    "temperature": Dimension("K", "a temperature", "40 degC"),
    "heat capacity": Dimension("J/(kg*K)", "a specific heat capacity", "1900 J/(kg*K)", 1.0, 1e6),
    "force": Dimension("N", "a force", "10 N"),
    "torque": Dimension("N*m", "a torque or an energy", "1 N*m"),
    "power": Dimension("W", "a power", "10 W"),
    "flow resistance": Dimension("Pa*s/m^3", "a flow resistance", "2e9 Pa*s/m^3"),
    "rotation": Dimension("rad/s", "a rotation", "3000 rpm"),
    "frequency": Dimension("1/s", "a rate", "10 1/s"),
    "electric charge": Dimension("coulomb", "an electric charge", "1 coulomb"),
    "share": Dimension("1", "a share", "1 %"),
}

_HINTS = {
    "C": "write degC for degrees Celsius",
    "F": "write degF for degrees Fahrenheit",
    "Celsius": "write degC for degrees Celsius",
    "Fahrenheit": "write degF for degrees Fahrenheit",
    "gpm": "write gal/min",
    "lpm": "write L/min",
    "LPM": "write L/min",
    "l/m": "write L/min",
    "L/m": "write L/min",
    "sccm": "give the mass flow, or the volume flow at the pressure of the passage",
    "slpm": "give the mass flow, or the volume flow at the pressure of the passage",
    "barg": "write bar, with ambient absolute and port pressures counted from it",
    "bara": "write bar, with ambient absolute and port pressures counted from it",
    "psig": "write psi, with ambient absolute and port pressures counted from it",
    "psia": "write psi, with ambient absolute and port pressures counted from it",
    "mil": "write thou for a thousandth of an inch",
    "mils": "write thou for a thousandth of an inch",
}

_COMMON = (
    "mm cm m um nm in ft thou deg rad bar mbar Pa kPa MPa psi atm m/s mm/s L/min mL/min uL/min m^3/s m^3/h L/s L/h mL/h "
    "gal/min kg/s kg/min kg/h g/s g/min kg/m^3 g/cm^3 Pa*s mPa*s cP cSt mm^2/s m^2/s degC degF K J/(kg*K) N W %"
    " mm^2 m^2 rpm"
)

_NUMBER = re.compile(r"\s*([+-]?(?:\d+(?:_\d+)*(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,6})?)(?![\d.,_])\s*(.*?)\s*", re.DOTALL)
_COMMA = re.compile(r"\s*([+-]?\d+),(\d+)(?![\d,])\s*(.*?)\s*", re.DOTALL)
_NAME = r"[A-Za-zµμΩ%_][A-Za-z0-9_]*"
_POWER = r"(?:\s*(?:\^|\*\*)\s*[+-]?\d{1,2}(?:\.\d{1,3})?)?"
_FACTOR = rf"(?:1(?!\d)|{_NAME}){_POWER}"
_PRODUCT = rf"{_FACTOR}(?:\s*[*/]\s*{_FACTOR}|\s+{_FACTOR})*"
_ITEM = rf"(?:{_FACTOR}|\(\s*{_PRODUCT}\s*\){_POWER})"
_UNIT = re.compile(rf"{_ITEM}(?:\s*[*/]\s*{_ITEM}|\s+{_ITEM})*")
_SIGNS = str.maketrans({"²": "^2", "³": "^3", "·": "*", "⋅": "*", "°": "deg"})


@cache
def registry():
    """The pint registry of the program; built once, on first use (about half a second)."""
    import pint

    return pint.UnitRegistry()


@lru_cache(maxsize=1024)
def _unit(text: str):
    """(pint unit, root units as a sorted tuple, factor to root units or None for an offset scale); None if it is no unit."""
    if len(text) > 80:
        return None
    plain = text.translate(_SIGNS)
    plain = re.sub(r"(?<=[A-Za-z])\.(?=[A-Za-z])", "*", plain)
    if not _UNIT.fullmatch(plain):
        return None
    ureg = registry()
    try:
        unit = ureg.parse_units(plain)
        factor, root = ureg.get_root_units(unit)
        offset = ureg.Quantity(0.0, unit).to_root_units().magnitude != 0.0
        root = tuple(sorted((name, float(power)) for name, power in root._units.items()))
    except Exception:  # pint raises many kinds, from its own to those of Python's tokenizer
        return None
    return unit, root, None if offset else float(factor)


def root_of(unit: str) -> tuple | None:
    """Root units as a sorted tuple of (name, power), equal for units of equal dimension; None where the text is no unit."""
    known = _unit(unit)
    return known[1] if known else None


def split(text: str) -> tuple[float, str] | None:
    """Number and unit text of ``"1.2 mm"``, or None where the text is not of that form; the unit may be empty."""
    found = _NUMBER.fullmatch(text)
    return (float(found[1].replace("_", "")), found[2]) if found else None


def quoted(value) -> str:
    """A value as a sentence shows it, cut where it is long."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        text = "".join(c if c.isprintable() else " " for c in value)
        return f'"{text if len(text) <= 60 else text[:57] + "..."}"'
    if isinstance(value, (list, tuple)):
        return "a list"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, (int, float)):
        return "a huge number" if isinstance(value, int) and abs(value) > 1e15 else repr(value)
    return "a date" if hasattr(value, "isoformat") else f"of type {type(value).__name__}"


def phrase_of(root: tuple, text: str) -> str:
    """How a sentence calls the quantity with these root units: ``a pressure``, or ``a quantity in kg*mm``."""
    for dimension in DIMENSIONS.values():
        if root_of(dimension.unit) == root:
            return dimension.phrase if dimension.unit != "1" else "a pure number"
    return f"a quantity in {text}"


def parse(value, wanted: tuple[Dimension, ...], name: str, example: str | None = None) -> tuple[float, Dimension]:
    """A quantity in the SI unit of the first dimension in `wanted` that fits, and that dimension.

    `name` and `example` word the sentence of the ``Problem`` that is raised where the text is no such quantity.
    """
    example = example or wanted[0].example
    form = f'{name} = "{example}"'
    shown = quoted(value)
    if isinstance(value, bool) or not isinstance(value, (str, int, float)):
        raise Problem(f"is {shown}; write it as text with a unit, for example {form}", "bad_value")
    parts = (value, "") if not isinstance(value, str) else split(value)
    if parts is None:
        raise Problem(_malformed(value, shown, name, form), "bad_value")
    number, unit = parts
    if not math.isfinite(number):
        raise Problem(f"is {shown}, which is no finite number; write for example {form}", "bad_value")
    if not unit:
        # the user's own number with the unit of the example
        kept = f'{name} = "{str(value).strip()} {split(example)[1]}"'
        raise Problem(f"is {shown} without a unit; write it as text with a unit, for example {kept}", "missing_unit")
    known = _unit(unit)
    if known is None:
        raise Problem(
            f"is {shown}, but {_no_unit(unit, form, wanted)}",
            "unknown_unit",
            unit=unit,
            nearest=nearest(unit, _fitting(wanted)),
        )
    pint_unit, root, factor = known
    for dimension in wanted:
        if root_of(dimension.unit) == root:
            si = (
                registry().Quantity(number, pint_unit).to("K").magnitude
                if factor is None
                else number * _factor(unit, dimension.unit)
            )
            return _plausible(float(si), dimension, shown, form), dimension
    hint = f"; {_HINTS[unit]}, for example {form}" if unit in _HINTS else f", for example {form}"
    meant = next((c for c in _fitting(wanted) if c.casefold() == unit.casefold()), None)
    hint = f"; did you mean {meant}?" if meant else hint
    expected = " or ".join(d.phrase for d in wanted)
    raise Problem(f"is {shown}, {phrase_of(root, unit)}, where {expected} is expected{hint}", "wrong_unit", unit=unit)


def _fitting(wanted: tuple[Dimension, ...]) -> list[str]:
    """The common units of these dimensions."""
    roots = {root_of(d.unit) for d in wanted}
    return [unit for unit in _COMMON.split() if root_of(unit) in roots]


def _factor(unit: str, target: str) -> float:
    """Number of `target` in one `unit`; exactly 1 for the same unit."""
    if unit == target:
        return 1.0
    return _unit(unit)[2] / (1.0 if target == "1" else _unit(target)[2])


def convert(number: float, unit: str, target: str) -> float:
    """A number in another unit of the same dimension; exact for the same unit."""
    if _unit(unit)[2] is None:
        return float(registry().Quantity(number, _unit(unit)[0]).to(target).magnitude)
    return number * _factor(unit, target)


def _plausible(si: float, dimension: Dimension, shown: str, form: str) -> float:
    if dimension.unit == "K" and si < 0:
        raise Problem(f"is {shown}, which is below absolute zero; write for example {form}", "bad_value")
    if not math.isfinite(si) or (si and not dimension.low <= abs(si) <= dimension.high):
        window = f"{dimension.low:g} to {dimension.high:g} {dimension.unit}"
        raise Problem(
            f"is {shown}, which is {si:.3g} {dimension.unit} and beyond what is plausible ({window}); check the unit",
            "implausible",
            value=si,
        )
    return si


def _malformed(value: str, shown: str, name: str, form: str) -> str:
    comma = _COMMA.fullmatch(value)
    if comma:
        return f'is {shown}; write decimals with a point: {name} = "{comma[1]}.{comma[2]} {comma[3]}"'
    if not value.strip():
        return f"is empty; write for example {form}"
    if _unit(value.strip()) is not None:
        return f"is {shown} without a number; write for example {form}"
    return f"is {shown}, which is not one number and one unit; write for example {form}"


def _no_unit(unit: str, form: str, wanted: tuple[Dimension, ...]) -> str:
    if unit in _HINTS:
        return f"there is no unit {unit}; {_HINTS[unit]}, for example {form}"
    if not _UNIT.fullmatch(unit.translate(_SIGNS)):
        return f"{quoted(unit)} is not a unit; write for example {form}"
    near = nearest(unit, _fitting(wanted)) or nearest(unit, _COMMON.split())
    return f"there is no unit {unit}; " + (f"did you mean {near}?" if near else f"write for example {form}")


def nearest(name: str, known) -> str | None:
    """The known name most like `name`, or None where none is near."""
    import difflib

    folded: dict[str, str] = {}
    for k in known:
        folded.setdefault(str(k).casefold(), str(k))
    low = str(name).casefold().strip()
    if low in folded:
        return folded[low]
    longer = [k for k in folded if len(k) > 1 and len(low) > 1]  # a single letter is near to nothing
    found = difflib.get_close_matches(low, longer, n=1, cutoff=0.6)
    found = found or [k for k in longer if len(k) == len(low) <= 3 and sum(a != b for a, b in zip(k, low, strict=True)) == 1]
    found = found or [k for k in longer if len(low) > 2 and (low in k or (len(k) > 2 and k in low))]
    return folded[found[0]] if found else None


def read(text, dimension: str, key: str) -> float:
    """A quantity as a float in SI.

    Parameters
    ----------
    text : for example ``"1.2 mm"``
    dimension : a key of ``DIMENSIONS``
    key : what the sentence of an error calls it, for example ``"[model] depth"``

    Raises
    ------
    CaseError where the text is no quantity of that dimension
    """
    try:
        return parse(text, (DIMENSIONS[dimension],), key.split()[-1])[0]
    except Problem as problem:
        raise CaseError(f"{key} {problem}", reason=problem.reason, details={"key": key, **problem.details}) from None


_FRIENDLY = {
    "Pa": ((1e5, "bar"), (1e3, "kPa"), (1.0, "Pa"), (1e-3, "mPa")),
    "m^3/s": ((1 / 6e4, "L/min"), (1 / 6e7, "mL/min"), (1 / 6e10, "µL/min")),
    "m": ((1.0, "m"), (1e-3, "mm"), (1e-6, "µm")),
    "m^2": ((1.0, "m^2"), (1e-6, "mm^2"), (1e-12, "µm^2")),
    "m^3": ((1.0, "m^3"), (1e-3, "L"), (1e-6, "mL"), (1e-9, "µL")),
    "m/s": ((1.0, "m/s"), (1e-3, "mm/s"), (1e-6, "µm/s")),
    "N": ((1e3, "kN"), (1.0, "N"), (1e-3, "mN"), (1e-6, "µN")),
    "N*m": ((1.0, "N*m"), (1e-3, "mN*m"), (1e-6, "µN*m")),
    "W": ((1e3, "kW"), (1.0, "W"), (1e-3, "mW"), (1e-6, "µW")),
    "Pa*s": ((1.0, "Pa*s"), (1e-3, "mPa*s")),
    "s": ((1.0, "s"), (1e-3, "ms")),
}


def digits(value: float, significant: int = 4) -> str:
    """A number with that many significant digits; no exponent between 1e-4 and 1e7; ``–`` for NaN."""
    if value is None or math.isnan(value):
        return "–"
    if value == 0 or math.isinf(value):
        return "0" if value == 0 else f"{value}"
    power = math.floor(math.log10(abs(float(f"{value:.{significant - 1}e}"))))
    if power < -4 or power >= 7:
        return f"{value:.{significant - 1}e}"
    return f"{round(value, significant - 1 - power):.{max(0, significant - 1 - power)}f}"


def friendly(value: float, unit: str, like: float | None = None, significant: int = 4) -> tuple[str, str]:
    """A value in SI as (number text, unit text) in the unit an engineer would use.

    `like` is the value that chooses the unit: a bar is printed in the unit of its number. A pure number's unit text is empty.

    >>> friendly(21830.0, "Pa")
    ('21.83', 'kPa')
    >>> friendly(95.0, "Pa", like=21830.0, significant=2)
    ('0.095', 'kPa')
    """
    ladder = _FRIENDLY.get(unit, ((1.0, "" if unit == "1" else unit),))
    size = abs(value if like is None or math.isnan(like) or like == 0 else like)
    scale, name = ladder[-1]
    if not size or math.isnan(size):
        scale, name = next((rung for rung in ladder if rung[0] == 1.0), ladder[0])
    else:
        for factor, text in ladder:
            if size >= factor * (1 - 1e-9):
                scale, name = factor, text
                break
    return digits(value / scale if value is not None else math.nan, significant), name


def show(value: float, unit: str, significant: int = 4) -> str:
    """A value in SI as one text, for example ``21.83 kPa``."""
    return " ".join(friendly(value, unit, significant=significant)).strip()
