"""Figures of the whole part: lowest pressure, narrowest gap, adiabatic temperature rise."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from fem_flow.flow.solution import Solution
from fem_flow.measure.energy import dissipation
from fem_flow.measure.number import Number, number
from fem_flow.measure.section import stations
from fem_flow.measure.singular import Flaw, first_jump, flaws, near_flaws


@dataclass(frozen=True)
class Lowest:
    """The lowest nodal pressure.

    Attributes
    ----------
    value : Pa, counted from ambient; place : (x, y), m
    elsewhere : Pa, the lowest away from singular points of the boundary
    flaw : the singular point that the lowest pressure lies next to (it has no limit there), or None
    """

    value: float
    place: tuple[float, float]
    elsewhere: float
    flaw: Flaw | None


def lowest_pressure(solution: Solution) -> Lowest:
    """Find the lowest pressure on the nodes of the mesh."""
    s, space, p = solution.scales, solution.space, solution.state.p
    near = near_flaws(solution)[space.corner_nodes]
    at = int(np.argmin(p))
    x, y = space.points[space.corner_nodes[at]] * s.length
    away = p[~near] if not near.all() else p
    flaw = None
    if near[at]:
        flaw = min(flaws(solution), key=lambda f: np.hypot(f.place[0] - x, f.place[1] - y))
    return Lowest(float(p[at]) * s.pressure + s.level, (float(x), float(y)), float(away.min()) * s.pressure + s.level, flaw)


def temperature_rise(solution: Solution) -> float | None:
    """Adiabatic, flow-weighted: dissipated power / (rho c_p Q), K.

    None where the heat capacity is unknown, nothing flows, or the dissipated power has no limit.
    """
    fluid = solution.case.fluid
    flow = sum(st.flow for st in stations(solution).values() if st.is_port and st.flow > 0)
    if fluid.heat_capacity is None or flow == 0.0 or first_jump(solution) is not None:
        return None
    return dissipation(solution) / (fluid.density * fluid.heat_capacity * flow)


def measure(solution: Solution) -> Iterator[Number]:
    """pressure_min, narrowest_gap, temperature_rise."""
    lowest = lowest_pressure(solution)
    where = f"at x = {lowest.place[0] * 1e3:.4g} mm, y = {lowest.place[1] * 1e3:.4g} mm"
    if lowest.flaw is not None:
        yield number("pressure_min", (), np.nan, f"the pressure has no lower limit here, for {lowest.flaw.says}")
    else:
        sharp = "; the suction right at sharp re-entrant corners has no limit and is not in it" if flaws(solution) else ""
        yield number("pressure_min", (), lowest.value, where + sharp)
    yield number("narrowest_gap", (), solution.mesh.narrowest_gap)
    rise = temperature_rise(solution)
    yield number("temperature_rise", (), np.nan if rise is None else rise, None if rise is not None else _why_no_rise(solution))


def _why_no_rise(solution):
    if not any(st.is_port and st.flow > 0 for st in stations(solution).values()):
        return "nothing flows through the ports"
    if solution.case.fluid.heat_capacity is None:
        return "the heat capacity is unknown: give heat_capacity under [fluid]"
    return f"the dissipated power has no limit: {first_jump(solution).says}"
