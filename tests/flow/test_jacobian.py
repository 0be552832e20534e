"""The Newton matrix is the derivative of the residual, with every kind of condition in it."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import CHANNEL, turned
from meshes import box_mesh

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.conditions import fix_velocities
from fem_flow.flow.laws import StaticPressureLaw, TotalPressureLaw
from fem_flow.flow.space import Space
from fem_flow.flow.system import State, System

MU, RHO = 0.4, 0.9


def curved_channel(x, y):
    """Ends straight but oblique, walls curved; the left end carries no radius of the axis."""
    x, y = turned(25.0)(x + 0.0 * y, y + 0.15 * np.sin(np.pi * x / 2) ** 2 * (y - 0.5))
    return x, y + 1.0


def system(kind, laws, slip=(), bend=curved_channel):
    mesh = box_mesh(4, 3, box=(0, 2, 0, 1), names=CHANNEL, bend=bend)
    space = Space(mesh, kind, 1.0)
    boundaries = {n: Boundary(space, n, e) for n, e in mesh.boundaries.items()}
    resting = [n for n in ("lower", "upper") if n not in slip]
    fixed = fix_velocities(boundaries, resting, {}, {}, list(slip), list(laws))
    return System(space, boundaries, laws, fixed, MU, RHO)


def some_state(made, inflow):
    """A rough velocity that satisfies the fixed components: the net flow has the sign of ``inflow``, part runs against it."""
    n = made.space.n_velocity
    along = inflow * np.array([[np.cos(np.radians(25))], [np.sin(np.radians(25))]])
    for seed in range(100):
        rng = np.random.default_rng(seed)
        u = rng.normal(size=(2, n)) + 0.4 * along
        state = made.impose(State(u, rng.normal(size=made.space.n_pressure), rng.normal(size=len(made.unknown_ports))))
        speeds = [made.boundaries[name].normal_velocity(state.u) for name in ("inlet", "outlet")]
        flows = [made.boundaries[name].flux(state.u) for name in ("inlet", "outlet")]
        if flows[0] * inflow < 0 < flows[1] * inflow and all(v.min() < 0 < v.max() for v in speeds):
            return state
    raise AssertionError("no such state")


def assert_derivative(made, state):
    matrix = made.matrix(state, RHO, newton=True)
    rng = np.random.default_rng(8)
    for _ in range(3):
        step = rng.normal(size=matrix.shape[0])
        eps = 1e-6
        ahead, back = (made.residual(made.advance(state, step, s), RHO)[0] for s in (eps, -eps))
        slope = matrix @ step
        np.testing.assert_allclose((ahead - back) / (2 * eps), slope, rtol=0, atol=2e-8 * np.abs(slope).max())


STATIC = {"inlet": StaticPressureLaw(0.3), "outlet": StaticPressureLaw(0.0)}
KINDS = pytest.mark.parametrize("kind", ["planar", "axisymmetric"])


@KINDS
def test_turned_and_radial_pressure_ports_with_reverse_flow(kind):
    made = system(kind, STATIC)
    state = some_state(made, 1.0)
    outward = made.boundaries["outlet"].normal_velocity(state.u)
    assert outward.min() < 0 < made.boundaries["outlet"].flux(state.u)
    assert len(made.fixed.frames.turned) > 0
    assert_derivative(made, state)


@KINDS
def test_reverse_flow_term_is_off_where_the_net_flow_enters(kind):
    made = system(kind, STATIC)
    state = some_state(made, 1.0)
    port = made.boundaries["inlet"]
    assert port.flux(state.u) < 0 < port.normal_velocity(state.u).max()
    np.testing.assert_array_equal(made._backflow("inlet", state.u, RHO)[0], 0.0)
    density, _ = made._backflow("outlet", state.u, RHO)
    speed = made.boundaries["outlet"].normal_velocity(state.u)
    np.testing.assert_allclose(density, np.where(speed < 0, -0.5 * RHO * speed**2, 0.0), atol=1e-15)


@KINDS
@pytest.mark.parametrize("diameter", [1e-3, 1.0, 1e3], ids=["creeping", "blended", "fast"])
@pytest.mark.parametrize("inflow", [1.0, -1.0], ids=["entering", "leaving"])
def test_total_pressure(kind, diameter, inflow):
    laws = {"inlet": TotalPressureLaw(0.7, diameter, 1.5), "outlet": StaticPressureLaw(0.0)}
    made = system(kind, laws)
    state = some_state(made, inflow)
    port = made.boundaries["inlet"]
    flow = -port.flux(state.u)
    assert flow * inflow > 0
    if diameter == 1.0:
        laws["inlet"] = TotalPressureLaw(0.7, 1.5 * MU * port.area / (RHO * abs(flow)), 1.5)
    assert_derivative(made, state)


@KINDS
def test_curved_slip_walls(kind):
    made = system(kind, STATIC, slip=("lower", "upper"))
    assert_derivative(made, some_state(made, 1.0))


def test_two_total_pressure_ports():
    made = system("planar", {"inlet": TotalPressureLaw(0.7, 5.0, 1.5), "outlet": TotalPressureLaw(0.1, 5.0, 1.5)})
    assert_derivative(made, some_state(made, 1.0))


def test_total_pressure_condition_passes_smoothly_through_zero_flow():
    """The kinetic part and its slope vanish at Q = 0 from both sides, and the blend has no jump at Re = 1 and Re = 2."""
    mesh = box_mesh(2, 3, names=CHANNEL)
    space = Space(mesh, "planar", 1.0)
    port = Boundary(space, "inlet", mesh.boundaries["inlet"])
    law = TotalPressureLaw(0.0, 2.0, 1.2)
    parabola = np.stack([space.points[:, 1] * (1 - space.points[:, 1]), 0 * space.points[:, 1]])

    def kinetic(reynolds):
        flow = reynolds * MU / (RHO * 2.0)
        value, slope, by_pressure = law.equation(port, parabola * 6 * flow, 0.0, RHO, MU)
        assert by_pressure == 1.0
        return value, np.abs(slope).max()

    assert kinetic(-3.0)[0] == 0.0
    small = kinetic(1e-6)
    assert 0 < small[0] < 1e-11
    assert small[1] < 1e-5
    for edge in (1.0, 2.0):
        below, above = kinetic(edge - 1e-9)[0], kinetic(edge + 1e-9)[0]
        assert abs(above - below) < 1e-8 * above
    mean = 4.0 * MU / (RHO * 2.0)
    assert abs(kinetic(4.0)[0] - 54 / 35 * 0.5 * RHO * mean**2) < 1e-13
    mean = 0.5 * MU / (RHO * 2.0)
    assert abs(kinetic(0.5)[0] - 1.2 * 0.5 * RHO * mean**2) < 1e-13


def test_picard_matrix_freezes_the_carrier():
    made = system("planar", STATIC)
    state = some_state(made, 1.0)
    picard, newton = (made.matrix(state, RHO, newton=n) for n in (False, True))
    assert np.abs((picard - newton).toarray()).max() > 0.01
    np.testing.assert_array_equal(picard.indices, newton.indices)
    np.testing.assert_array_equal(picard.indptr, newton.indptr)
