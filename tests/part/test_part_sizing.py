"""The automatic size field: across gaps, into corners, along bends, and how the caller changes it."""

import numpy as np
import pytest

from fem_flow.errors import GeometryError
from fem_flow.part.sizing import Cones, build


class Square:
    """As much of a drawn part as the tree of squares needs."""

    size = np.sqrt(2)

    class Side:
        xy = np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]])

    boundary = (Side,)


def some_cones(n=40):
    rng = np.random.default_rng(1)
    start = rng.uniform(0, 1, (n, 2))
    size = 10 ** rng.uniform(-2.5, -0.7, n)
    return Cones(start, start + rng.uniform(-0.2, 0.2, (n, 2)), size, size * rng.uniform(1, 3, n), rng.choice([0.12, 0.3], n))


def test_the_tree_gives_the_smallest_cone_everywhere():
    cones = some_cones()
    at = build(Square, cones).lookup(1.0)
    points = np.random.default_rng(3).uniform(0, 1, (400, 2))
    exact = cones.at(points)
    found = np.array([at(*p) for p in points])
    assert np.abs(found / exact - 1).max() < 0.25
    assert np.abs(found / exact - 1).mean() < 0.02


def test_pruned_cones_are_those_that_matter():
    """At the corners of the leaves, where the field is sampled, it agrees with brute force to round-off."""
    cones = some_cones()
    field = build(Square, cones)
    corners = field.corner[field.leaves]
    assert field.values[field.leaves, 0] == pytest.approx(cones.at(corners), rel=1e-12)


def test_the_whole_field_is_scaled():
    field = build(Square, some_cones(), size=0.05)
    one, two = field.lookup(1.0), field.lookup(2.0)
    for p in np.random.default_rng(4).uniform(0, 1, (50, 2)):
        assert two(*p) == pytest.approx(2 * one(*p))
        assert one(*p) <= 0.05


def edge_lengths(mesh, name):
    edges = mesh.boundaries[name]
    return np.linalg.norm(np.diff(mesh.points[edges[:, :2]], axis=1)[:, 0], axis=1), mesh.points[edges[:, 2]]


def crossed(mesh, start, end):
    """How many triangles a straight line cuts."""
    line = start + np.linspace(0, 1, 2001)[:, None] * (np.array(end) - start)
    a, b, c = (mesh.points[mesh.cells[:, k]] for k in range(3))
    found = set()
    for p in line:
        s = [(v - u)[:, 0] * (p - u)[:, 1] - (v - u)[:, 1] * (p - u)[:, 0] for u, v in ((a, b), (b, c), (c, a))]
        found |= set(np.flatnonzero(np.minimum.reduce(s) >= 0))
    return len(found)


def test_twice_the_scale_is_a_quarter_of_the_cells_graded_alike(drawn):
    drawing, _, _ = drawn("sudden_expansion", shape="round")
    coarse, middle, fine = (drawing.mesh(scale=s) for s in (1.0, 0.5, 0.25))
    assert len(fine.cells) / len(middle.cells) == pytest.approx(4.0, rel=0.1)
    assert len(middle.cells) / len(coarse.cells) == pytest.approx(4.0, rel=0.2)
    smallest = [min(edge_lengths(m, "step")[0].min(), edge_lengths(m, "small_bore")[0].min()) for m in (middle, fine)]
    assert smallest[0] / smallest[1] == pytest.approx(2.0, rel=0.2)


def test_elements_across_the_narrowest_gap(drawn):
    drawing, outline, _ = drawn("poppet_valve")
    mesh = drawing.mesh()
    assert crossed(mesh, *map(np.array, outline.narrowest_at)) >= 6
    assert len(mesh.sections["throat"]) >= 6


def test_grading_into_a_sharp_corner_and_none_at_a_rounded_one(drawn):
    gap = 10e-3
    for changed, low, high in (({}, 3e-4, 1e-3), ({"edge_radius": "1 mm"}, 1e-2, 5e-2)):
        drawing, outline, _ = drawn("sudden_expansion", **changed)
        mesh = drawing.mesh()
        length, middle = edge_lengths(mesh, "step")
        near = length.min() / gap
        assert low / 2 < near < high
        assert bool(outline.corners) == (not changed)
        if outline.corners:
            corner = np.array([outline.corners[0].x, outline.corners[0].y])
            distance = np.linalg.norm(middle - corner, axis=1)
            close = distance < 0.25 * gap
            assert (length[close] <= 0.45 * distance[close] + 1e-3 * gap).all(), "sizes grow linearly from the corner"


def test_bends_are_followed(drawn):
    """Some 40 edges a turn around an edge of the solid: a quarter circle has at least nine."""
    drawing, _, _ = drawn("sudden_expansion", edge_radius="1 mm")
    mesh = drawing.mesh()
    _, middle = edge_lengths(mesh, "step")
    on_arc = np.abs(np.linalg.norm(np.abs(middle) - [19e-3, 6e-3], axis=1) - 1e-3) < 1e-9
    assert on_arc.sum() >= 2 * 9


def test_a_cap_on_the_size(drawn, box_script):
    drawing, _, _ = drawn(box_script())
    free, capped = drawing.mesh(), drawing.mesh(size=0.08e-3)
    assert edge_lengths(free, "wall")[0].max() > 0.1e-3
    assert edge_lengths(capped, "wall")[0].max() < 0.09e-3
    assert crossed(capped, np.array([2.02e-3, 0]), (2.02e-3, 1e-3)) > 11


def test_a_size_near_the_walls(drawn, box_script):
    drawing, _, _ = drawn(box_script())
    mesh = drawing.mesh(near_walls=0.03e-3)
    length, _ = edge_lengths(mesh, "wall")
    assert np.median(length) == pytest.approx(0.03e-3, rel=0.15)
    twice, _ = edge_lengths(drawing.mesh(near_walls=0.03e-3, scale=2.0), "wall")
    assert np.median(twice) == pytest.approx(0.06e-3, rel=0.15)


def test_grading_where_the_caller_asks(drawn, box_script):
    drawing, _, _ = drawn(box_script())
    corner = np.array([0.0, 1e-3])
    plain, graded = drawing.mesh(), drawing.mesh(grade_at=[tuple(corner)])
    for mesh, low, high in ((plain, 0.05, 0.3), (graded, 2e-4, 2e-3)):
        length, middle = edge_lengths(mesh, "wall")
        near = length[np.argmin(np.linalg.norm(middle - corner, axis=1))] / 1e-3
        assert low < near < high


def test_too_many_cells_are_refused_before_meshing(drawn):
    drawing, _, _ = drawn("sudden_expansion")
    with pytest.raises(GeometryError) as caught:
        drawing.mesh(scale=0.01, max_cells=100_000)
    assert caught.value.reason == "too_many_cells"
    assert str(caught.value).startswith("the mesh would have ")
    assert ", more than the 100000 allowed: the narrowest gap (10 mm)" in str(caught.value)
    assert len(drawing.mesh(max_cells=100_000).cells) < 100_000


def test_a_hair_fine_gap_in_a_long_part_is_refused_and_not_tried(drawn):
    drawing, outline, _ = drawn("sudden_expansion", small_bore="0.01 mm", inlet_leg="5000 mm")
    assert outline.narrowest_gap == pytest.approx(1e-5)
    with pytest.raises(GeometryError) as caught:
        drawing.mesh()
    assert caught.value.reason == "too_many_cells"
