"""Words that go with numbers wherever they are shown: scope, names of quantities, verdicts, friendly values."""

from __future__ import annotations

import math

from fem_flow.units import friendly

GROUPS = (
    (
        "Pressure drop and loss",
        (
            "total_pressure_drop",
            "static_pressure_drop",
            "excess_pressure_drop",
            "loss_coefficient",
            "hydraulic_resistance",
            "flow_coefficient_kv",
            "flow_coefficient_cv",
            "discharge_coefficient",
            "dissipated_power",
        ),
    ),
    (
        "Forces on walls",
        ("force_x", "force_x_pressure", "force_x_viscous", "force_y", "force_y_pressure", "force_y_viscous", "torque"),
    ),
    (
        "Wall shear",
        (
            "wall_shear_max",
            "wall_shear_p99",
            "wall_shear_mean",
            "wall_shear_min",
            "wall_shear_max_at",
            "attachment_point",
            "detachment_point",
        ),
    ),
    (
        "Ports and sections",
        (
            "flow_rate",
            "flow_share",
            "mean_velocity",
            "area",
            "static_pressure",
            "total_pressure",
            "kinetic_energy_coefficient",
            "hydraulic_diameter",
            "reynolds_number",
        ),
    ),
    ("Whole part", ("pressure_min", "narrowest_gap", "temperature_rise")),
)

#: in which order numbers are worth a reader's first look, and how many of each at most
FIRST_LOOK = (
    ("total_pressure_drop", 2),
    ("flow_rate_wanted", 2),
    ("flow_share", 4),
    ("loss_coefficient", 1),
    ("discharge_coefficient", 1),
    ("force_x", 1),
    ("wall_shear_max", 1),
    ("wall_shear_p99", 1),
    ("pressure_min", 1),
    ("narrowest_gap", 1),
    ("force_y", 1),
    ("torque", 1),
    ("reynolds_number", 1),
    ("dissipated_power", 1),
    ("wall_shear_mean", 1),
)

SPECIAL = {
    "flow_coefficient_kv": "Flow coefficient Kv",
    "flow_coefficient_cv": "Flow coefficient Cv",
    "wall_shear_p99": "Wall shear, 99th percentile",
    "wall_shear_max": "Wall shear, largest",
    "wall_shear_min": "Wall shear, smallest",
    "wall_shear_mean": "Wall shear, mean",
    "wall_shear_max_at": "Wall shear, place of the largest",
    "pressure_min": "Lowest pressure",
    "force_x": "Force along x",
    "force_y": "Force along y",
    "reynolds_number": "Reynolds number",
    "force_x_pressure": "Force along x, pressure part",
    "force_x_viscous": "Force along x, viscous part",
    "force_y_pressure": "Force along y, pressure part",
    "force_y_viscous": "Force along y, viscous part",
    "mach": "Mach number",
}

SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def scope_statement(kind: str | None = None) -> str:
    """The one-line scope that stands next to the numbers, in every file and on every page."""
    form = {"planar": "planar", "axisymmetric": "axisymmetric"}.get(kind or "", "planar/axisymmetric")
    return (
        f"Steady laminar single-phase 2-D ({form}) computation on nominal geometry. Not a strength, fatigue, leak-tightness, "
        "cavitation, biocompatibility or compliance assessment. Numerical error bars exclude model and input uncertainty "
        "unless stated."
    )


def scope_of(result: dict) -> str:
    """The scope sentence of a result: its own statement where it has one."""
    return next((s for s in result.get("statements", ()) if s.startswith("Steady laminar")), scope_statement())


def spoken(name: str) -> str:
    """A quantity's or check's name in words: ``total_pressure_drop`` becomes ``Total pressure drop``."""
    return SPECIAL.get(name) or name.replace("_", " ").capitalize()


def spoken_of(number: dict) -> str:
    """What a number is of: ``inlet → outlet`` for a drop, otherwise the names."""
    of = list(number.get("of") or ())
    if len(of) == 2 and number["quantity"] not in ("wall_shear_max_at",):
        return " → ".join(of) if not of[1].isdigit() else f"{of[0]}, piece {of[1]}"
    return ", ".join(of)


def withheld(number: dict) -> bool:
    """Whether a number of result.json has no value."""
    return number["value"] is None or math.isnan(number["value"])


def shown(number: dict, significant: int = 4) -> tuple[str, str, str]:
    """(value, bar, unit) of a number as text in a friendly unit; the bar has two digits and the unit of the value."""
    value, unit = number["value"], number["unit"]
    if withheld(number):
        return "withheld", "", ""
    bar = number.get("error_bar")
    size = max(abs(value), bar or 0.0)  # a value that its bar swallows is written in the unit of the bar
    if bar and size:  # print the digits that the bar leaves standing
        significant = min(max(math.floor(math.log10(size)) - math.floor(math.log10(bar)) + 2, 2), 6)
    text, name = friendly(size, unit, significant=significant)
    power = int(text.split("e")[1]) if "e" in text else 0  # goes to the unit, so that value and bar share it
    decimals = len(text.split("e")[0].partition(".")[2])
    scale = float(friendly(size, unit, significant=15)[0]) / size / 10.0**power if size else 1.0
    name = raised(name) if not power else f"×10{str(power).translate(SUPERSCRIPTS)} {raised(name)}".strip()
    if not bar:
        spread = "" if bar is None else "0"
    else:
        spread = f"{bar * scale:.{decimals}f}" if bar * scale >= 0.5 * 10.0**-decimals else f"{bar * scale:.1g}"
    plain = f"{value * scale:.{decimals}f}" if size else "0"
    return _minus(plain if float(plain) else plain.lstrip("-")), spread, name


def in_si(number: dict) -> str:
    """The same value in SI, to be copied; empty where withheld or where the friendly unit is the SI unit already."""
    unit = number["unit"]
    if withheld(number) or unit == "1" or shown(number)[2].split(" ")[-1] == raised(unit):
        return ""
    return f"{_minus(format(number['value'], '.6g'))} {raised(unit)}"


def _minus(text: str) -> str:
    return text.replace("-", "\N{MINUS SIGN}", 1) if text.startswith("-") else text


def raised(unit: str) -> str:
    """``m^3/s`` as m³/s, ``Pa*s`` as Pa·s."""
    return unit.replace("^2", "²").replace("^3", "³").replace("*", "·")


def first_look(result: dict, most: int = 8) -> list[dict]:
    """The numbers that answer first, at most ``most``.

    Those the case names in its accuracy lead, then drops, splits, loss coefficient, force, wall shear, the narrowest gap.

    Where several walls carry a figure the largest goes first. A flow is an answer at the ports where a pressure was given.

    Parameters
    ----------
    result : the content of result.json
    """
    numbers, case = result["numbers"], result.get("case") or {}
    chosen = _asked_for(numbers, case)
    for name, count in FIRST_LOOK:
        if name == "flow_rate_wanted":
            ports = {(p,) for p in wanted_flows(case)}
            found = [n for n in numbers if n["quantity"] == "flow_rate" and tuple(n["of"]) in ports]
        else:
            found = [n for n in numbers if n["quantity"] == name]
        if name in ("wall_shear_max", "wall_shear_p99", "wall_shear_mean", "force_x", "force_y", "torque", "reynolds_number"):
            found.sort(key=lambda n: -1.0 if withheld(n) else -abs(n["value"]))
            found.sort(key=withheld)
        if name in ("force_x", "force_y", "torque"):  # zero within its bar is no answer
            found = [n for n in found if withheld(n) or abs(n["value"]) > (n.get("error_bar") or 0.0)]
        if name == "flow_share" and len(found) < 2:
            continue
        already = sum(n["quantity"] == name for n in chosen)
        chosen += [n for n in found if n not in chosen][: max(count - already, 0)]
    return chosen[:most]


def _asked_for(numbers: list[dict], case: dict) -> list[dict]:
    """Figures that the accuracy of a case names with what they are of; a pair the other way round is the same pair."""
    wanted = [tuple(text.split()) for text in (case.get("accuracy") or {}).get("of", [])]
    named = {(name, *of) for name, *of in wanted if of} | {(name, *of[::-1]) for name, *of in wanted if of}
    return [n for n in numbers if (n["quantity"], *n["of"]) in named]


def wanted_flows(case: dict) -> tuple[str, ...]:
    """Ports of a filled case whose flow is part of the answer: none was given there, nor at the only other port."""
    ports = {n: p for n, p in (case.get("ports") or {}).items() if isinstance(p, dict) and not p.get("closed")}
    given = [n for n, p in ports.items() if any(k in p for k in ("flow_in", "flow_out", "velocity_in", "velocity_out"))]
    free = [n for n in ports if n not in given]
    if not free or (len(ports) == 2 and given):
        return ()
    return tuple(free[:1]) if len(ports) == 2 else tuple(free)
