"""Solutions as a whole: their identities, independence of the quadrature, pickling."""

from __future__ import annotations

import pickle

import numpy as np
import pytest
from flow_tools import CHANNEL, PIPE, flow_case
from meshes import box_mesh

from fem_flow.case.resolved import WallCondition
from fem_flow.flow import kernels, linear
from fem_flow.flow.problem import solve

STATIC = ("static_pressure", 0.0)


def bend(x, y):
    return x + 0.05 * np.sin(2 * y) * x * (2 - x), y * (1 - 0.35 * np.sin(np.pi * x / 2) ** 2)


def throttle(kind, inlet=("velocity", 1.0), walls=None, start=None, extra_order=0, n=5, inertia=True):
    """A channel or tube that narrows; Re some 30 on the width."""
    names = CHANNEL if kind == "planar" else PIPE
    mesh = box_mesh(3 * n, n, box=(0, 2, 0, 1), names=names, bend=bend)
    case = flow_case({"inlet": inlet, "outlet": STATIC}, kind, 0.06, 1.0, inertia, walls=walls)
    return solve(mesh, case, start, extra_order=extra_order)


DRIVES = pytest.mark.parametrize(("inlet", "walls"), [
    (("velocity", 1.0), None),
    (("total_pressure", 4.0), None),
    (("static_pressure", 0.0), {"upper": WallCondition("sliding", 1.0)}),
    (("velocity", 1.0), {"upper": WallCondition("slip")}),
], ids=["flow", "total pressure", "sliding wall", "slip wall"])
KINDS = pytest.mark.parametrize("kind", ["planar", "axisymmetric"])


def integral(solution, density):
    """Sum over the cells of a density (..., E, q) given from group and states."""
    u, p = solution.state.u, solution.state.p
    return sum((g.w * density(g, kernels.states(g, u, p))).sum(axis=(-2, -1)) for g in solution.space.groups)


def dissipation(solution):
    def density(g, s):
        strain = s.ux_x**2 + s.uy_y**2 + 0.5 * (s.ux_y + s.uy_x) ** 2
        return 2 * solution.scales.mu * (strain if g.r is None else strain + (s.uy / g.r) ** 2)

    return integral(solution, density)


def boundary_sum(solution, density):
    """Sum over all boundaries of a density (..., m, q) given from the velocity (2, m, q) and its normal part (m, q)."""
    total = 0.0
    for piece in solution.boundaries.values():
        u = np.stack([piece.at_points(solution.state.u[k]) for k in (0, 1)])
        total = total + (piece.w * density(u, piece.normal_velocity(solution.state.u))).sum(axis=(-2, -1))
    return total


@KINDS
@DRIVES
@pytest.mark.parametrize("inertia", [True, False])
def test_discrete_energy_identity(kind, inlet, walls, inertia):
    """u . R = dissipation + rho/2 oint |u|^2 u.n - rho/2 int |u|^2 div u - int p div u, and the last is 0 but for the ports.

    R is the nodal reaction of the whole boundary; continuity holds against every pressure, so int p div u = 0.
    """
    solution = throttle(kind, inlet, walls, inertia=inertia)
    rho = solution.rho
    power = float((solution.reaction() * solution.state.u).sum())
    lost = dissipation(solution)
    carried = boundary_sum(solution, lambda u, un: 0.5 * rho * (u**2).sum(axis=0) * un)
    created = integral(solution, lambda g, s: 0.5 * rho * (s.ux**2 + s.uy**2) * kernels.divergence_at(g, s))
    by_pressure = integral(solution, lambda g, s: s.p * kernels.divergence_at(g, s))
    assert lost > 0
    assert abs(by_pressure) < 1e-10 * lost
    assert abs(power - lost - carried + created) < 1e-10 * lost
    if inertia:
        assert abs(created) > 1e-8 * lost


@KINDS
@DRIVES
def test_discrete_momentum_identity(kind, inlet, walls):
    """sum of R_x = rho oint u_x u.n - rho int u_x div u; in the plane for y as well."""
    solution = throttle(kind, inlet, walls)
    reaction = solution.reaction()
    flux = boundary_sum(solution, lambda u, un: solution.rho * u * un)
    inside = integral(solution, lambda g, s: solution.rho * np.stack([s.ux, s.uy]) * kernels.divergence_at(g, s))
    left = (reaction.sum(axis=1) - flux + inside) / np.abs(reaction).sum()
    assert abs(left[0]) < 1e-10
    if kind == "planar":
        assert abs(left[1]) < 1e-10


def test_reaction_is_zero_inside_and_at_free_walls():
    solution = throttle("planar", walls={"upper": WallCondition("slip")})
    reaction = solution.reaction()
    edge = np.unique(np.concatenate([b.nodes for b in solution.boundaries.values()]))
    inside = np.setdiff1d(np.arange(solution.space.n_velocity), edge)
    size = np.linalg.norm(reaction)
    assert np.abs(reaction[:, inside]).max() < 1e-9 * size
    fixed = solution.system.fixed
    frame = np.abs(fixed.frames.to_frame(reaction))
    ports = np.concatenate([solution.boundaries[name].nodes for name in ("inlet", "outlet")])
    wall = np.setdiff1d(solution.boundaries["upper"].nodes, ports)
    assert np.where(fixed.mask, 0.0, frame)[:, wall].max() < 1e-9 * size
    assert np.where(fixed.mask, frame, 0.0)[:, wall].max() > 1e-3 * size


def figures(solution):
    """Pressure drop by the reaction at the inlet, force on the upper wall, dissipation."""
    nodes = solution.boundaries["inlet"].nodes
    reaction, u = solution.reaction(), solution.state.u
    flow = solution.boundaries["inlet"].flux(u)
    drop = float((reaction[:, nodes] * u[:, nodes]).sum()) / flow
    force = reaction[:, solution.boundaries["upper"].nodes].sum(axis=1)
    return np.array([drop, *force, dissipation(solution)])


@KINDS
def test_a_finer_quadrature_changes_no_figure(kind):
    """Order raised by two: drop, force and dissipation change by less than 1e-6 on curved cells."""
    plain, finer = (throttle(kind, extra_order=extra, n=10) for extra in (0, 2))
    assert finer.space.groups[0].phi.shape[0] > plain.space.groups[0].phi.shape[0]
    before, after = figures(plain), figures(finer)
    if kind == "axisymmetric":
        before, after = before[[0, 1, 3]], after[[0, 1, 3]]
    np.testing.assert_allclose(after, before, rtol=1e-6)


def test_a_finer_quadrature_changes_straight_planar_flow_by_round_off_only():
    mesh = box_mesh(8, 8)
    case = flow_case({}, mu=0.01, rho=1.0, walls={"top": WallCondition("sliding", 1.0)})
    plain, finer = solve(mesh, case), solve(mesh, case, extra_order=2)
    np.testing.assert_allclose(finer.state.u, plain.state.u, atol=1e-9)


def test_pickled_solution_is_the_same_and_small():
    solution = throttle("axisymmetric", ("total_pressure", 4.0), n=8)
    at = [(1.0, 0.2), (0.3, 0.9), (5.0, 5.0)]
    velocity, pressure, reaction = solution.velocity(at), solution.pressure(at), solution.reaction()
    packed = pickle.dumps(solution)
    assert len(packed) < 250 * solution.unknowns
    again = pickle.loads(packed)
    np.testing.assert_array_equal(again.velocity(at), velocity)
    np.testing.assert_array_equal(again.pressure(at), pressure)
    np.testing.assert_array_equal(again.reaction(), reaction)
    assert again.port_pressure("inlet") == solution.port_pressure("inlet")
    warm = solve(again.mesh, again.case, start=again)
    assert warm.history.iterations <= 1
    np.testing.assert_allclose(warm.state.u, solution.state.u, atol=1e-9)


def test_seconds_and_counts_are_reported():
    solution = throttle("planar")
    assert set(solution.seconds) == {"assemble", "factorise"}
    assert all(0 < seconds < 60 for seconds in solution.seconds.values())
    assert solution.counts.rung
    assert 0 < solution.counts.worst_residual < 1e-10
    assert solution.unknowns == len(solution.system.free)


def test_inputs_are_not_changed():
    mesh = box_mesh(4, 4, names=CHANNEL)
    case = flow_case({"inlet": ("velocity", 1.0), "outlet": STATIC}, mu=0.1, rho=1.0)
    start = solve(mesh, case)
    packed = pickle.dumps((mesh, case, start.state))
    solve(mesh, flow_case({"inlet": ("velocity", 1.1), "outlet": STATIC}, mu=0.1, rho=1.0), start=start)
    assert pickle.dumps((mesh, case, start.state)) == packed


def test_superlu_alone_gives_the_same_flow(monkeypatch):
    usual = throttle("planar", ("total_pressure", 4.0))
    monkeypatch.setattr(linear, "ladder", lambda: {"superlu": linear.SuperLU})
    other = throttle("planar", ("total_pressure", 4.0))
    assert other.counts.rung == "superlu"
    assert other.counts.analyses == other.counts.factorisations == other.history.iterations
    np.testing.assert_allclose(other.state.u, usual.state.u, atol=1e-11)
