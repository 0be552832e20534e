"""Quality of quadratic triangles, and the mending of corner triangles."""

import numpy as np
import pytest

from fem_flow.part.chains import ordered, oriented_section
from fem_flow.part.triangles import free_corners, scaled_jacobians, sides


def triangle(corners, middles=None):
    corners = np.array(corners, float)
    halfway = 0.5 * (corners + np.roll(corners, -1, axis=0))
    return np.concatenate([corners, halfway if middles is None else np.array(middles, float)]), np.arange(6)[None]


EQUILATERAL = [(0, 0), (1, 0), (0.5, np.sqrt(3) / 2)]


def test_an_equilateral_triangle_has_quality_1():
    assert scaled_jacobians(*triangle(EQUILATERAL)) == pytest.approx(1.0)


def test_a_right_triangle():
    assert scaled_jacobians(*triangle([(0, 0), (1, 0), (0, 1)])) == pytest.approx(np.sqrt(2 / 3))


def test_a_clockwise_triangle_is_folded():
    assert scaled_jacobians(*triangle(EQUILATERAL[::-1])) == pytest.approx(-1.0)


def test_a_wrong_order_of_the_middle_nodes_is_seen():
    points, cells = triangle(EQUILATERAL)
    assert scaled_jacobians(points, cells[:, [0, 1, 2, 5, 3, 4]])[0] < 0


def test_the_bound_holds_and_is_near():
    """Against the smallest determinant on a fine grid of the triangle, for random bent triangles."""
    rng = np.random.default_rng(2)
    s, t = np.meshgrid(np.linspace(0, 1, 41), np.linspace(0, 1, 41))
    s, t = s[s + t <= 1], t[s + t <= 1]
    u = 1 - s - t
    ds = np.stack([1 - 4 * u, 4 * s - 1, 0 * s, 4 * (u - s), 4 * t, -4 * t])
    dt = np.stack([1 - 4 * u, 0 * s, 4 * t - 1, -4 * s, 4 * s, 4 * (u - t)])
    for _ in range(50):
        points, cells = triangle(EQUILATERAL)
        points[3:] += rng.uniform(-0.12, 0.12, (3, 2))
        a, b = ds.T @ points, dt.T @ points
        least = (a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]).min() * 2 / np.sqrt(3)
        bound = scaled_jacobians(points, cells)[0]
        assert bound <= least + 1e-12
        assert bound > least - 0.35


def test_a_side_bent_to_the_limit():
    """A middle node pulled inward by a quarter of the height folds a right triangle at its ends."""
    for share, sign in ((0.24, 1), (0.26, -1)):
        points, cells = triangle([(0, 0), (1, 0), (0, 1)])
        points[3] += [0.0, share]
        assert np.sign(scaled_jacobians(points, cells)[0]) == sign


def grid(nx, ny):
    """A grid of squares, all cut along the same diagonal: two of its corners have triangles with two outer sides."""
    x, y = np.meshgrid(np.arange(nx + 1.0), np.arange(ny + 1.0), indexing="ij")
    number = np.arange((nx + 1) * (ny + 1)).reshape(nx + 1, ny + 1)
    cells = []
    for i in range(nx):
        for j in range(ny):
            a, b, c, d = number[i, j], number[i + 1, j], number[i + 1, j + 1], number[i, j + 1]
            cells += [(a, b, d), (b, c, d)]
    return np.stack([x.ravel(), y.ravel()], axis=1), np.array(cells)


def outer_sides(cells):
    pairs, of = sides(cells)
    return pairs[np.bincount(of.ravel()) == 1]


def area(points, cells):
    a, b, c = (points[cells[:, k]] for k in range(3))
    return 0.5 * ((b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0])


@pytest.mark.parametrize("keep", [False, True])
def test_corner_triangles_are_mended(keep):
    points, cells = grid(3, 3)
    outer = outer_sides(cells)
    diagonal = np.array([[1, 4]])
    fixed = np.concatenate([outer, diagonal]) if keep else outer
    new_points, new_cells, surface = free_corners(points, cells, np.arange(len(cells)), outer, fixed)
    pairs, of = sides(new_cells)
    on_boundary = np.bincount(of.ravel()) == 1
    assert on_boundary[of].sum(axis=1).max() == 1
    assert np.array_equal(pairs[on_boundary], outer)
    assert area(new_points, new_cells).min() > 0
    assert area(new_points, new_cells).sum() == pytest.approx(9.0)
    assert len(surface) == len(new_cells)
    assert len(new_points) == len(points) + keep, "a side that must stay is not flipped: a node is put in instead"
    assert any((p == [1, 4]).all() for p in pairs) == keep


def test_a_lone_triangle_gets_a_node_inside():
    points, cells, _ = free_corners(
        np.array(EQUILATERAL, float), np.array([[0, 1, 2]]), np.array([1]), *[np.array([[0, 1], [1, 2], [2, 0]])] * 2
    )
    assert len(points) == 4
    assert area(points, cells).sum() == pytest.approx(np.sqrt(3) / 4)


def test_free_corners_leaves_its_input_alone():
    points, cells = grid(2, 2)
    before = points.copy(), cells.copy()
    free_corners(points, cells, np.zeros(len(cells)), outer_sides(cells), outer_sides(cells))
    assert np.array_equal(points, before[0])
    assert np.array_equal(cells, before[1])


def test_edges_are_put_head_to_tail():
    chain = np.array([[3, 4, 30], [1, 2, 10], [2, 3, 20], [7, 8, 70]])
    found = ordered(chain)
    assert sorted(map(tuple, found)) == sorted(map(tuple, chain))
    assert [tuple(e[:2]) for e in found[:3]] == [(1, 2), (2, 3), (3, 4)]


@pytest.mark.parametrize(
    ("places", "forward"),
    [
        ([(0, 0), (0, 1), (0, 2)], True),
        ([(0, 2), (0, 1), (0, 0)], False),
        ([(2, 0), (1, 0), (0, 0)], True),
        ([(0, 0), (1, 0), (2, 0)], False),
        ([(0, 0), (1, 1), (0, 2)], True),
        ([(0, 0), (-3, 0.1), (-5, -0.2)], False),
    ],
)
def test_sections_point_to_positive_x(places, forward):
    edges = np.array([[2, 1, 11], [0, 1, 10]])  # in any order and direction
    found = oriented_section(edges, np.array(places, float))
    expected = [[0, 1, 10], [1, 2, 11]] if forward else [[2, 1, 11], [1, 0, 10]]
    assert found.tolist() == expected
