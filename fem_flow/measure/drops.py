"""Figures between two ports: drops, loss and flow coefficients; the discharge coefficient of the throat."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations

import numpy as np

from fem_flow.flow.profile import developed_gradient
from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Number, number
from fem_flow.measure.section import Station, stations, wall_ends

GPM_PER_CUBIC_METRE_PER_HOUR = 1 / (3.785411784e-3 * 60)
"""US gallon of 231 cubic inches: 3.785411784 L exactly."""
PSI = 6894.757293168361
"""Pa; pound-force and inch are exact by definition."""


def measure(solution: Solution) -> Iterator[Number]:
    """Drops, excess drop, loss coefficient, resistance, Kv, Cv of every pair of open ports; Cd of the throat."""
    found = stations(solution)
    ports = [st for st in found.values() if st.is_port and not st.closed and st.total is not None]
    friction = {st.name: leg_friction(solution, st.name) for st in ports} if solution.case.legs is not None else None
    for a, b in combinations(ports, 2):
        yield from _pair(solution, a, b, friction)
    if "throat" in found:
        yield from _discharge(solution, found["throat"], ports)


def leg_friction(solution: Solution, name: str) -> float:
    """Developed friction of the straight leg at a port, Pa, as a fall of pressure into the passage; 0 without a leg."""
    leg = (solution.case.legs or {}).get(name, 0.0)
    if leg == 0.0:
        return 0.0
    port, s = solution.boundaries[name], solution.scales
    gradient = developed_gradient(port, -port.flux(solution.state.u), wall_ends(solution, name))
    return float(gradient * s.mu * s.pressure * leg / s.length)


def _pair(solution: Solution, a: Station, b: Station, friction):
    of = (a.name, b.name)
    density = solution.case.fluid.density
    static, total = a.static - b.static, a.total - b.total
    yield number("static_pressure_drop", of, static)
    yield number("total_pressure_drop", of, total)
    excess = total if friction is None else total - friction[a.name] + friction[b.name]
    note = "the part declares no straight legs: this is the total drop" if friction is None else None
    yield number("excess_pressure_drop", of, excess, note)
    if a.flow * b.flow < 0:  # between two outlets there is no loss
        faster = a if abs(a.mean_velocity) >= (1 - 1e-9) * abs(b.mean_velocity) else b
        loss = excess * np.sign(a.flow) / (0.5 * density * faster.mean_velocity**2)
        tail = "; the part declares no straight legs, so their friction is in it" if friction is None else ""
        yield number("loss_coefficient", of, loss, f"V is the mean velocity at {faster.name}{tail}")
    if abs(a.flow + b.flow) <= 1e-6 * abs(a.flow):
        yield number("hydraulic_resistance", of, total / a.flow)
        yield from _flow_coefficients(of, a.flow, static, density)


def _flow_coefficients(of, flow, static, density):
    with_flow = static * np.sign(flow)
    if with_flow <= 0:
        why = "the static pressure rises in the direction of flow, so there is no flow coefficient"
        yield number("flow_coefficient_kv", of, np.nan, why)
        yield number("flow_coefficient_cv", of, np.nan, why)
        return
    kv = abs(flow) * 3600 * np.sqrt(density / 1000 / (with_flow / 1e5))
    gravity = density / 1000
    cv = abs(flow) * 3600 * GPM_PER_CUBIC_METRE_PER_HOUR * np.sqrt(gravity / (with_flow / PSI))
    note = "at this Reynolds number, laminar; not a rated value"
    yield number("flow_coefficient_kv", of, kv, note)
    yield number("flow_coefficient_cv", of, cv, note)


def _discharge(solution, throat: Station, ports):
    entering = [p for p in ports if p.flow > 0]
    leaving = [p for p in ports if p.flow < 0]
    if len(entering) != 1 or len(leaving) != 1 or throat.total is None:
        return
    drop = entering[0].total - leaving[0].total
    if drop <= 0:
        yield number("discharge_coefficient", ("throat",), np.nan, "the total pressure does not fall across the part")
        return
    ideal = throat.area * np.sqrt(2 * drop / solution.case.fluid.density)
    yield number("discharge_coefficient", ("throat",), abs(throat.flow) / ideal)
