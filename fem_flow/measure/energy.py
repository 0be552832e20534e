"""Dissipation, and the energy and momentum that pass the boundary."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.flow import kernels
from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Number, number
from fem_flow.measure.rim import rim_of
from fem_flow.measure.singular import flaws


def cell_dissipation(solution: Solution) -> np.ndarray:
    """(n_cells,) scaled int 2 mu D:D of each cell; made once."""
    if "_dissipation" not in solution.__dict__:
        solution.__dict__["_dissipation"] = _cell_dissipation(solution)
    return solution.__dict__["_dissipation"]


def dissipation(solution: Solution) -> float:
    """Viscous dissipation of the whole part, W."""
    return float(cell_dissipation(solution).sum()) * solution.scales.power


def _cell_dissipation(solution):
    total = np.zeros(len(solution.space.cells))
    for g in solution.space.groups:
        s = kernels.states(g, solution.state.u, solution.state.p)
        total[g.index] = (g.w * solution.scales.mu * _rate_squared(g, s)).sum(axis=1)
    return total


def _rate_squared(g, s):
    """2 D:D at the quadrature points."""
    rate = 2 * s.ux_x**2 + 2 * s.uy_y**2 + (s.ux_y + s.uy_x) ** 2
    return rate if g.r is None else rate + 2 * (s.uy / g.r) ** 2


def measure(solution: Solution) -> Iterator[Number]:
    """Dissipated power of the part and of each named region."""
    cells = cell_dissipation(solution)
    everything = np.arange(len(cells))
    for of, chosen in ((), everything), *(((name,), cells_of) for name, cells_of in solution.mesh.regions.items()):
        nodes = solution.space.cells[chosen]
        jump = next((f for f in flaws(solution) if f.jump and (nodes == f.node).any()), None)
        if jump is None:
            yield number("dissipated_power", of, cells[chosen].sum() * solution.scales.power)
        else:
            yield number("dissipated_power", of, np.nan, f"the dissipated power has no limit: {jump.says}")


def boundary_power(solution: Solution) -> float:
    """Scaled power of the stresses on the whole boundary, from the reaction: sum R.u."""
    rim = rim_of(solution)
    nodes = rim.boundary.nodes
    return float((rim.reaction[:, nodes] * solution.state.u[:, nodes]).sum())


def wall_power(solution: Solution) -> float:
    """Scaled power that sliding walls put into the fluid."""
    rim = rim_of(solution)
    moving = [n for n in solution.mesh.names("wall") if _slides(solution, n)]
    return sum(float((rim.share(rim.of(n)) * solution.state.u).sum()) for n in moving)


def _slides(solution, name):
    condition = solution.case.walls.get(name)
    return condition is not None and condition.what == "sliding"


def discrete_energy_defect(solution: Solution) -> float:
    """What is left of the energy identity of the discrete fields, relative to the dissipation: round-off.

    sum R.u = dissipation + rho/2 oint |u|^2 u.n - rho/2 int |u|^2 div u - int p div u. The last two terms vanish in exact flow;
    the discrete fields have div u != 0.
    """
    rho, rim = solution.rho, rim_of(solution).boundary
    u, p = solution.state.u, solution.state.p
    square = rim.at_points(u[0]) ** 2 + rim.at_points(u[1]) ** 2
    inside = 0.5 * rho * float((rim.w * square * rim.normal_velocity(u)).sum())
    for g in solution.space.groups:
        s = kernels.states(g, u, p)
        div = kernels.divergence_at(g, s)
        inside -= float((g.w * (0.5 * rho * (s.ux**2 + s.uy**2) + s.p) * div).sum())
    dissipation = float(cell_dissipation(solution).sum())
    return (boundary_power(solution) - dissipation - inside) / max(dissipation, np.finfo(float).tiny)


def momentum_terms(solution: Solution) -> dict[str, np.ndarray]:
    """Scaled momentum through each boundary, (2,) each: reaction of walls, stress and momentum flux of ports."""
    rim, u = rim_of(solution), solution.state.u
    terms = {}
    for name, piece in solution.boundaries.items():
        force = rim.share(rim.of(name)).sum(axis=1)
        speed = piece.normal_velocity(u)
        flux = [float((piece.w * piece.at_points(u[k]) * speed).sum()) for k in (0, 1)]
        terms[name] = force - solution.rho * np.array(flux)
    return terms


def discrete_momentum_defect(solution: Solution) -> float:
    """What is left of the axial (x) momentum identity, relative to its largest term: round-off.

    sum R_x = rho oint u_x u.n - rho int u_x div u.
    """
    u, p = solution.state.u, solution.state.p
    terms = momentum_terms(solution)
    inside = 0.0
    for g in solution.space.groups:
        s = kernels.states(g, u, p)
        inside += solution.rho * float((g.w * s.ux * kernels.divergence_at(g, s)).sum())
    size = max(abs(t[0]) for t in terms.values())
    return (sum(t[0] for t in terms.values()) + inside) / max(size, np.finfo(float).tiny)
