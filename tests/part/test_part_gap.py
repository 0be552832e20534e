"""Facing walls, the narrowest gap and the sharp re-entrant corners, against geometry done by hand."""

import numpy as np
import pytest

SHAPE = """
import gmsh
from fem_flow.part.contour import Edge, draw_contour
kind = "{kind}"
unit = "mm"
ports = {ports}
def draw(p):
    draw_contour({edges}, "mm")
"""


@pytest.fixture
def contour(drawn, script):
    def draw(edges, kind="planar", ports=()):
        text = "[" + ", ".join(f"Edge{tuple(e)!r}" for e in edges) + "]"
        return drawn(script(SHAPE.format(kind=kind, ports=list(ports), edges=text)))[1]

    return draw


def channel(step, radius=0.0):
    """A 10 x 4 mm channel with a block of that height on its floor."""
    return [
        (0, 0, "floor"), (4, 0, "block"), (4, step, "block", radius), (6, step, "block", radius), (6, 0, "floor"),
        (10, 0, "out"), (10, 4, "roof"), (0, 4, "in"),
    ]  # fmt: skip


def test_a_block_in_a_channel(contour):
    outline = contour(channel(3.0), ports=["in", "out"])
    assert outline.narrowest_gap == pytest.approx(1e-3, rel=1e-12)
    (x0, y0), (x1, y1) = outline.narrowest_at
    assert sorted([y0, y1]) == pytest.approx([3e-3, 4e-3])
    assert x0 == pytest.approx(x1)
    assert 4e-3 <= x0 <= 6e-3
    assert [(round(c.x, 9), round(c.y, 9)) for c in outline.corners] == [(4e-3, 3e-3), (6e-3, 3e-3)]
    assert [c.angle for c in outline.corners] == pytest.approx([270.0, 270.0])
    assert {c.walls for c in outline.corners} == {("block",)}


def test_rounded_edges_are_not_sharp_corners(contour):
    outline = contour(channel(3.0, 0.3), ports=["in", "out"])
    assert outline.corners == ()
    assert outline.narrowest_gap == pytest.approx(1e-3, rel=1e-9)


def test_a_pointed_block_is_nearest_at_its_point(contour):
    edges = [(0, 0, "floor"), (4, 0, "tip"), (5, 3.5, "tip"), (6, 0, "floor"), (10, 0, "out"), (10, 4, "roof"), (0, 4, "in")]
    outline = contour(edges, ports=["in", "out"])
    assert outline.narrowest_gap == pytest.approx(0.5e-3, rel=1e-12)
    assert sorted(outline.narrowest_at) == [pytest.approx((5e-3, 3.5e-3)), pytest.approx((5e-3, 4e-3))]
    (corner,) = outline.corners
    assert corner.angle == pytest.approx(360 - 2 * np.degrees(np.arctan(1 / 3.5)))


def test_a_rounded_point_is_sharpened_on_the_true_curve(contour):
    """A 90 degree point with radius 1 mm: the nearest place is the middle of the arc, between sampled points."""
    edges = [(0, 0, "floor"), (3, 0, "tip"), (6, 3, "tip", 1.0), (9, 0, "floor"), (12, 0, "out"), (12, 4, "roof"), (0, 4, "in")]
    outline = contour(edges, ports=["in", "out"])
    top = 3 - (np.sqrt(2) - 1)
    assert outline.narrowest_gap == pytest.approx((4 - top) * 1e-3, rel=1e-7)
    assert outline.corners == ()


def test_a_wall_of_another_passage_is_not_faced(contour):
    """Two channels 2 mm wide, joined at their right end by a passage of 3 mm: the 0.1 mm of metal between them is no gap."""
    edges = [
        (0, 0, "low"), (13, 0, "end"), (13, 4.1, "high"), (0, 4.1, "out"), (0, 2.1, "high"), (10, 2.1, "nose"), (10, 2, "low"),
        (0, 2, "in"),
    ]  # fmt: skip
    outline = contour(edges, ports=["in", "out"])
    assert outline.narrowest_gap == pytest.approx(2e-3, rel=1e-9)


def test_a_bore_counts_as_its_diameter(contour):
    edges = [(0, 0, "axis"), (9, 0, "out"), (9, 1.5, "bore"), (0, 1.5, "in")]
    assert contour(edges, "axisymmetric", ["in", "out"]).narrowest_gap == pytest.approx(3e-3, rel=1e-12)


def test_a_symmetry_line_counts_as_a_mirror(contour):
    edges = [(0, 0, "symmetry"), (9, 0, "out"), (9, 1.5, "wall"), (0, 1.5, "in")]
    assert contour(edges, "planar", ["in", "out"]).narrowest_gap == pytest.approx(3e-3, rel=1e-12)


def test_a_corner_on_a_symmetry_line_counts_with_its_mirror_image(contour):
    """A splitter whose tip lies on the symmetry line: 150 degrees of fluid on either side make 300."""
    tip = float(5 * np.tan(np.radians(30)))
    edges = [(0, 0, "symmetry"), (5, 0, "splitter"), (10, tip, "out"), (10, 6, "wall"), (0, 6, "in")]
    (corner,) = contour(edges, "planar", ["in", "out"]).corners
    assert (corner.x, corner.y, corner.walls) == (pytest.approx(5e-3), 0.0, ("splitter",))
    assert corner.angle == pytest.approx(300.0)


def test_a_blunt_body_on_the_axis_has_no_corner_there(contour):
    edges = [
        (0, 0, "axis"), (5, 0, "body"), (5, 1, "body", 0.2), (10, 1, "out"), (10, 3, "wall"), (0, 3, "in")
    ]  # fmt: skip
    assert contour(edges, "axisymmetric", ["in", "out"]).corners == ()


def test_a_wedge_is_a_corner_and_no_gap(contour):
    """Walls that meet at 45 degrees come as near as one likes; the gap is measured elsewhere or by the hydraulic diameter."""
    outline = contour([(0, 0, "base"), (4, 0, "right"), (0, 4, "left")])
    perimeter = 8 + 4 * np.sqrt(2)
    assert outline.narrowest_gap == pytest.approx(4 * 8 / perimeter * 1e-3, rel=1e-9)
    assert np.isnan(outline.narrowest_at).all()


def test_an_eccentric_ring(drawn, script):
    text = """
    import gmsh
    kind = "planar"
    unit = "mm"
    ports = []
    def draw(p):
        occ = gmsh.model.occ
        occ.cut([(2, occ.addDisk(0, 0, 0, 3, 3))], [(2, occ.addDisk(1.37, 0.91, 0, 1, 1))])
        occ.synchronize()
        gmsh.model.addPhysicalGroup(1, [t for _, t in gmsh.model.getEntities(1)], name="wall")
    """
    outline = drawn(script(text))[1]
    off = np.hypot(1.37, 0.91)
    assert outline.narrowest_gap == pytest.approx((3 - 1 - off) * 1e-3, rel=1e-6)
