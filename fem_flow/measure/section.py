"""Figures of ports and sections: flow, velocity, pressures, Reynolds number."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from fem_flow.flow.laws import ClosedLaw
from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Number, number
from fem_flow.measure.rim import rim_of

STILL = 1e-9
"""A section whose flow is below this share of the flow through the part has no flow-weighted figures."""


@dataclass(frozen=True)
class Station:
    """What passes a port or section, in SI; flow positive into the passage, through a section towards +x (+y).

    ``static`` and ``total`` are None where nothing flows.
    """

    name: str
    is_port: bool
    closed: bool
    flow: float
    area: float
    diameter: float
    static: float
    total: float | None
    alpha: float | None

    @property
    def mean_velocity(self) -> float:
        return self.flow / self.area


def stations(solution: Solution) -> dict[str, Station]:
    """Ports in the part's order, then sections; made once."""
    if "_stations" not in solution.__dict__:
        through = _through(solution)
        names = [*solution.case.ports, *solution.sections]
        solution.__dict__["_stations"] = {name: _station(solution, name, through) for name in names}
    return solution.__dict__["_stations"]


def _through(solution):
    fluxes = [abs(solution.boundaries[n].flux(solution.state.u)) for n in solution.case.ports]
    return 0.5 * sum(fluxes)


def _station(solution, name, through):
    s, piece = solution.scales, solution.piece(name)
    is_port = name in solution.case.ports
    inward = -1.0 if is_port else 1.0
    u = solution.state.u
    speed = inward * piece.normal_velocity(u)
    flux = float((piece.w * speed).sum())
    moving = abs(flux) > STILL * through and flux != 0.0
    law = solution.system.laws.get(name) if is_port else None
    static = _static(solution, name, piece, flux, moving, law)
    alpha = total = None
    if moving:
        square = piece.at_points(u[0]) ** 2 + piece.at_points(u[1]) ** 2
        head = float((piece.w * square * speed).sum()) / flux
        alpha = head / (flux / piece.area) ** 2
        total = (static + 0.5 * solution.rho * head) * s.pressure + s.level
    return Station(
        name,
        is_port,
        isinstance(law, ClosedLaw),
        flux * s.flow,
        piece.area * s.area,
        solution.diameters[name] * s.length,
        static * s.pressure + s.level,
        total,
        alpha,
    )


def _static(solution, name, piece, flux, moving, law):
    """Scaled static pressure: imposed or found at an open port, from the reaction at a port with a given profile."""
    pressure = piece.pressure(solution.state.p)
    if law is not None and not law.essential:
        return solution.system.port_pressure(solution.state, name)
    if not moving:
        return float((piece.w * pressure).sum()) / piece.area
    if law is None:
        return float((piece.w * pressure * piece.normal_velocity(solution.state.u)).sum()) / flux
    rim = rim_of(solution)
    power = float((rim.share(rim.of(name)) * solution.state.u).sum())
    radial = float((piece.w * solution.system.radial_stress(piece) * piece.normal_velocity(solution.state.u) ** 2).sum())
    return (power + radial) / flux


def wall_ends(solution: Solution, name: str) -> dict[int, float]:
    """Nodes of a port that lie on no-slip walls -> scaled velocity of the wall into the passage there."""
    port, fixed = solution.boundaries[name], solution.system.fixed
    walls = [solution.boundaries[w].nodes for w in solution.mesh.names("wall") if not _slips(solution, w)]
    shared = np.intersect1d(port.nodes, np.concatenate(walls)) if walls else np.zeros(0, dtype=int)
    speed = -port.normal[0, 0] @ fixed.frames.to_cartesian(fixed.values)[:, shared]
    return dict(zip(shared.tolist(), speed.tolist(), strict=True))


def _slips(solution, wall):
    condition = solution.case.walls.get(wall)
    return condition is not None and condition.what == "slip"


def measure(solution: Solution) -> Iterator[Number]:
    """Flow, mean velocity, area, pressures, kinetic-energy coefficient, diameter, Reynolds number and flow share."""
    found = stations(solution)
    leaving = sum(-st.flow for st in found.values() if st.is_port and st.flow < 0)
    fluid = solution.case.fluid
    for name, st in found.items():
        of = (name,)
        still = None if st.total is not None else "the port is closed" if st.closed else "no net flow passes here"
        yield number("flow_rate", of, st.flow)
        yield number("mean_velocity", of, st.mean_velocity)
        yield number("area", of, st.area)
        imposed = solution.system.laws.get(name) is not None and not solution.system.laws[name].essential
        yield number("static_pressure", of, st.static, f"{still}; this is the area mean" if still and not imposed else None)
        why = f"{still}, so there is no flow-weighted mean" if still else None
        yield number("total_pressure", of, np.nan if still else st.total, why)
        yield number("kinetic_energy_coefficient", of, np.nan if still else st.alpha, why)
        yield number("hydraulic_diameter", of, st.diameter)
        yield number("reynolds_number", of, fluid.density * abs(st.mean_velocity) * st.diameter / fluid.viscosity)
        if st.is_port and st.flow < 0 and st.total is not None:
            yield number("flow_share", of, -st.flow / leaving)
