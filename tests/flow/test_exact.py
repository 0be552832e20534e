"""Flows with a closed formula in the finite-element space: they come out to round-off."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import CHANNEL, HALF, PIPE, flow_case, turned, values
from meshes import box_mesh

from fem_flow.case.resolved import WallCondition
from fem_flow.flow.problem import solve

ROUND_OFF = 2e-11
CONVERGED = 5e-10
"""Where the answer comes by Newton steps: they end at a residual of 1e-10."""

MU, RHO, HEIGHT, LENGTH = 0.02, 1.5, 0.5, 1.25
STATIC = ("static_pressure", 0.0)
SLOT, TUBE = values("straight_channels", "slot alpha")["value"], values("straight_channels", "tube alpha")["value"]


def channel(names=CHANNEL, bend=None, nx=5, ny=3):
    return box_mesh(nx, ny, box=(0, LENGTH, 0, HEIGHT), names=names, bend=bend)


def slot(mean, height=HEIGHT):
    """Velocity and pressure gradient of the developed flow between plates."""
    return lambda y: 6 * mean * (y / height) * (1 - y / height), 12 * MU * mean / height**2


def tube(mean):
    return lambda r: 2 * mean * (1 - (r / HEIGHT) ** 2), 8 * MU * mean / HEIGHT**2


def assert_developed(solution, profile, gradient, outlet=0.0, degrees=0.0, within=ROUND_OFF):
    """All nodes carry the profile along the channel (turned by ``degrees``) and a pressure that falls to ``outlet``."""
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    x, y = solution.space.points.T * solution.space.length
    along, across = c * x + s * y, c * y - s * x
    u = solution.state.u * solution.scales.velocity
    expected = profile(across)
    size = np.abs(expected).max()
    np.testing.assert_allclose(c * u[0] + s * u[1], expected, rtol=0, atol=within * size)
    np.testing.assert_allclose(c * u[1] - s * u[0], 0.0, atol=within * size)
    p = solution.nodal_pressure() * solution.scales.pressure + solution.scales.level
    drop = max(abs(gradient) * LENGTH, MU * size / HEIGHT)
    np.testing.assert_allclose(p, outlet + gradient * (LENGTH - along), rtol=0, atol=10 * within * drop)


CASES = pytest.mark.parametrize(("kind", "names", "flow", "alpha"), [
    ("planar", CHANNEL, slot, SLOT), ("axisymmetric", PIPE, tube, TUBE),
], ids=["slot", "tube"])


@CASES
@pytest.mark.parametrize("inertia", [True, False])
def test_flow_given(kind, names, flow, alpha, inertia):
    mean = 0.7
    area = HEIGHT if kind == "planar" else np.pi * HEIGHT**2
    ports = {"inlet": ("flow", mean * area * (0.3 if kind == "planar" else 1.0)), "outlet": STATIC}
    solution = solve(channel(names), flow_case(ports, kind, MU, RHO, inertia, depth=0.3))
    assert_developed(solution, *flow(mean))


@CASES
def test_velocity_given_outwards(kind, names, flow, alpha):
    solution = solve(channel(names), flow_case({"inlet": ("velocity", -0.4), "outlet": STATIC}, kind, MU, RHO))
    assert_developed(solution, *flow(-0.4))


@CASES
def test_pressure_at_both_ends(kind, names, flow, alpha):
    profile, gradient = flow(1.3)
    ports = {"inlet": ("static_pressure", gradient * LENGTH + 5.0), "outlet": ("static_pressure", 5.0)}
    solution = solve(channel(names), flow_case(ports, kind, MU, RHO))
    assert_developed(solution, profile, gradient, outlet=5.0)


@CASES
@pytest.mark.parametrize("mean", [1.3, 0.004, 0.02], ids=["fast", "creeping", "blended"])
def test_total_pressure_at_the_inlet(kind, names, flow, alpha, mean):
    """alpha of the developed profile is 54/35 in a slot and 2 in a tube, at any Reynolds number."""
    profile, gradient = flow(mean)
    total = gradient * LENGTH + alpha * 0.5 * RHO * mean**2
    solution = solve(channel(names), flow_case({"inlet": ("total_pressure", total), "outlet": STATIC}, kind, MU, RHO))
    assert_developed(solution, profile, gradient, within=CONVERGED)
    assert abs(solution.port_pressure("inlet") - gradient * LENGTH) < 1e-9 * total


@CASES
def test_total_pressure_where_the_flow_leaves_is_static(kind, names, flow, alpha):
    profile, gradient = flow(-0.9)
    ports = {"inlet": ("total_pressure", 0.0), "outlet": ("static_pressure", -gradient * LENGTH)}
    solution = solve(channel(names), flow_case(ports, kind, MU, RHO))
    assert_developed(solution, profile, gradient, outlet=-gradient * LENGTH)


@pytest.mark.parametrize("degrees", [30.0, 90.0, 200.0])
@pytest.mark.parametrize("inlet", ["velocity", "static_pressure"])
def test_oblique_channel(degrees, inlet):
    profile, gradient = slot(0.8)
    given = 0.8 if inlet == "velocity" else gradient * LENGTH
    solution = solve(channel(bend=turned(degrees)), flow_case({"inlet": (inlet, given), "outlet": STATIC}, mu=MU, rho=RHO))
    assert (len(solution.system.fixed.frames.turned) > 0) == (degrees != 90.0)
    assert_developed(solution, profile, gradient, degrees=degrees)


def test_symmetric_half_channel():
    """Half the slot with the symmetry line below; a flow is that of the whole part, the diameter twice the whole width."""
    mean = 0.6
    whole, gradient = slot(mean, 2 * HEIGHT)
    ports = {"inlet": ("flow", mean * 2 * HEIGHT), "outlet": STATIC}
    solution = solve(channel(HALF), flow_case(ports, mu=MU, rho=RHO))
    assert_developed(solution, lambda y: whole(y + HEIGHT), gradient)
    assert abs(solution.diameters["inlet"] * solution.space.length - 4 * HEIGHT) < 1e-12


def test_total_pressure_on_a_half_channel_has_alpha_of_the_slot():
    mean = 0.004
    whole, gradient = slot(mean, 2 * HEIGHT)
    total = gradient * LENGTH + SLOT * 0.5 * RHO * mean**2
    solution = solve(channel(HALF), flow_case({"inlet": ("total_pressure", total), "outlet": STATIC}, mu=MU, rho=RHO))
    assert_developed(solution, lambda y: whole(y + HEIGHT), gradient)


@pytest.mark.parametrize("kind", ["planar", "axisymmetric"])
@pytest.mark.parametrize("inertia", [True, False])
def test_slip_walls_give_plug_flow(kind, inertia):
    """Without friction no force acts anywhere: the pressure is that of the outlet."""
    mean = 0.9
    names = CHANNEL if kind == "planar" else PIPE
    walls = {n: WallCondition("slip") for n in ("lower", "upper") if n in {v[0] for v in names.values()}}
    ports = {"inlet": ("velocity", mean), "outlet": STATIC}
    solution = solve(channel(names), flow_case(ports, kind, MU, RHO, inertia, walls=walls))
    assert_developed(solution, lambda y: mean + 0 * y, 0.0)


def test_plug_flow_between_walls_that_move_alike():
    walls = {n: WallCondition("sliding", 0.8) for n in ("lower", "upper")}
    ports = {"inlet": ("velocity", 0.8), "outlet": STATIC}
    assert_developed(solve(channel(), flow_case(ports, mu=MU, rho=RHO, walls=walls)), lambda y: 0.8 + 0 * y, 0.0)


@pytest.mark.parametrize("pressure_number", [-3.0, -1.0, 0.0, 1.0, 3.0])
@pytest.mark.parametrize("given", ["flow", "pressures"])
def test_couette_flow_with_a_pressure_gradient(pressure_number, given):
    """u/U = y/h + P (y/h)(1 - y/h); the flow and the mid velocity are the file's.

    At P = -3 as much flows back as forth; the term for reverse flow, which would act there, has no place in creeping flow.
    """
    entry = values("couette_and_annulus", "plane Couette-Poiseuille", P=pressure_number)
    speed = 0.6
    gradient = 2 * MU * speed * pressure_number / HEIGHT**2
    inlet = ("flow", entry["q"] * speed * HEIGHT) if given == "flow" else ("static_pressure", gradient * LENGTH)
    walls = {"upper": WallCondition("sliding", speed)}
    ports = {"inlet": inlet, "outlet": STATIC}
    solution = solve(channel(), flow_case(ports, mu=MU, rho=RHO, inertia=pressure_number > -3, walls=walls))
    assert_developed(solution, lambda y: speed * (y / HEIGHT) * (1 + pressure_number * (1 - y / HEIGHT)), gradient)
    middle = solution.velocity([(LENGTH / 2, HEIGHT / 2)])[0, 0]
    assert abs(middle - entry["u_mid"] * speed) < 1e-10 * speed
    flow = -solution.boundaries["inlet"].flux(solution.state.u) * solution.scales.flow
    assert abs(flow - entry["q"] * speed * HEIGHT) < 1e-10 * speed * HEIGHT


def test_sliding_wall_moves_towards_plus_x_whichever_way_its_edges_run():
    walls = {n: WallCondition("sliding", 0.5) for n in ("lower", "upper")}
    ports = {"inlet": ("static_pressure", 0.0), "outlet": STATIC}
    solution = solve(channel(bend=turned(-40.0)), flow_case(ports, mu=MU, rho=RHO, walls=walls))
    assert_developed(solution, lambda y: 0.5 + 0 * y, 0.0, degrees=-40.0)


def test_wall_at_constant_x_slides_towards_plus_y():
    walls = {n: WallCondition("sliding", 0.5) for n in ("lower", "upper")}
    ports = {"inlet": ("static_pressure", 0.0), "outlet": STATIC}
    solution = solve(channel(bend=turned(-90.0)), flow_case(ports, mu=MU, rho=RHO, walls=walls))
    assert_developed(solution, lambda y: -0.5 + 0 * y, 0.0, degrees=-90.0)


@CASES
def test_supply_of_100_bar_changes_no_flow(kind, names, flow, alpha):
    _, gradient = flow(1.1)

    def run(level):
        ports = {"inlet": ("static_pressure", gradient * LENGTH + level), "outlet": ("static_pressure", level)}
        return solve(channel(names), flow_case(ports, kind, MU, RHO))

    low, high = run(0.0), run(100e5)
    flux = [s.boundaries["inlet"].flux(s.state.u) * s.scales.flow for s in (low, high)]
    representable = np.spacing(100e5) / (gradient * LENGTH)
    assert abs(flux[0] - flux[1]) <= (1e-12 + 2 * representable) * abs(flux[0])
    assert abs(high.port_pressure("outlet") - 100e5) < 1e-6
    expected = low.pressure([(LENGTH / 3, HEIGHT / 3)]) + 100e5
    np.testing.assert_allclose(high.pressure([(LENGTH / 3, HEIGHT / 3)]), expected, rtol=1e-13)


def test_supply_of_100_bar_changes_no_given_flow():
    def run(level):
        ports = {"inlet": ("velocity", 1.1), "outlet": ("static_pressure", level)}
        return solve(channel(), flow_case(ports, mu=MU, rho=RHO)).state.u

    low, high = run(0.0), run(100e5)
    np.testing.assert_allclose(high, low, rtol=0, atol=1e-12 * np.abs(low).max())
