"""Flows with a closed formula outside the finite-element space: they converge to it at the order of the method."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import CHANNEL, assert_order, errors, fitted_order, flow_case, forced_flow, values
from meshes import box_mesh

from fem_flow.case.resolved import WallCondition
from fem_flow.flow.problem import solve
from fem_flow.flow.system import State

MU, RHO = 0.3, 1.2
STATIC = ("static_pressure", 0.0)


def si_state(solution):
    """The fields in SI as a state, for `errors` (the mesh is in metres)."""
    s = solution.scales
    return State(solution.state.u * s.velocity, solution.state.p * s.pressure + s.level, np.zeros(0))


def annulus(kappa, n, length=0.3):
    """Outer radius 1; the radii of the nodes form a geometric series, as the profile does."""
    names = CHANNEL | {"bottom": ("inner", "wall"), "top": ("outer", "wall")}
    return box_mesh(2, n, box=(0, length, 0, 1), names=names, bend=lambda x, s: (x, kappa ** (1 - s)))


@pytest.mark.parametrize("kappa", [0.1, 0.5])
def test_annulus(kappa):
    """Flow at a given pressure difference, against R' ro^4 / mu of the table."""
    table = values("straight_channels", "annulus, kappa")
    k = table["kappa"].index(kappa)
    exact = 1.0 / (table["R_ro4_over_mu"][k] * MU)
    wrong = []
    for n in (3, 5, 8):
        case = flow_case({"inlet": ("static_pressure", 0.3), "outlet": STATIC}, "axisymmetric", MU, RHO)
        solution = solve(annulus(kappa, n), case)
        flow = -solution.boundaries["inlet"].flux(solution.state.u) * solution.scales.flow
        wrong.append(abs(flow / exact - 1))
    assert_order([1 / 3, 1 / 5, 1 / 8], wrong, 4)
    assert wrong[-1] < 2e-4


@pytest.mark.parametrize("kappa", [0.2, 0.5, 0.8])
def test_annulus_with_a_sliding_inner_wall(kappa):
    """Drag flow Q / (V ro^2) at equal pressures, and the axial force on the inner wall from the reaction."""
    entry = values("couette_and_annulus", "sliding annulus", kappa=kappa)
    walls = {"inner": WallCondition("sliding", 0.7)}
    case = flow_case({"inlet": STATIC, "outlet": STATIC}, "axisymmetric", MU, RHO, walls=walls)
    solution = solve(annulus(kappa, 12), case)
    s = solution.scales
    flow = -solution.boundaries["inlet"].flux(solution.state.u) * s.flow
    assert abs(flow / 0.7 / entry["Q_drag"] - 1) < 2e-5
    force = -solution.reaction()[0, solution.boundaries["inner"].nodes].sum() * s.force / 0.3
    assert abs(force / (MU * 0.7) / entry["F_drag"] - 1) < 2e-5


def test_velocity_in_an_annulus_converges_at_order_three():
    kappa, gradient, wrong = 0.2, 2.0, []

    def velocity(x, r):
        return gradient / (4 * MU) * (1 - r**2 - (1 - kappa**2) * np.log(r) / np.log(kappa)), 0 * x

    for n in (3, 5, 8):
        mesh = annulus(kappa, n)
        case = flow_case({"inlet": ("static_pressure", 0.3 * gradient), "outlet": STATIC}, "axisymmetric", MU, RHO)
        wrong.append(errors(mesh, "axisymmetric", si_state(solve(mesh, case)), velocity, lambda x, r: gradient * (0.3 - x))[0])
    assert_order([1 / 3, 1 / 5, 1 / 8], wrong, 3)


RING = {"bottom": ("outer", "wall"), "top": ("inner", "wall")}


def ring_bend(angle, depth):
    """The first coordinate is the angle, anticlockwise from +x, the second runs inwards from the outer radius 1."""
    return (1 - depth) * np.cos(angle), (1 - depth) * np.sin(angle)


def ring(n, eta):
    return box_mesh(4 * n, n, box=(0, 2 * np.pi, 0, 1 - eta), names=RING, bend=ring_bend, periodic=True)


def couette(entry, eta):
    """u_theta = A r + B / r and the pressure that balances its curvature, outer radius 1."""
    inner, outer = entry["at"]["omega_i"], entry["at"]["omega_o"]
    a = (outer - inner * eta**2) / (1 - eta**2)
    b = (inner - outer) * eta**2 / (1 - eta**2)

    def velocity(x, y):
        r2 = x**2 + y**2
        return -y * (a + b / r2), x * (a + b / r2)

    return velocity, lambda x, y: RHO * (
        0.5 * a**2 * (x**2 + y**2) + a * b * np.log(x**2 + y**2) - 0.5 * b**2 / (x**2 + y**2)
    )


@pytest.mark.parametrize(("omega_i", "omega_o"), [(1.0, 0.0), (1.0, -0.5)])
def test_circular_couette_in_a_ring(omega_i, omega_o):
    """A planar ring with turning walls, inertia included: orders 3 and 2; torque and pressure difference of the file."""
    eta = 0.5
    entry = values("couette_and_annulus", "Taylor-Couette, ro = 1", eta=eta, omega_i=omega_i, omega_o=omega_o)
    velocity, pressure = couette(entry, eta)
    wrong, sizes = [], (4, 6, 9)
    for n in sizes:
        mesh = ring(n, eta)
        system, state = forced_flow(mesh, "planar", MU, RHO, velocity, lambda x, y: (0 * x, 0 * x))
        wrong.append(errors(mesh, "planar", state, velocity, pressure))
    wrong = np.array(wrong)
    assert_order([1 / n for n in sizes], wrong[:, 0], 3)
    assert_order([1 / n for n in sizes], wrong[:, 1], 2)
    space, nodes = system.space, system.boundaries["outer"].nodes
    radius = np.hypot(*space.points[space.corner_nodes].T)
    difference = state.p[radius > 1 - 1e-9].mean() - state.p[radius < eta + 1e-9].mean()
    assert abs(difference / RHO / entry["dp"] - 1) < 0.03
    reaction, (x, y) = system.internal(state, RHO)[0][:, nodes], space.points[nodes].T
    torque = -(x * reaction[1] - y * reaction[0]).sum()
    assert abs(torque / MU / entry["torque_outer"] - 1) < 1e-4


def half_ring(n, eta=0.5, angle=np.pi):
    names = RING | {"left": ("start", "port"), "right": ("end", "port")}
    return box_mesh(2 * n, n, box=(0, angle, 0, 1 - eta), names=names, bend=ring_bend)


def test_sliding_curved_wall_drags_creeping_couette_flow_through_a_half_ring():
    """The outer wall slides along itself towards +x over the top, so clockwise; both ends are at 0 bar, and so is the flow."""
    eta, speed, wrong = 0.5, 0.8, []
    a, b = 1 / (1 - eta**2), -(eta**2) / (1 - eta**2)

    def velocity(x, y):
        r2 = x**2 + y**2
        return speed * y * (a + b / r2), -speed * x * (a + b / r2)

    walls = {"outer": WallCondition("sliding", speed)}
    case = flow_case({"start": STATIC, "end": STATIC}, mu=MU, rho=RHO, inertia=False, walls=walls)
    for n in (3, 5, 8):
        mesh = half_ring(n)
        solution = solve(mesh, case)
        wrong.append(errors(mesh, "planar", si_state(solution), velocity, lambda x, y: 0 * x))
        np.testing.assert_allclose(solution.boundaries["outer"].flux(solution.state.u), 0.0, atol=1e-15)
    wrong = np.array(wrong)
    assert_order([1 / 3, 1 / 5, 1 / 8], wrong[:, 0], 3)
    assert wrong[-1, 1] < 0.02 * MU * speed


def test_curved_slip_walls_let_nothing_pass():
    """Creeping flow through a bend with slip walls: each wall's flux is round-off and what enters leaves."""
    walls = {n: WallCondition("slip") for n in ("inner", "outer")}
    case = flow_case({"start": ("velocity", 0.5), "end": STATIC}, mu=MU, rho=RHO, walls=walls)
    solution = solve(half_ring(3, angle=2.0), case)
    flux = {name: piece.flux(solution.state.u) for name, piece in solution.boundaries.items()}
    scale = abs(flux["start"])
    assert abs(flux["inner"]) < 1e-15 * scale / 1e-2
    assert abs(flux["outer"]) < 1e-15 * scale / 1e-2
    assert abs(flux["start"] + flux["end"]) < 1e-12 * scale
    assert abs(flux["start"] * solution.scales.velocity + 0.5 * 0.5) < 1e-12


def test_curved_slip_wall_of_a_turned_body_lets_nothing_pass():
    """The normals at the nodes carry the radius, as the mass balance does."""
    mesh = box_mesh(6, 4, box=(0, 1, 0.2, 1), names=CHANNEL, bend=lambda x, y: (x, y * (1 + 0.5 * np.sin(np.pi * x) ** 2)))
    walls = {n: WallCondition("slip") for n in ("lower", "upper")}
    case = flow_case({"inlet": ("velocity", 0.5), "outlet": STATIC}, "axisymmetric", MU, RHO, walls=walls)
    solution = solve(mesh, case)
    for name in ("lower", "upper"):
        assert abs(solution.boundaries[name].flux(solution.state.u)) < 1e-14
    assert abs(solution.boundaries["outlet"].flux(solution.state.u)) > 0.01


DISC = {"left": ("lower", "wall"), "right": ("upper", "wall"), "bottom": ("hub", "port"), "top": ("rim", "port")}


@pytest.mark.parametrize("into", ["hub", "rim"])
def test_zero_bar_is_zero_at_a_radial_port(into):
    """Creeping source flow u_r = c / r between frictionless plates: its pressure is that of the other port, everywhere.

    The viscous stress 2 mu u_r / r of that port would shift the pressure by as much, were it left in the condition.
    """
    c, shift = 0.4, []
    walls = {n: WallCondition("slip") for n in ("lower", "upper")}
    inner, outer = 0.5, 1.0
    given, other = (inner, "rim") if into == "hub" else (outer, "hub")
    sign = 1.0 if into == "hub" else -1.0
    case = flow_case({into: ("velocity", c / given), other: STATIC}, "axisymmetric", MU, RHO, inertia=False, walls=walls)
    stress = 2 * MU * c / (outer if into == "hub" else inner) ** 2
    for n in (2, 3, 5):
        mesh = box_mesh(n, 2 * n, box=(0, 0.3, inner, outer), names=DISC)
        state = si_state(solve(mesh, case))
        wrong = errors(mesh, "axisymmetric", state, lambda x, r: (0 * x, sign * c / r), lambda x, r: 0 * x)
        shift.append((wrong[0], abs(state.p).max()))
    shift = np.array(shift)
    assert_order([1 / 2, 1 / 3, 1 / 5], shift[:, 0], 3)
    assert shift[-1, 1] < 0.01 * stress


@pytest.mark.parametrize("given", ["velocity", "static_pressure"])
def test_radial_creeping_flow_between_plates(given):
    """u_r = 6 U (z/h)(1 - z/h) r_i / r, drop 12 mu U r_i ln(r_o / r_i) / h^2 from port to port."""
    inner, outer, h, mean, wrong = 0.5, 1.0, 0.25, 0.6, []
    drop = 12 * MU * mean * inner * np.log(outer / inner) / h**2

    def pressure(x, r):
        return drop * np.log(outer / r) / np.log(outer / inner)

    def velocity(x, r):
        return 0 * x, 6 * mean * (x / h) * (1 - x / h) * inner / r

    case = flow_case(
        {"hub": (given, mean if given == "velocity" else drop), "rim": STATIC}, "axisymmetric", MU, RHO, inertia=False
    )
    for n in (3, 5, 8):
        mesh = box_mesh(n, 2 * n, box=(0, h, inner, outer), names=DISC)
        solution = solve(mesh, case)
        wrong.append(errors(mesh, "axisymmetric", si_state(solution), velocity, pressure))
    assert_order([1 / 3, 1 / 5, 1 / 8], np.array(wrong)[:, 0], 3)
    assert fitted_order([1 / 3, 1 / 5, 1 / 8], np.array(wrong)[:, 1]) > 1.85
    assert wrong[-1][1] < 1e-3 * drop
