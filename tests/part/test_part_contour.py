"""Contours with rounded edges: arcs, their limits, and the shortest line between two walls."""

import numpy as np
import pytest

from fem_flow.errors import GeometryError
from fem_flow.part.contour import Edge, Piece, contour, shortest
from fem_flow.part.polygon import first_crossing, windings

SQUARE = [Edge(0, 0, "a"), Edge(4, 0, "b"), Edge(4, 4, "c"), Edge(0, 4, "d")]


def rounded(radius, at=1, **kw):
    edges = list(SQUARE)
    edges[at] = Edge(edges[at].x, edges[at].y, edges[at].wall, radius, **kw)
    return edges


def test_sharp_contour():
    pieces = contour(SQUARE, "mm")
    assert [p.name for p in pieces] == ["a", "b", "c", "d"]
    assert all(p.b is q.a for p, q in zip(pieces, pieces[1:] + pieces[:1], strict=True))


def test_a_rounding_is_an_arc_tangent_to_both_walls():
    before, arc, after = contour(rounded(1.0), "mm")[:3]
    assert (before.name, arc.name, after.name) == ("a", "b", "b")
    assert arc.centre == pytest.approx([3.0, 1.0])
    assert before.b == pytest.approx([3.0, 0.0])
    assert after.a == pytest.approx([4.0, 1.0])
    assert arc.at([0.5])[0] == pytest.approx([3 + np.sqrt(0.5), 1 - np.sqrt(0.5)])


def test_a_rounding_belongs_to_the_wall_named():
    assert [p.name for p in contour(rounded(1.0, round="a"), "mm")] == ["a", "a", "b", "c", "d"]


def test_a_rounding_that_takes_the_whole_wall_leaves_no_sliver():
    edges = [Edge(0, 0, "a"), Edge(4, 0, "b", 2.0), Edge(4, 4, "c", 2.0), Edge(0, 4, "d")]
    assert [p.name for p in contour(edges, "mm")] == ["a", "b", "c", "c", "d"]


def test_a_rounding_that_does_not_fit():
    edges = [Edge(0, 0, "a"), Edge(4, 0, "b", 2.5), Edge(4, 4, "c", 2.5), Edge(0, 4, "d")]
    with pytest.raises(GeometryError) as caught:
        contour(edges, "mm")
    assert str(caught.value) == (
        "the edge radius 2.5 mm does not fit on the wall b: its roundings take 5 mm of the 4 mm there; make the radius smaller"
        " or that wall longer"
    )
    assert caught.value.reason == "radius_too_large"


def test_corners_that_coincide_are_one():
    edges = [*SQUARE[:2], Edge(4, 4, "nothing"), *SQUARE[2:]]
    assert [p.name for p in contour(edges, "mm")] == ["a", "b", "c", "d"]


def test_walls_that_cross():
    edges = [Edge(0, 0, "a"), Edge(4, 4, "b"), Edge(4, 0, "c"), Edge(0, 4, "d")]
    with pytest.raises(GeometryError) as caught:
        contour(edges, "mm")
    assert str(caught.value) == (
        "with these dimensions the walls a and c cross at (2, 2) mm; change the dimensions that place them"
    )
    assert caught.value.reason == "walls_cross"


def line(a, b):
    return Piece("x", np.array(a, float), np.array(b, float))


def test_shortest_between_lines():
    p, q = shortest([line((0, 0), (4, 0))], [line((5, 1), (9, 4))])
    assert (p, q) == (pytest.approx([4, 0]), pytest.approx([5, 1]))
    p, q = shortest([line((0, 0), (4, 0))], [line((1, 2), (2, 1))])
    assert (p, q) == (pytest.approx([2, 0]), pytest.approx([2, 1]))


def test_of_equally_short_lines_the_lowest_is_taken():
    p, q = shortest([line((0, 0), (4, 4))], [line((1, 0), (4, 3))])
    assert np.linalg.norm(p - q) == pytest.approx(np.sqrt(0.5))
    assert p[1] + q[1] == pytest.approx(0.5)


def test_shortest_between_arc_and_line():
    arc = Piece("arc", np.array([1.0, 0.0]), np.array([0.0, 1.0]), np.array([0.0, 0.0]))
    p, q = shortest([arc], [line((3, 0), (0, 3))])
    assert p == pytest.approx([np.sqrt(0.5)] * 2, abs=1e-7)
    assert q == pytest.approx([1.5, 1.5], abs=1e-7)


def test_windings():
    start = np.array([(0, 0), (4, 0), (4, 4), (0, 4), (1, 1), (1, 2), (2, 2), (2, 1)], float)
    end = np.array([(4, 0), (4, 4), (0, 4), (0, 0), (1, 2), (2, 2), (2, 1), (1, 1)], float)
    places = np.array([(3, 3), (1.5, 1.5), (5, 1), (-1, 2), (0.5, 2)])
    assert windings(places, start, end).tolist() == [1, 0, 0, 0, 1]


def test_first_crossing():
    start, end = np.array([(0, 0), (4, 4), (4, 0)], float), np.array([(4, 4), (4, 0), (0, 3)], float)
    found = first_crossing(start, end, np.array([1, 2, -1]))
    assert found[:2] == (0, 2)
    assert found[2] == pytest.approx([12 / 7, 12 / 7])
    assert first_crossing(start[:2], end[:2], np.array([1, -1])) is None
