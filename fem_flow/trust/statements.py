"""The sentences that go next to the numbers: scope, what breaks, and the few cautions that apply by content."""

from __future__ import annotations

import re
from pathlib import PurePath

from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Check, Number
from fem_flow.measure.section import stations

PRESSURE_SAFETY = re.compile(r"\b(relief|safety valves?|(?<!blood )vessels?|rupture|bursting)\b", re.IGNORECASE)
PRESSURE_MARK = re.compile(r"\bPS\b")
PATIENT = re.compile(
    r"\b(blood|patients?|drugs?|infusions?|implants?|dialysis|insulin|cannulas?|catheters?|ventilators?|medical)\b",
    re.IGNORECASE,
)
OXYGEN = re.compile(r"\b(oxygen|lox|nitrox)\b", re.IGNORECASE)
HOLDING = re.compile(r"\b(leak|leakage|clearances?|load.holding|brakes?)\b", re.IGNORECASE)
DESIGN_PRESSURE = 0.5e5
"""Pa above ambient from which a body counts as pressure-containing (Directive 2014/68/EU)."""


def statements(solution: Solution, numbers: list[Number], checks: list[Check]) -> list[str]:
    """Statements of a result: the scope first, then what breaks, then the cautions that apply."""
    return [scope(solution.case.kind), *_breaking(checks), *_by_words(solution), *_by_content(solution, numbers, checks)]


def scope(kind: str) -> str:
    """What was computed, and what it is not."""
    return (
        f"Steady laminar single-phase 2-D ({kind}) computation on nominal geometry. Not a strength, fatigue, leak-tightness,"
        " cavitation, biocompatibility or compliance assessment. Numerical error bars exclude model and input uncertainty"
        " unless stated."
    )


def _breaking(checks):
    """One sentence for each check that breaks; the other places where it breaks are named."""
    broken: dict[str, list[Check]] = {}
    for c in checks:
        if c.verdict == "breaks":
            broken.setdefault(c.check, []).append(c)
    for same in broken.values():
        first, *rest = same
        of = f"{', '.join(first.of)}: " if first.of else ""
        also = f" (likewise: {', '.join(' '.join(c.of) for c in rest)})" if rest else ""
        yield f"NOT FOR USE as a design value: {of}{first.says}{also}."


def _words(solution: Solution) -> str:
    """All that names the case: title, fluid, part, ports and walls; underscores and hyphens count as spaces."""
    case = solution.case
    part = case.filled.get("part", {})
    named = [PurePath(str(part[key])).stem for key in ("script", "file") if key in part]
    return re.sub(r"[_-]", " ", " | ".join([case.title, case.fluid.name, *named, *solution.boundaries]))


def _by_words(solution):
    words = _words(solution)
    if PRESSURE_SAFETY.search(words) or PRESSURE_MARK.search(words):
        yield (
            "Capacity and pressure safety of such equipment are established by the applicable code and certified tests, not by"
            " this computation."
        )
    if PATIENT.search(words):
        yield (
            "Values are for comparing design variants. Safety and performance need bench and biological testing under the"
            " applicable standards, within a documented risk-management process."
        )
    if OXYGEN.search(words):
        yield (
            "Oxygen and enriched gas ignite by particle impact, compression heat and flow friction, none of which is computed:"
            " see the oxygen-service guides (ASTM G88 and MNL36, ISO 15001)."
        )
    if HOLDING.search(words):
        yield (
            "Leakage is that of the drawn, concentric clearance: a fully eccentric one leaks up to 2.5 times as much, and"
            " tolerance and hot oil add to it; take the worst of these."
        )


def _by_content(solution, numbers, checks):
    case = solution.case
    given = {n.name for n in numbers if not n.withheld}
    pressures = [st.static for st in stations(solution).values() if st.is_port]
    if max(pressures, default=0.0) > DESIGN_PRESSURE:
        yield "Flow pressures are not design pressures; strength, fatigue and proof test are not covered."
    if "force_x" in given:
        yield (
            "Forces are those of steady flow on nominal walls: eccentricity, burrs, dirt and friction are not computed; the"
            " margin is the designer's."
        )
    shares = [n for n in numbers if n.name == "flow_share"]
    if len(shares) > 1:
        yield (
            "The flow split holds for this viscosity and these port pressures: run it cold and hot, and with the resistance of"
            " the lines behind the ports."
        )
    if "flow_coefficient_kv" in given:
        yield "Flow coefficients hold at this Reynolds number only; they are laminar values, not catalogue or certified ones."
    if any(c.check == "vapour_pressure" and c.verdict != "holds" for c in checks) and case.ambient is not None:
        yield "The lowest pressure is a flag: vapour and air release are not modelled; supplier data and tests decide."
    if solution.system.level_is_free:
        yield "No port gives a pressure level: pressures are counted from their mean over the fluid."
    if not case.inertia:
        fluid = case.fluid
        largest = max(
            (fluid.density * abs(st.mean_velocity) * st.diameter / fluid.viscosity for st in stations(solution).values()),
            default=0.0,
        )
        tail = f"; the largest Reynolds number is {largest:.2g}, and inertia matters from about 1 on" if largest else ""
        yield f"Creeping flow: inertia is left out, and with it the kinetic part of every total pressure{tail}."
