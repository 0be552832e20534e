"""Which velocities are fixed where boundaries meet; what passes and what does not."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import CHANNEL, flow_case, turned
from meshes import box_mesh

from fem_flow.case.resolved import WallCondition
from fem_flow.errors import CaseError, GeometryError
from fem_flow.flow.boundary import Boundary, connected_runs, find_cells
from fem_flow.flow.conditions import fix_velocities
from fem_flow.flow.problem import solve
from fem_flow.flow.sliding import wall_direction
from fem_flow.flow.space import Space

STATIC = ("static_pressure", 0.0)
SLIDING, SLIP = WallCondition("sliding", 1.0), WallCondition("slip")


def ring_part(angle, depth):
    return (1 - depth) * np.cos(angle), (1 - depth) * np.sin(angle)


def spaces(mesh, kind="planar"):
    space = Space(mesh, kind, 1.0)
    return space, {name: Boundary(space, name, edges) for name, edges in mesh.boundaries.items()}


def cavity(**walls):
    case = flow_case({}, mu=0.1, rho=1.0, walls=walls)
    return solve(box_mesh(6, 6), case)


def node_at(solution, x, y):
    points = solution.space.points * solution.space.length
    (node,) = np.flatnonzero(np.hypot(points[:, 0] - x, points[:, 1] - y) < 1e-9)
    return node


def test_pressure_in_a_closed_box_has_zero_mean():
    solution = cavity(top=SLIDING)
    total = sum(float((g.w * (solution.state.p[g.corners] @ g.psi.T)).sum()) for g in solution.space.groups)
    assert abs(total) < 1e-13 * np.abs(solution.state.p).max()
    assert np.abs(solution.state.p).max() > 0.1


def test_corner_of_a_lid_and_a_resting_wall_rests():
    solution = cavity(top=SLIDING)
    for x in (0.0, 1.0):
        np.testing.assert_array_equal(solution.state.u[:, node_at(solution, x, 1.0)], 0.0)
    assert abs(solution.velocity([(0.5, 1.0)])[0, 0] - 1.0) < 1e-14


@pytest.mark.parametrize("other", [SLIP, WallCondition("sliding", 0.5)], ids=["slip", "sliding"])
def test_nothing_leaks_where_a_lid_meets_a_wall_that_is_not_at_rest(other):
    solution = cavity(top=SLIDING, left=other)
    np.testing.assert_array_equal(solution.state.u[:, node_at(solution, 0.0, 1.0)], 0.0)
    for piece in solution.boundaries.values():
        assert abs(piece.flux(solution.state.u)) < 1e-15
        nodes = piece.nodes
        through = piece.normal[0, 0] @ solution.state.u[:, nodes]
        np.testing.assert_allclose(through, 0.0, atol=1e-13)


def test_corner_within_one_slip_wall_holds_both_components():
    names = {"left": ("slippery", "wall"), "bottom": ("slippery", "wall"), "right": ("right", "wall"), "top": ("top", "wall")}
    space, boundaries = spaces(box_mesh(3, 3, names=names, bend=turned(20.0)))
    fixed = fix_velocities(boundaries, ["right", "top"], {}, {}, ["slippery"], [])
    corner = int(np.argmin(np.hypot(*space.points.T)))
    np.testing.assert_array_equal(fixed.mask[:, corner], True)
    along = boundaries["slippery"].nodes
    assert fixed.mask[:, along].all(axis=0).sum() == 3
    assert fixed.mask[0, along].all()


def test_smooth_curved_slip_wall_holds_one_component():
    """Neither the kinks of its curved edges, nor its meeting a port at nearly a right angle, hold the fluid."""
    names = {"left": ("start", "port"), "right": ("end", "port"), "bottom": ("outer", "wall"), "top": ("inner", "wall")}
    _, boundaries = spaces(box_mesh(4, 2, box=(0, 2.0, 0, 0.5), names=names, bend=ring_part))
    fixed = fix_velocities(boundaries, [], {}, {}, ["outer", "inner"], ["start", "end"])
    rim = np.unique(np.concatenate([b.nodes for b in boundaries.values()]))
    np.testing.assert_array_equal(fixed.mask[:, rim].sum(axis=0), 1)


def test_profile_beside_an_oblique_slip_wall_keeps_its_flow_and_does_not_leak():
    def spread(x, y):
        return x, y * (1 + 0.1 * x)

    case = flow_case({"inlet": ("velocity", 1.0), "outlet": STATIC}, mu=0.1, rho=1.0, walls={"lower": SLIP, "upper": SLIP})
    solution = solve(box_mesh(6, 4, names=CHANNEL, bend=spread), case)
    flux = {name: piece.flux(solution.state.u) * solution.scales.flow for name, piece in solution.boundaries.items()}
    assert abs(flux["inlet"] + 1.0) < 1e-14
    assert abs(flux["upper"]) < 1e-15
    assert abs(flux["outlet"] - 1.0) < 1e-12


def test_slip_wall_oblique_to_a_pressure_port_holds_their_corner():
    """At 45 degrees the velocity cannot be along the wall and across the port unless it is zero."""
    _, boundaries = spaces(box_mesh(3, 3, names=CHANNEL, bend=lambda x, y: (x + y, y)))
    fixed = fix_velocities(boundaries, [], {}, {}, ["lower", "upper"], ["inlet", "outlet"])
    held = set(np.flatnonzero(fixed.mask.all(axis=0)))
    walls, ports = (np.concatenate([boundaries[n].nodes for n in names]) for names in (("lower", "upper"), ("inlet", "outlet")))
    corners = set(np.intersect1d(walls, ports))
    assert held == corners
    assert len(corners) == 4


@pytest.mark.parametrize("kind", ["planar", "axisymmetric"])
@pytest.mark.parametrize("inertia", [True, False])
def test_mass_balance(kind, inertia):
    names = CHANNEL | {"bottom": ("side", "port")}
    ports = {"inlet": ("velocity", 1.0), "outlet": STATIC, "side": ("static_pressure", 0.05)}

    def bend(x, y):
        return x + 0.1 * np.sin(np.pi * x) * np.sin(2 * y), 1 + y + 0.1 * np.sin(np.pi * x) * y

    solution = solve(box_mesh(6, 5, names=names, bend=bend), flow_case(ports, kind, 0.05, 1.0, inertia))
    flux = np.array([solution.boundaries[n].flux(solution.state.u) for n in ports])
    assert abs(flux.sum()) <= 1e-12 * 0.5 * np.abs(flux).sum()
    assert np.abs(flux).min() > 1e-3


def test_outlets_at_the_same_pressure_share_a_symmetric_flow():
    names = {"left": ("inlet", "port"), "right": ("wall", "wall"), "bottom": ("a", "port"), "top": ("b", "port")}

    def widen(x, y):
        return x, (y - 0.5) * (1 + 2 * x)

    mesh = box_mesh(6, 6, names=names, bend=widen)
    case = flow_case({"inlet": ("velocity", 1.0), "a": STATIC, "b": STATIC}, mu=0.2, rho=1.0)
    solution = solve(mesh, case)
    a, b = (solution.boundaries[n].flux(solution.state.u) for n in ("a", "b"))
    assert abs(a - b) < 0.05 * a
    assert abs(a + b + solution.boundaries["inlet"].flux(solution.state.u)) < 1e-12 * a


def test_closed_port_is_a_wall_at_rest():
    names = CHANNEL | {"top": ("side", "port")}
    open_case = {"inlet": ("velocity", 1.0), "outlet": STATIC}
    closed = solve(box_mesh(5, 4, names=names), flow_case(open_case | {"side": ("closed", 0.0)}, mu=0.1, rho=1.0))
    walled = solve(box_mesh(5, 4, names=CHANNEL), flow_case(open_case, mu=0.1, rho=1.0))
    np.testing.assert_array_equal(closed.state.u[:, closed.boundaries["side"].nodes], 0.0)
    np.testing.assert_allclose(closed.state.u, walled.state.u, atol=1e-13)


@pytest.mark.parametrize("kind", ["planar", "axisymmetric"])
def test_micrometres_and_metres_give_the_same_scaled_flow(kind):
    """The same Reynolds number at a millionth of the size: equal scaled fields, though every SI number differs."""
    def run(size, mu):
        mesh = box_mesh(5, 4, box=(0, 1.5 * size, 0.5 * size, size), names=CHANNEL,
                        bend=lambda x, y: (x, y + 0.2 * size * (x / size) ** 2))
        case = flow_case({"inlet": ("velocity", 0.02 / size), "outlet": ("static_pressure", 3.0)}, kind, mu, 1000.0)
        return solve(mesh, case)

    large, small = run(1.0, 1.0), run(1e-6, 1.0)
    np.testing.assert_allclose(small.state.u, large.state.u, atol=1e-11 * np.abs(large.state.u).max())
    np.testing.assert_allclose(small.state.p, large.state.p, atol=1e-10 * np.abs(large.state.p).max())
    assert small.scales.mu == pytest.approx(large.scales.mu, rel=1e-12)


def test_a_ring_cannot_slide_along_itself():
    names = {"bottom": ("shell", "wall"), "top": ("shaft", "wall")}
    ring = box_mesh(12, 2, box=(0, 2 * np.pi, 0, 0.5), names=names, bend=ring_part, periodic=True)
    with pytest.raises(CaseError) as caught:
        solve(ring, flow_case({}, walls={"shaft": SLIDING}))
    assert str(caught.value) == (
        "the wall shaft turns back on itself, so sliding along it has no one direction; a wall that turns round a centre needs"
        " rotation, which is for a later version"
    )
    assert caught.value.reason == "wall_turns_back"
    assert caught.value.details == {"wall": "shaft"}


@pytest.mark.parametrize(("angle", "legal"), [(np.pi, True), (1.25 * np.pi, False)])
def test_an_arc_may_end_upright_but_not_turn_back(angle, legal):
    names = {"left": ("start", "port"), "right": ("end", "port"), "bottom": ("outer", "wall"), "top": ("inner", "wall")}
    space, boundaries = spaces(box_mesh(10, 2, box=(0, angle, 0, 0.5), names=names, bend=ring_part))
    if legal:
        for name in ("outer", "inner"):
            direction = wall_direction(boundaries[name])[:, boundaries[name].nodes]
            x, y = space.points[boundaries[name].nodes].T
            np.testing.assert_allclose(direction, np.stack([y, -x]) / np.hypot(x, y), atol=0.01)
    else:
        with pytest.raises(CaseError, match="turns back on itself"):
            wall_direction(boundaries["outer"])


def test_a_wall_with_a_sharp_corner_cannot_slide_along_itself():
    names = {"left": ("box", "wall"), "bottom": ("box", "wall"), "right": ("right", "wall"), "top": ("top", "wall")}
    with pytest.raises(CaseError) as caught:
        solve(box_mesh(3, 3, names=names), flow_case({}, walls={"box": SLIDING}))
    assert str(caught.value) == (
        "the wall box has a sharp corner, so it cannot slide along itself; give its smooth pieces their own names"
    )
    assert caught.value.reason == "wall_with_corner"


def test_pieces_of_one_sliding_wall_all_move_towards_plus_x():
    names = CHANNEL | {"bottom": ("plates", "wall"), "top": ("plates", "wall")}
    _, boundaries = spaces(box_mesh(3, 2, names=names))
    assert len(connected_runs(boundaries["plates"].edges)) == 2
    direction = wall_direction(boundaries["plates"])[:, boundaries["plates"].nodes]
    np.testing.assert_allclose(direction, np.broadcast_to([[1.0], [0.0]], direction.shape), atol=1e-14)


def test_a_bent_port_is_refused():
    mesh = box_mesh(3, 3, names=CHANNEL, bend=lambda x, y: (x + 0.1 * y**2, y))
    with pytest.raises(GeometryError) as caught:
        solve(mesh, flow_case({"inlet": ("velocity", 1.0), "outlet": STATIC}))
    assert str(caught.value) == "the port inlet is not one straight edge; draw it straight, across the passage"


def test_given_flows_that_do_not_add_up_are_refused():
    case = flow_case({"inlet": ("velocity", 1.0), "outlet": ("velocity", -0.5)}, mu=0.1, rho=1.0)
    with pytest.raises(CaseError) as caught:
        solve(box_mesh(3, 3, names=CHANNEL), case)
    assert caught.value.reason == "unbalanced_flows"
    balanced = flow_case({"inlet": ("velocity", 1.0), "outlet": ("velocity", -1.0)}, mu=0.1, rho=1.0)
    assert solve(box_mesh(3, 3, names=CHANNEL), balanced).history.residual < 1e-10


def test_all_ports_closed_beside_a_sliding_wall():
    ports = {"inlet": ("closed", 0.0), "outlet": ("closed", 0.0)}
    case = flow_case(ports, mu=0.1, rho=1.0, walls={"upper": SLIDING})
    closed = solve(box_mesh(4, 4, names=CHANNEL), case)
    box = solve(box_mesh(4, 4), flow_case({}, mu=0.1, rho=1.0, walls={"top": SLIDING}))
    ratio = closed.scales.velocity / box.scales.velocity
    np.testing.assert_allclose(closed.state.u * ratio, box.state.u, atol=1e-11)


def test_an_edge_that_runs_backwards_is_refused():
    mesh = box_mesh(2, 2)
    edges = mesh.boundaries["left"]
    find_cells(mesh.cells, edges)
    with pytest.raises(ValueError, match="runs against it"):
        find_cells(mesh.cells, edges[:, [1, 0, 2]])


def test_normals_close_and_areas_follow_from_them():
    """oint n = 0, oint x.n = 2 area on a curved mesh; the volume of the turned body by its surface."""
    mesh = box_mesh(5, 4, bend=lambda x, y: (x + 0.1 * np.sin(3 * y), 0.5 + y * (1 + 0.2 * np.sin(2 * x))))
    for kind in ("planar", "axisymmetric"):
        space, boundaries = spaces(mesh, kind)
        volume = sum(float(g.w.sum()) for g in space.groups)
        closure = sum(b.normal_load().sum(axis=1) for b in boundaries.values())
        surface = sum(float((b.w * (b.x * b.normal).sum(axis=2)).sum()) for b in boundaries.values())
        area = sum(float((g.w / (g.r if g.r is not None else 1.0)).sum()) for g in space.groups)
        np.testing.assert_allclose(closure, [0.0, 0.0 if kind == "planar" else area], atol=1e-13)
        assert abs(surface - (2 if kind == "planar" else 3) * volume) < 1e-12
