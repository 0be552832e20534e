"""Checks of the regime: laminar, planar, developed, reverse flow, gas and cavitation limits, heating."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.flow.laws import FlowLaw
from fem_flow.flow.profile import developed_profile, kinetic_coefficient
from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Check, Number
from fem_flow.measure.section import Station, stations, wall_ends
from fem_flow.measure.singular import near_flaws
from fem_flow.measure.whole import lowest_pressure, temperature_rise

AVILA = "Avila et al., Science 333 (2011): sustained turbulence in a pipe above Re_D = 2040; quoted from memory"
KANDA = "Shimomukai & Kanda (2006): plane channel, 1300 to 1400 on the gap; quoted from an abstract"
ANNULUS = "common practice: about 2000 on twice the gap; hydraulic books quote 20 to 100 for poppet ports"
DURST = "Durst et al., J. Fluids Eng. 127 (2005) 1154; quoted from memory"
COMMON = "common practice"
SIDE_WALLS = "exact rectangular duct, drop ratio 1/(1 - 0.63/a) for depth/gap a >= 2 (Shah & London 1978)"
NO_AMBIENT = "the absolute level is unknown: give ambient under [model]"
LIMITS = {
    "tube": (2000, 2300, "bore", AVILA),
    "annulus": (2000, 2300, "twice the gap", ANNULUS),
    "slot": (2600, 2800, "twice the width", KANDA),
}
"""Form of a section -> Reynolds number up to which laminar holds, above which it breaks, the length it is on, source."""
JET = 100
"""Reynolds number from which the jet behind a restriction can be unsteady (common practice: 100 to 300)."""
NO_BACK_FLOW = 1e-6
AIR = 1e5
"""Absolute pressure in Pa below which dissolved air comes out of a liquid (common practice: about 1 bar)."""


def laminar(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Reynolds number of each port and section against the limit of its form."""
    fluid = solution.case.fluid
    for st in _open(solution):
        reynolds = fluid.density * abs(st.mean_velocity) * st.diameter / fluid.viscosity
        hold, stop, length, source = LIMITS[_form(solution, st.name)]
        if reynolds < hold:
            verdict, tail = "holds", f"below {hold}"
        elif reynolds <= stop:
            verdict, tail = "caution", f"between {hold} and {stop}, where turbulence can set in"
        else:
            verdict, tail = "breaks", f"above {stop}: the flow is turbulent or in transition"
        if st.name == "throat" and verdict == "holds" and reynolds > JET:
            tail += f"; the jet behind a restriction can be unsteady from about {JET} on"
        yield Check("laminar", (st.name,), verdict, f"Re = {reynolds:.3g} on {length} ({_mm(st.diameter)}), {tail}", source)


def _open(solution):
    return [st for st in stations(solution).values() if not st.closed]


def _flowing_ports(solution):
    return [st for st in stations(solution).values() if st.is_port and st.total is not None]


def _form(solution, name):
    if solution.case.kind == "planar":
        return "slot"
    y = solution.space.points[solution.piece(name).nodes, 1]
    return "tube" if y.min() <= 1e-9 * y.max() else "annulus"


def planar(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Depth against the widest passage: what the side walls add, which a planar model does not see."""
    if solution.case.kind != "planar":
        return
    ports = [st for st in stations(solution).values() if st.is_port]
    depth = solution.case.depth
    if not ports:
        says = "no port tells the width of the passage; compare the depth with it yourself"
        yield Check("planar", (), "caution", says, COMMON)
        return
    largest = max(st.diameter for st in ports)
    widest = next(st for st in ports if st.diameter >= (1 - 1e-9) * largest)
    ratio = depth / (widest.diameter / 2)
    verdict = "holds" if ratio >= 20 else "caution" if ratio >= 5 else "breaks"
    effect = "the side walls more than double the drop"
    if ratio >= 2:
        effect = f"the side walls add about {100 * (1 / (1 - 0.63 / ratio) - 1):.2g} % to the drop"
    says = f"the depth is {ratio:.3g} times the width of {widest.name}: {effect} (20 and more holds, below 5 breaks)"
    yield Check("planar", (widest.name,), verdict, says, SIDE_WALLS)


def entrance_length(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Straight leg of each port against the length in which the profile develops."""
    legs = solution.case.legs or {}
    for st in _flowing_ports(solution):
        needed = development_length(solution, st)
        if st.flow > 0 and isinstance(solution.system.laws[st.name], FlowLaw):
            yield Check("entrance_length", (st.name,), "holds", "the developed profile is given at this inlet", DURST)
        elif st.name not in legs:
            says = f"the part declares no straight leg here; {_mm(needed)} would let the profile develop"
            yield Check("entrance_length", (st.name,), "caution", says, DURST)
        else:
            leg = legs[st.name]
            tail = "" if leg >= needed else ": the excess drop holds less than the whole loss; lengthen the leg"
            says = f"the leg is {_mm(leg)}, the profile needs {_mm(needed)}{tail}"
            yield Check("entrance_length", (st.name,), "caution" if tail else "holds", says, DURST)


def development_length(solution: Solution, st: Station) -> float:
    """Length in m in which the profile develops: pipe L/D and slot L/h of Durst et al. 2005, an annulus like a slot."""
    fluid = solution.case.fluid
    speed = fluid.density * abs(st.mean_velocity) / fluid.viscosity
    if _form(solution, st.name) == "tube":
        d = st.diameter
        return d * (0.619**1.6 + (0.0567 * speed * d) ** 1.6) ** (1 / 1.6)
    h = st.diameter / 2
    return h * (0.631**1.6 + (0.0442 * speed * h) ** 1.6) ** (1 / 1.6)


def developed_port(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Whether the flow at a port is what the port condition supposes: a developed profile, a uniform pressure."""
    drops = [abs(n.value) for n in numbers if n.name == "total_pressure_drop"]
    size = max([*drops, 1e-6 * solution.scales.pressure])
    for st in _flowing_ports(solution):
        port = solution.boundaries[st.name]
        if isinstance(solution.system.laws[st.name], FlowLaw):
            share = float(np.ptp(port.pressure(solution.state.p))) * solution.scales.pressure / size
            tail = "" if share <= 0.01 else ": something near the port disturbs it; lengthen the leg"
            says = f"pressure over the port varies by {100 * share:.2g} % of the largest drop, at most 1 %{tail}"
        elif solution.rho == 0.0:
            continue
        else:
            profile = developed_profile(port, -port.flux(solution.state.u), wall_ends(solution, st.name))
            alpha = kinetic_coefficient(port, profile)
            tail = (
                ""
                if abs(st.alpha / alpha - 1) <= 0.05
                else ": the profile has not developed where the drawing ends; lengthen the leg"
            )
            says = f"kinetic-energy coefficient {st.alpha:.3g}, {alpha:.3g} when developed (within 5 %){tail}"
        yield Check("developed_port", (st.name,), "caution" if tail else "holds", says, COMMON)


def back_flow(solution: Solution, name: str) -> float:
    """Share of the flow of an outlet that comes back through it."""
    port = solution.boundaries[name]
    speed = port.normal_velocity(solution.state.u)
    out = float((port.w * speed).sum())
    return float(-(port.w * np.minimum(speed, 0.0)).sum()) / out if out > 0 else 0.0


def reverse_flow(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Fluid that comes back through an outlet."""
    for st in _flowing_ports(solution):
        if st.flow >= 0:
            continue
        share = back_flow(solution, st.name)
        if share <= NO_BACK_FLOW:
            yield Check("reverse_flow", (st.name,), "holds", "no fluid comes back through this outlet", COMMON)
            continue
        says = f"{100 * share:.2g} % of the flow comes back through this outlet, above 1 % breaks: lengthen the leg or move it"
        yield Check("reverse_flow", (st.name,), "caution" if share <= 0.01 else "breaks", says, COMMON)


def mach(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Largest speed against the speed of sound: for gases, and for a liquid whose speed of sound is known."""
    fluid = solution.case.fluid
    if fluid.sound_speed is None:
        if fluid.is_gas:
            yield Check("mach", (), "caution", "the speed of sound is unknown: give sound_speed under [fluid]", COMMON)
        return
    value = float(np.hypot(*solution.state.u).max()) * solution.scales.velocity / fluid.sound_speed
    verdict, word = ("holds", "below") if value < 0.3 else ("breaks", "not below")
    yield Check("mach", (), verdict, f"largest Mach number {value:.2g}, {word} 0.3", COMMON)


def relative_pressure_drop(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """For gases: pressure differences against the absolute pressure."""
    if not solution.case.fluid.is_gas:
        return
    if solution.case.ambient is None:
        yield Check("relative_pressure_drop", (), "caution", NO_AMBIENT, COMMON)
        return
    near = near_flaws(solution)[solution.space.corner_nodes]
    p = solution.state.p[~near] if not near.all() else solution.state.p
    absolute = solution.case.ambient + solution.scales.level + p * solution.scales.pressure
    if absolute.min() <= 0:
        yield Check("relative_pressure_drop", (), "breaks", "the lowest absolute pressure is not above zero", COMMON)
        return
    share = float(np.ptp(absolute) / absolute.max())
    says = f"the pressure differs by {100 * share:.2g} % of its absolute level, limit 5 % for a constant density"
    yield Check("relative_pressure_drop", (), "holds" if share < 0.05 else "breaks", says, COMMON)


def vapour_pressure(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Lowest absolute pressure against the vapour pressure of a liquid, and against where dissolved air comes out."""
    fluid, ambient = solution.case.fluid, solution.case.ambient
    if fluid.is_gas:
        return
    if ambient is None:
        yield Check("vapour_pressure", (), "caution", NO_AMBIENT, COMMON)
        return
    lowest, vapour = lowest_pressure(solution), fluid.vapour_pressure
    value = (lowest.value if lowest.flaw is None else lowest.elsewhere) + ambient
    where = f"at x = {lowest.place[0] * 1e3:.4g} mm, y = {lowest.place[1] * 1e3:.4g} mm"
    said = f"lowest pressure {value / 1e5:.4g} bar absolute {where if lowest.flaw is None else 'away from sharp corners'}"
    if value <= 0:
        verdict, tail = "breaks", ": outside the single-phase liquid model"
    elif vapour is not None and value <= vapour:
        verdict, tail = "breaks", f", vapour pressure {vapour / 1e5:.3g} bar: the liquid can boil there"
    elif vapour is None:
        verdict, tail = "caution", "; the vapour pressure is unknown: give vapour_pressure under [fluid]"
    else:
        verdict, tail = "holds", f", vapour pressure {vapour / 1e5:.3g} bar"
    if verdict != "breaks" and lowest.flaw is not None:
        verdict, tail = "caution", f"{tail}; it has no lower limit, for {lowest.flaw.says}"
    if verdict != "breaks" and value < AIR:
        verdict, tail = "caution", f"{tail}; below 1 bar dissolved air comes out"
    yield Check("vapour_pressure", (), verdict, f"{said}{tail}; a warning, not a prediction of cavitation", COMMON)


def heating(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Adiabatic temperature rise, which an isothermal viscosity does not see.

    Liquids only: a throttled gas takes the heat back by expanding, and `relative_pressure_drop` limits it.
    """
    rise, fluid = temperature_rise(solution), solution.case.fluid
    if fluid.is_gas or not any(st.flow > 0 for st in _flowing_ports(solution)):
        return
    if fluid.heat_capacity is None:
        says = "the heat capacity is unknown: give heat_capacity under [fluid]"
        yield Check("temperature_rise", (), "caution", says, COMMON)
    elif rise is not None:
        verdict = "holds" if rise <= 0.6 else "caution" if rise <= 2.1 else "breaks"
        tail = ": give the viscosity at the mean temperature" if verdict == "breaks" else ""
        says = (
            f"adiabatic temperature rise {rise:.2g} K (0.6 K holds, about 3 % of an oil's viscosity; above 2.1 K breaks){tail}"
        )
        yield Check("temperature_rise", (), verdict, says, COMMON)


def _mm(metres):
    return f"{metres * 1e3:.3g} mm"


CHECKS = (
    laminar, planar, entrance_length, developed_port, reverse_flow, mach, relative_pressure_drop, vapour_pressure, heating,
)  # fmt: skip
