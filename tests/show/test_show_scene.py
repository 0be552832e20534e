"""Subdivision, edges, level lines and bands state exact mathematics."""

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.flow.nodal import NodalFields
from fem_flow.show.scene import (
    edge_lines,
    edges,
    lattice,
    level_lines,
    mirrored,
    outer_side,
    parts_for,
    ribbon,
    shape_functions,
    subdivide,
)


def area(points, triangles):
    a, b, c = (points[triangles[:, k]] for k in range(3))
    return 0.5 * ((b[:, 0] - a[:, 0]) * (c[:, 1] - a[:, 1]) - (b[:, 1] - a[:, 1]) * (c[:, 0] - a[:, 0]))


@pytest.mark.parametrize("parts", [1, 2, 3, 4, 7])
def test_lattice_cuts_the_unit_triangle_into_equal_anticlockwise_pieces(parts):
    a, b, pieces = lattice(parts)
    assert len(pieces) == parts**2
    assert area(np.column_stack([a, b]), pieces) == pytest.approx(0.5 / parts**2)


def test_shape_functions_are_one_at_their_own_node_and_reproduce_quadratics():
    nodes = np.array([[0, 0], [1, 0], [0, 1], [0.5, 0], [0.5, 0.5], [0, 0.5]])
    assert shape_functions(*nodes.T) == pytest.approx(np.eye(6))
    p = np.array([[0.2, 0.3], [0.7, 0.1]])
    f = lambda q: 1 + q[:, 0] ** 2 - 3 * q[:, 0] * q[:, 1] + q[:, 1]  # noqa: E731
    assert shape_functions(*p.T) @ f(nodes) == pytest.approx(f(p))


def test_subdivision_reproduces_a_quadratic_field_exactly():
    fields, _, _ = synthetic.slot(nx=3, ny=2)
    x, y = fields.points.T
    square = NodalFields("planar", fields.points, fields.cells, np.array([x * y, x**2]), x, 0 * x, 0 * x, y**2)
    surface = subdivide(square, 4)
    sx, sy = surface.points.T
    assert surface.values["stream"] == pytest.approx(sy**2, abs=1e-18)
    assert surface.values["u"] == pytest.approx(sx * sy, abs=1e-18)
    assert surface.values["speed"] == pytest.approx(np.hypot(sx * sy, sx**2), abs=1e-18)
    assert len(surface.triangles) == 16 * len(fields.cells)


def test_subdivision_follows_curved_edges():
    """Ring: the area by small triangles is near the circles', and much nearer than with the corners alone."""
    fields, outline, _ = synthetic.ring(nx=12, ny=2)
    exact = outline.area
    wrong = [abs(np.abs(area(s.points, s.triangles)).sum() / exact - 1) for s in (subdivide(fields, 4), subdivide(fields, 1))]
    assert wrong[0] < 4e-3
    assert wrong[0] < wrong[1] / 8


def test_inputs_are_left_as_they_were(nozzle):
    fields, _, _ = nozzle
    before = {n: getattr(fields, n).copy() for n in ("points", "cells", "velocity", "pressure", "stream")}
    surface = subdivide(fields)
    surface.values["pressure"][:] = 7.0
    surface.points[:] = 0.0
    for name, array in before.items():
        assert np.array_equal(getattr(fields, name), array)


def test_large_meshes_are_cut_less():
    assert [parts_for(n) for n in (10, 2_500, 2_501, 8_001)] == [4, 4, 3, 2]


def test_boundary_edges_keep_the_fluid_on_their_left(nozzle):
    fields, outline, _ = nozzle
    inner, rim = edges(fields.cells)
    assert 2 * len(inner) + len(rim) == 3 * len(fields.cells)
    lines = edge_lines(fields.points, rim, 8)
    x0, y0, x1, y1 = lines[:, :-1, 0], lines[:, :-1, 1], lines[:, 1:, 0], lines[:, 1:, 1]
    enclosed = 0.5 * (x0 * y1 - x1 * y0).sum()
    assert enclosed == pytest.approx(outline.area, rel=1e-4)


def test_edge_lines_are_parabolas_through_the_three_nodes():
    points = np.array([[0.0, 0.0], [1.0, 0.0], [0.5, 0.25]])
    line = edge_lines(points, np.array([[0, 1, 2]]), 4)[0]
    assert line[[0, 2, 4]] == pytest.approx(points[[0, 2, 1]])
    assert line[:, 1] == pytest.approx(line[:, 0] * (1 - line[:, 0]))


def test_level_lines_of_a_linear_pressure_are_straight_and_cross_the_whole_slot(slot):
    fields, _, _ = slot
    surface = subdivide(fields)
    level = 0.37 * fields.pressure.max()
    found = level_lines(surface, "pressure", [level], carry=("speed",))
    assert found["start"][:, 0] == pytest.approx(0.63 * 0.04, abs=1e-12)
    assert np.linalg.norm(found["end"] - found["start"], axis=1).sum() == pytest.approx(0.004)
    assert len(found["speed"]) == len(found["start"]) > 0


def test_level_lines_of_the_stream_function_keep_their_height(slot):
    fields, _, _ = slot
    found = level_lines(subdivide(fields), "stream", [0.5 * fields.stream.max()])
    assert found["start"][:, 1] == pytest.approx(0.002, abs=2e-5)
    assert np.linalg.norm(found["end"] - found["start"], axis=1).sum() == pytest.approx(0.04, rel=1e-3)


def test_no_level_no_lines(slot):
    found = level_lines(subdivide(slot[0]), "speed", [])
    assert found["start"].shape == (0, 2)
    assert len(level_lines(subdivide(slot[0]), "speed", [99.0])["level"]) == 0


def test_the_other_half_is_below_the_axis():
    assert mirrored(np.array([[1.0, 2.0]])).tolist() == [[1.0, -2.0]]


def test_the_band_lies_outside_the_fluid_for_every_kind_of_wall(slot):
    fields, _, walls = slot
    rim = edge_lines(fields.points, edges(fields.cells)[1])
    for wall, height in zip(walls, (-0.001, 0.005), strict=True):
        band = ribbon(wall.points, 0.001, outer_side(wall.points, rim), False)
        assert band[:, 1] == pytest.approx(height)
    fields, _, walls = synthetic.ring()
    rim = edge_lines(fields.points, edges(fields.cells)[1])
    for wall, radius in zip(walls, (0.009, 0.017), strict=True):
        band = ribbon(wall.points, 0.001, outer_side(wall.points, rim), True)
        assert np.hypot(*band.T) == pytest.approx(radius, rel=1e-3)


def test_the_band_is_mitred_at_a_right_angle():
    band = ribbon(np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0]]), 0.1, -1.0, False)
    assert band == pytest.approx(np.array([[0.0, -0.1], [1.1, -0.1], [1.1, 1.0]]))


def test_a_corner_that_stands_twice_is_mitred_once():
    corner = np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 0.0], [1.0, 1.0]])
    rim = ribbon(corner, 0.1, -1.0, False)
    assert rim == pytest.approx(np.array([[0.0, -0.1], [1.1, -0.1], [1.1, -0.1], [1.1, 1.0]]))
