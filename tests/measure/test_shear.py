"""Wall shear: exact flows, order on curved walls, arc length, corners, what is withheld, attachment and detachment."""

import math

import numpy as np
import pytest
from meshes import box_mesh
from scipy.integrate import simpson
from scipy.interpolate import CubicSpline
from solved import SHUT, SLIP, SLOT, carved, flow, named, renamed, round_body, sliding, solved, static, step

from fem_flow.measure.all import measure
from fem_flow.measure.shear import StretchShear, WallShear, wall_curves, wall_shear
from fem_flow.measure.shear_figures import _percentile
from fem_flow.measure.singular import flaws

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}
LEFT_OUT = "without the two elements next to a sharp corner"


def curve(solution, name, piece=1):
    return next(c for c in wall_curves(solution) if c.name == name and c.piece == piece)


def slot(walls=None, ports=None, **more):
    return solved(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), SLOT), ports=ports or PORTS, walls=walls, viscosity=0.1, **more)


@pytest.mark.parametrize("name", ["low", "high"])
def test_poiseuille_pulls_both_walls_along_the_flow(name):
    c = curve(slot(), name)
    assert c.shear == pytest.approx(np.full(13, 1.2), rel=1e-11)
    assert c.arc == pytest.approx(np.linspace(0, 3, 13))
    assert c.points[0, 0] == 0.0
    assert c.pressure == pytest.approx(5.0 + 2.4 * (3 - c.arc), rel=1e-11)
    assert (c.piece, c.pieces, c.closed) == (1, 1, False)


def test_reversed_flow_has_negative_shear():
    c = curve(slot(ports={"inlet": flow(-2.0), "outlet": static(5.0)}), "high")
    assert c.shear == pytest.approx(np.full(13, -1.2), rel=1e-11)


def test_couette_poiseuille():
    """Top wall at 0.8 m/s with a net flow of 2: the fluid pulls the lower wall forward and the upper one too."""
    solution = slot(walls={"high": sliding(0.8)})
    slope = 6 * (2.0 - 0.4)  # of the Poiseuille part, whose flow is 2 - 0.8/2
    assert curve(solution, "low").shear == pytest.approx(np.full(13, 0.1 * (slope + 0.8)), rel=1e-11)
    assert curve(solution, "high").shear == pytest.approx(np.full(13, 0.1 * (slope - 0.8)), rel=1e-11)


def test_arc_length_of_a_wall_at_constant_x_starts_at_its_lower_end():
    names = {"bottom": ("inlet", "port"), "top": ("outlet", "port"), "left": ("left", "wall"), "right": ("right", "wall")}
    for q in (2.0, -2.0):
        solution = solved(box_mesh(4, 6, (0.0, 1.0, 0.0, 3.0), names), ports={"inlet": flow(q), "outlet": static(0.0)})
        for name in ("left", "right"):
            c = curve(solution, name)
            assert c.points[0, 1] == 0.0
            assert c.points[-1, 1] == 3.0
            assert c.shear == pytest.approx(np.full(13, 6 * q), rel=1e-10)


def test_axisymmetric_shear_is_weighted_by_area():
    """A cone: mean and percentile carry 2 pi r, against the same integrals over the nodal curve."""
    names = {"left": ("inlet", "port"), "right": ("outlet", "port"), "bottom": ("axis", "axis"), "top": ("bore", "wall")}
    mesh = box_mesh(16, 6, (0.0, 2.0, 0.0, 1.0), names, lambda x, y: (x, y * (1 - x / 4)))
    solution = solved(mesh, "axisymmetric", ports={"inlet": flow(1.0), "outlet": static(0.0)})
    c = curve(solution, "bore")
    r = c.points[:, 1]
    found = named(solution)
    assert found["wall_shear_mean", "bore"].value == pytest.approx(
        simpson(c.shear * r, x=c.arc) / simpson(r, x=c.arc), rel=1e-4
    )
    assert abs(found["wall_shear_mean", "bore"].value / (simpson(c.shear, x=c.arc) / c.arc[-1]) - 1) > 0.02
    assert found["wall_shear_max_at", "bore"].value == pytest.approx(c.arc[-1], rel=1e-9)


def test_the_percentile_is_by_area_of_integration_points():
    """Values 1 to 100 Pa with areas 1 and 3 m^2 in turn: 198 m^2 lie between the middles of the last two, 196.5 and 198.5."""
    value, weight = np.arange(1.0, 101.0).reshape(20, 5), np.tile([1.0, 3.0], 50).reshape(20, 5)
    nodes = np.zeros(41)
    wall = WallShear("w", 1, 1, False, 1.0, (StretchShear(0, nodes, np.zeros((41, 2)), nodes, nodes, -value, weight, value),))
    assert _percentile([wall], 0.99) == pytest.approx(99.75)


def shears_on_a_bulge(n):
    mesh = box_mesh(2 * n, n, (0.0, 3.0, 0.0, 1.0), SLOT, lambda x, y: (x, y * (1 - 0.15 * np.sin(np.pi * x / 3) ** 2)))
    c = curve(solved(mesh, ports=PORTS, viscosity=0.5, inertia=False), "high")
    keep = (c.points[:, 0] > 0.3) & (c.points[:, 0] < 2.7)  # away from the ports, where the given profile meets a bent wall
    return c.points[keep, 0], c.shear[keep]


def test_order_on_a_curved_wall():
    """Order 2, fitted on three meshes against a fine one; the largest shear is 8.9 Pa."""
    reference = CubicSpline(*shears_on_a_bulge(36))
    sizes, errors = (6, 9, 14), []
    for n in sizes:
        x, shear = shears_on_a_bulge(n)
        errors.append(math.sqrt(np.mean((shear - reference(x)) ** 2)))
    assert 1.85 < -np.polyfit(np.log(sizes), np.log(errors), 1)[0] < 2.4
    assert errors[-1] < 0.003 * 8.9


# --- pieces, closed walls, corners


def test_pieces_are_numbered_by_their_smallest_x():
    """One name for both walls of a channel that starts lower left: both begin at x = 0, the lower y is piece 1."""
    mesh = renamed(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), SLOT), "high", "low", lambda x, y: True)
    solution = solved(mesh, ports=PORTS, viscosity=0.1)
    pieces = [c for c in wall_curves(solution) if c.name == "low"]
    assert [(c.piece, c.pieces, c.points[0, 1]) for c in pieces] == [(1, 2, 0.0), (2, 2, 1.0)]
    n = next(n for n in measure(solution) if n.name == "wall_shear_max_at")
    assert n.of == ("low", "1")
    assert n.note == "the shear is as large all along the wall; this is where it begins"


def test_a_closed_wall_runs_anticlockwise_from_its_smallest_x_then_y():
    mesh = carved(box_mesh(9, 9, (0.0, 3.0, 0.0, 3.0), SLOT), lambda x, y: 1 < x < 2 and 1 < y < 2)
    c = curve(solved(mesh, ports=PORTS, viscosity=1.0), "block")
    assert c.closed
    assert c.points[0] == pytest.approx([1.0, 1.0])
    assert c.arc[-1] == pytest.approx(4.0)
    # anticlockwise: first along the bottom
    at = np.interp([0.5, 1.5, 2.5, 3.5], c.arc, c.points[:, 0]), np.interp([0.5, 1.5, 2.5, 3.5], c.arc, c.points[:, 1])
    assert at[0] == pytest.approx([1.5, 2.0, 1.5, 1.0])
    assert at[1] == pytest.approx([1.0, 1.5, 2.0, 1.5])


def test_each_side_of_a_corner_has_its_own_point():
    mesh = carved(box_mesh(15, 15, (0.0, 3.0, 0.0, 3.0), SLOT), lambda x, y: 1 < x < 2 and 1 < y < 2)
    c = curve(solved(mesh, ports=PORTS, viscosity=1.0), "block")
    doubled = np.flatnonzero(np.diff(c.arc) == 0.0)
    assert c.arc[doubled] == pytest.approx([1.0, 2.0, 3.0])
    assert np.isnan(c.shear[doubled]).all()
    assert np.isnan(c.shear[doubled + 1]).all()


@pytest.mark.parametrize("twist", [0.0, 0.02, -0.05, 0.1])
def test_a_circle_starts_at_its_own_leftmost_point(twist):
    """Wherever the nodes lie: arc 0 is at (-R, 0), a quarter is the lowest point, and the arc lengths go round once."""
    solution = solved(round_body(4, 4, twist), ports={"inlet": flow(2.0), "outlet": static(0.0)}, inertia=False)
    c = curve(solution, "body")
    assert c.points[0] == pytest.approx([-0.5, 0.0], abs=1e-4)
    assert c.points[-1] == pytest.approx(c.points[0])
    assert c.arc[0] == 0.0
    assert (np.diff(c.arc) > 0).all()
    assert c.arc[-1] == pytest.approx(math.pi, rel=1e-4)
    quarter = np.argmin(np.abs(c.arc - math.pi / 4))
    assert c.points[quarter] == pytest.approx(
        [-0.5 * math.cos(2 * c.arc[quarter]), -0.5 * math.sin(2 * c.arc[quarter])], abs=1e-4
    )
    assert c.shear[quarter] > 0
    around = (
        [st.point_arc for st in wall_shear(solution)[0].stretches]
        if wall_shear(solution)[0].name == "body"
        else [st.point_arc for w in wall_shear(solution) if w.name == "body" for st in w.stretches]
    )
    everywhere = np.sort(np.concatenate([a.ravel() for a in around]))
    assert everywhere[0] >= 0.0
    assert everywhere[-1] <= c.arc[-1] * (1 + 1e-12)


@pytest.mark.parametrize("twist", [0.0, 0.1])
def test_creeping_flow_attaches_in_front_of_a_cylinder_and_detaches_behind(twist):
    numbers = measure(solved(round_body(4, 6, twist), ports={"inlet": flow(2.0), "outlet": static(0.0)}, inertia=False))
    points = {n.name: n.value for n in numbers if n.of == ("body",) and n.name.endswith("tachment_point")}
    half = 0.5 * math.pi
    assert set(points) == {"attachment_point", "detachment_point"}
    assert min(points["attachment_point"], 2 * half - points["attachment_point"]) < 0.02
    assert points["detachment_point"] == pytest.approx(half, abs=0.02)


# --- corners


def test_shear_vanishes_in_a_resting_concave_corner():
    """The step's floor corner: both neighbours end at zero; where the floor meets the outlet nothing is imposed."""
    solution = solved(step(3), ports={"inlet": flow(1.0), "outlet": static(0.0)}, viscosity=0.05)
    floor, face = curve(solution, "floor"), curve(solution, "block")
    assert floor.shear[0] == 0.0
    assert face.shear[0] == 0.0
    assert floor.shear[-1] != 0.0


def test_the_peak_at_a_sharp_re_entrant_corner_is_withheld():
    solution = solved(step(3), ports={"inlet": flow(1.0), "outlet": static(0.0)}, viscosity=0.05)
    assert [(f.place, f.walls, f.jump) for f in flaws(solution)] == [((2.0, 0.0), ("low", "block"), False)]
    found = named(solution)
    why = (
        "the peak has no limit, for there is a sharp re-entrant corner at x = 2000 mm, y = 0 mm: give the edge a radius;"
        " or use the 99th percentile"
    )
    for wall in ("low", "block"):
        assert math.isnan(found["wall_shear_max", wall].value)
        assert found["wall_shear_max", wall].note == why
        assert math.isnan(found["wall_shear_max_at", wall].value)
        assert found["wall_shear_mean", wall].value > 0
        assert found["wall_shear_mean", wall].note == LEFT_OUT
        assert found["force_x", wall].note is None
    assert found["wall_shear_max", "high"].value > 0
    # the first two edges of either wall carry nothing: 5 nodes
    assert np.isnan(curve(solution, "low").shear[-5:]).all()
    assert np.isfinite(curve(solution, "low").shear[:-5]).all()
    assert np.isnan(curve(solution, "block").shear[-5:]).all()


def test_a_wall_that_ends_behind_a_mirror_counts_with_its_image():
    """A plate on a symmetry line: with its image it is an edge of 360 degrees."""
    mesh = renamed(
        box_mesh(8, 4, (0.0, 4.0, 0.0, 1.0), {**SLOT, "bottom": ("symmetry", "symmetry")}),
        "symmetry",
        "plate",
        lambda x, y: x > 2,
    )
    found = flaws(solved(mesh, ports=PORTS))
    assert [(f.place, f.walls, f.jump) for f in found] == [((2.0, 0.0), ("plate",), False)]


def test_a_wall_across_a_mirror_is_smooth():
    """The front of a block at right angles to the symmetry line ends there with no shear, as its image demands."""
    names = {"left": ("inlet", "port"), "right": ("end", "wall"), "bottom": ("symmetry", "symmetry"), "top": ("outlet", "port")}
    solution = solved(box_mesh(6, 6, names=names), ports={"inlet": flow(1.0), "outlet": static(0.0)})
    assert not flaws(solution)
    assert curve(solution, "end").shear[0] == 0.0


def test_slip_meeting_a_resting_wall():
    """In line: like a plate on a mirror, the peak has no limit, the force has one. At a right angle: nothing special."""
    mesh = renamed(box_mesh(8, 4, (0.0, 4.0, 0.0, 1.0), SLOT), "low", "glass", lambda x, y: x < 2)
    found = flaws(solved(mesh, ports=PORTS, walls={"glass": SLIP}))
    assert [(f.walls, f.jump) for f in found] == [(("glass", "low"), False)]
    assert not flaws(solved(box_mesh(4, 4, names=SHUT), walls={"floor": SLIP, "lid": SLIP}, ports={}))


@pytest.fixture(scope="module")
def cavity():
    return solved(box_mesh(16, 16, names=SHUT), walls={"lid": sliding(1.0)}, viscosity=1 / 400)


def test_walls_that_move_differently(cavity):
    """Stress like 1/r: force, torque, mean shear, peak and dissipated power have no limit; the percentile has one."""
    found = named(cavity)
    assert {f.walls for f in flaws(cavity)} == {("right", "lid"), ("lid", "left")}
    assert all(f.jump for f in flaws(cavity))
    for wall in ("lid", "left", "right"):
        for figure in (
            "force_x",
            "force_y",
            "force_x_viscous",
            "torque",
            "wall_shear_mean",
            "wall_shear_max",
            "wall_shear_max_at",
        ):
            assert math.isnan(found[figure, wall].value), (figure, wall)
        assert found["wall_shear_p99", wall].value > 0
    assert found["force_x", "lid"].note == (
        "the force has no limit: right and lid move differently where they touch at x = 1000 mm, y = 1000 mm: model the gap"
        " between them"
    )
    assert math.isnan(found["dissipated_power",].value)
    assert math.isnan(found["pressure_min",].value)
    for figure in ("force_x", "force_y", "wall_shear_mean", "wall_shear_max"):
        assert math.isfinite(found[figure, "floor"].value)


@pytest.mark.parametrize(("other", "jump"), [(sliding(1.0), False), (sliding(2.0), True), (None, True)])
def test_two_sliding_walls_in_line(other, jump):
    mesh = renamed(box_mesh(8, 4, (0.0, 4.0, 0.0, 1.0), SLOT), "low", "belt", lambda x, y: x < 2)
    walls = {"belt": sliding(1.0), **({"low": other} if other else {})}
    assert [f.jump for f in flaws(solved(mesh, ports=PORTS, walls=walls))] == [True] * jump


def test_sliding_at_a_mirror_must_run_along_it():
    names = {**SHUT, "floor": ("x", "wall"), "bottom": ("symmetry", "symmetry")}
    found = flaws(solved(box_mesh(4, 4, names=names), walls={"left": sliding(1.0)}))
    assert ((0.0, 0.0), True) in [(f.place, f.jump) for f in found]


# --- attachment, detachment


def test_flow_over_a_bulge_detaches_and_attaches():
    mesh = box_mesh(24, 8, (0.0, 3.0, 0.0, 1.0), SLOT, lambda x, y: (x, y * (1 + 0.5 * np.sin(np.pi * x / 3) ** 2)))
    solution = solved(mesh, ports=PORTS, viscosity=0.1, density=3.0)
    points = [(n.name, n.value) for n in measure(solution) if n.name.endswith("tachment_point")]
    assert [name for name, _ in points] == ["detachment_point", "attachment_point"]
    c = curve(solution, "high")
    inside = (c.arc > points[0][1]) & (c.arc < points[1][1])
    assert (c.shear[inside] < 0).all()
    assert (c.shear[~inside] > 0).all()
    assert named(solution)["wall_shear_min", "high"].value == 0.0


def test_the_eddy_behind_a_step():
    """The flow detaches at the edge (one name round the corner: the sign changes there) and attaches on the floor."""
    mesh = renamed(step(4, 10.0), "block", "low", lambda x, y: True)
    solution = solved(mesh, ports={"inlet": flow(1.0), "outlet": static(0.0)}, viscosity=0.02)
    points = [(n.name, n.of, n.value) for n in measure(solution) if n.name.endswith("tachment_point")]
    edge = [p for p in points if p[1] == ("low",)]
    assert edge[0] == ("detachment_point", ("low",), pytest.approx(2.0, abs=1e-12))
    floor = [p for p in points if p[1] == ("floor",)]
    assert floor[-1][0] == "attachment_point"
    assert 1.5 < floor[-1][2] < 6.0
    x = floor[-1][2] + 2.0
    near = solution.velocity(np.array([[x - 0.3, -0.98], [x + 0.3, -0.98]]))[0]
    assert near[0] < 0 < near[1]


def test_the_corner_eddy_of_a_cavity(cavity):
    """The lid drives the floor flow towards -x, the eddy in the right corner towards +x: the flow attaches between them."""
    points = [n for n in measure(cavity) if n.name.endswith("tachment_point") and n.of == ("floor",)]
    assert [n.name for n in points][:2] == ["detachment_point", "attachment_point"]
    right = points[1]
    assert 0.6 < right.value < 0.9
    near = cavity.velocity(np.array([[right.value - 0.05, 0.01], [right.value + 0.05, 0.01]]))[0]
    assert near[0] < 0 < near[1]


def test_sliding_and_slip_walls_have_no_points_of_attachment():
    """The shear on a wall moving with the crest of the profile may change sign; that is no attachment of the flow."""
    mesh = box_mesh(24, 8, (0.0, 3.0, 0.0, 1.0), SLOT, lambda x, y: (x, y * (1 + 0.5 * np.sin(np.pi * x / 3) ** 2)))
    numbers = measure(solved(mesh, ports=PORTS, walls={"high": sliding(1.0), "low": SLIP}, viscosity=0.1))
    assert not [n for n in numbers if n.name.endswith("tachment_point")]


def test_fluid_at_rest_has_no_points_of_attachment():
    numbers = measure(solved(box_mesh(6, 4, (0, 3, 0, 1), SLOT), ports={"inlet": static(5.0), "outlet": static(5.0)}))
    assert not [n for n in numbers if n.name.endswith("tachment_point")]
