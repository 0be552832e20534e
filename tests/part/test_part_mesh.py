"""What leaves the drawing process: curved triangles whose names, orientation and area are right."""

import numpy as np
import pytest

from fem_flow.part.find import shipped
from fem_flow.part.triangles import crowded_cells, scaled_jacobians

RING = """
import gmsh
kind = "planar"
unit = "cm"
ports = []
sections = ["cut", "loop"]
def draw(p):
    occ = gmsh.model.occ
    outer, hole = occ.addDisk(0, 0, 0, 3, 3), occ.addDisk(0, 0, 0, 1, 1)
    occ.cut([(2, outer)], [(2, hole)])
    line = occ.addLine(occ.addPoint(1, 0, 0), occ.addPoint(3, 0, 0))
    circle = occ.addCircle(-2, 0, 0, 0.5)
    occ.fragment([(2, outer)], [(1, line), (1, circle)])
    occ.synchronize()
    def near(curve, r, c=0.0):
        x, y, _ = gmsh.model.getValue(1, curve, [gmsh.model.getParametrizationBounds(1, curve)[0][0] + 0.3])
        return abs(((x - c) ** 2 + y * y) ** 0.5 - r) < 1e-6
    names = {"shaft": [], "bush": [], "loop": [], "cut": []}
    for _, curve in gmsh.model.getEntities(1):
        if near(curve, 1):
            names["shaft"].append(curve)
        elif near(curve, 3):
            names["bush"].append(curve)
        elif near(curve, 0.5, -2):
            names["loop"].append(curve)
        else:
            names["cut"].append(curve)
    for name, tags in names.items():
        gmsh.model.addPhysicalGroup(1, tags, name=name)
    inside = [t for _, t in gmsh.model.getEntities(2) if occ.getMass(2, t) < 1]
    gmsh.model.addPhysicalGroup(2, inside, name="eye")
"""


@pytest.fixture
def ring(drawn, script):
    drawing, outline, _ = drawn(script(RING))
    return drawing.mesh(scale=1.0), outline


def signed_area(mesh, edges):
    """1/2 int (x dy - y dx) along quadratic edges: exact for parabolas."""
    a, b, m = (mesh.points[edges[:, k]] for k in range(3))
    nodes, weights = np.polynomial.legendre.leggauss(3)
    total = 0.0
    for s, w in zip((nodes + 1) / 2, weights / 2, strict=True):
        x = a * (1 - s) * (1 - 2 * s) + b * s * (2 * s - 1) + m * 4 * s * (1 - s)
        d = a * (4 * s - 3) + b * (4 * s - 1) + m * (4 - 8 * s)
        total += 0.5 * w * (x[:, 0] * d[:, 1] - x[:, 1] * d[:, 0]).sum()
    return total


def test_area_of_a_curved_part(ring):
    mesh, outline = ring
    exact = np.pi * (0.03**2 - 0.01**2)
    assert outline.area == pytest.approx(exact, rel=1e-9)
    enclosed = sum(signed_area(mesh, e) for e in mesh.boundaries.values())
    assert enclosed == pytest.approx(exact, rel=2e-5)
    x, y = mesh.points[mesh.boundaries["bush"][:, 0]].T
    chords = 0.5 * float(x @ np.roll(y, -1) - y @ np.roll(x, -1))
    assert chords < (1 - 1e-3) * np.pi * 0.03**2, "the part is too finely meshed for this test to see curved edges"


def test_the_fluid_lies_on_the_left(ring):
    mesh, _ = ring
    assert signed_area(mesh, mesh.boundaries["bush"]) == pytest.approx(np.pi * 0.03**2, rel=1e-4)
    assert signed_area(mesh, mesh.boundaries["shaft"]) == pytest.approx(-np.pi * 0.01**2, rel=1e-4)


def test_nodes_lie_on_the_true_curves_and_middles_halfway(ring):
    mesh, _ = ring
    for name, radius in (("bush", 0.03), ("shaft", 0.01)):
        edges = mesh.boundaries[name]
        assert np.linalg.norm(mesh.points[edges], axis=2) == pytest.approx(radius, rel=1e-9)
        a, b, m = (mesh.points[edges[:, k]] for k in range(3))
        assert np.linalg.norm(m - a, axis=1) == pytest.approx(np.linalg.norm(m - b, axis=1), rel=1e-9)


def test_boundary_nodes_know_their_curve_and_parameter(ring):
    mesh, _ = ring
    on_boundary = np.unique(np.concatenate(list(mesh.boundaries.values())))
    inside = np.setdiff1d(np.arange(len(mesh.points)), on_boundary)
    assert (mesh.node_curve[on_boundary] > 0).all()
    assert np.isfinite(mesh.node_parameter[on_boundary]).all()
    assert (mesh.node_curve[inside] == -1).all()
    assert np.isnan(mesh.node_parameter[inside]).all()
    for name, radius in (("bush", 0.03), ("shaft", 0.01)):  # on gmsh's circles the parameter is the angle
        nodes = np.unique(mesh.boundaries[name])
        angle = mesh.node_parameter[nodes]
        places = radius * np.stack([np.cos(angle), np.sin(angle)], axis=1)
        turned = radius * np.stack([np.cos(angle), -np.sin(angle)], axis=1)
        off = np.minimum(np.abs(places - mesh.points[nodes]), np.abs(turned - mesh.points[nodes]))
        assert off.max() < 1e-9


def test_inner_sides_are_straight_and_elements_good(ring):
    mesh, _ = ring
    curved = np.unique(np.concatenate([e[:, 2] for e in [*mesh.boundaries.values(), *mesh.sections.values()]]))
    for k, (a, b) in enumerate(((0, 1), (1, 2), (2, 0))):
        middles = mesh.cells[:, 3 + k]
        plain = ~np.isin(middles, curved)
        halfway = 0.5 * (mesh.points[mesh.cells[plain, a]] + mesh.points[mesh.cells[plain, b]])
        assert np.abs(mesh.points[middles[plain]] - halfway).max() < 1e-16
    assert mesh.min_scaled_jacobian == pytest.approx(scaled_jacobians(mesh.points, mesh.cells).min(), rel=1e-9)
    assert mesh.min_scaled_jacobian > 0.3


def test_a_section_points_to_positive_x_or_y(ring):
    """The cut at constant y runs towards -x, so that the normal to its right points to +y; it is one chain."""
    mesh, _ = ring
    cut = mesh.sections["cut"]
    assert (np.diff(mesh.points[cut[:, :2], 0], axis=1) < 0).all()
    assert (cut[1:, 0] == cut[:-1, 1]).all()
    assert mesh.points[cut[0, 0]] == pytest.approx([0.03, 0.0], abs=1e-12)
    assert mesh.points[cut[-1, 1]] == pytest.approx([0.01, 0.0], abs=1e-12)


def test_a_closed_section_runs_anticlockwise_and_bounds_its_region(ring):
    mesh, _ = ring
    area = np.pi * 0.005**2
    assert signed_area(mesh, mesh.sections["loop"]) == pytest.approx(area, rel=1e-3)
    eye = mesh.points[mesh.cells[mesh.regions["eye"]][:, :3]]
    assert np.linalg.norm(eye.mean(axis=1) - [-0.02, 0.0], axis=1).max() < 0.005
    assert set(mesh.boundaries) == {"bush", "shaft"}
    assert set(mesh.roles.values()) == {"wall"}


@pytest.mark.parametrize("name", shipped())
@pytest.mark.parametrize("scale", [2.0, 1.0])
def test_invariants_of_the_shipped_parts(drawn, name, scale):
    drawing, outline, declared = drawn(name)
    mesh = drawing.mesh(scale=scale)
    n = len(mesh.points)
    sides = np.sort(np.concatenate([mesh.cells[:, [a, b, m]] for a, b, m in ((0, 1, 3), (1, 2, 4), (2, 0, 5))]), axis=1)
    key, counts = np.unique(sides[:, :2] @ [n, 1], return_counts=True)
    named = np.concatenate(list(mesh.boundaries.values()))
    assert np.array_equal(np.sort(np.sort(named[:, :2], axis=1) @ [n, 1]), key[counts == 1]), "names partition the boundary"
    assert set(counts) == {1, 2}
    directed = np.concatenate([mesh.cells[:, [a, b]] for a, b in ((0, 1), (1, 2), (2, 0))]) @ [n, 1]
    assert np.isin(named[:, :2] @ [n, 1], directed).all(), "the fluid is on the left"
    assert set(mesh.names("port")) == set(declared.ports) == set(outline.names("port"))
    assert set(mesh.sections) == set(declared.sections)
    assert sum(signed_area(mesh, e) for e in mesh.boundaries.values()) == pytest.approx(outline.area, rel=1e-5)
    assert mesh.min_scaled_jacobian > 0.3
    assert crowded_cells(mesh.cells, mesh.boundaries) == 0
    unused = np.setdiff1d(np.arange(n), mesh.cells)
    assert len(unused) == 0
    if declared.kind == "axisymmetric":
        axis = np.unique(mesh.boundaries["axis"])
        assert (mesh.points[axis, 1] == 0).all()
        assert np.delete(mesh.points[:, 1], axis).min() > 0
    if scale == 1.0:
        corners = len(np.unique(mesh.cells[:, :3]))
        assert 8_000 < 2 * n + corners < 25_000


def test_a_straight_mesh_is_exact(drawn, box_script):
    drawing, _, _ = drawn(box_script())
    mesh = drawing.mesh()
    assert sum(signed_area(mesh, e) for e in mesh.boundaries.values()) == pytest.approx(4e-6, rel=1e-14)
    assert np.ptp(mesh.points, axis=0) == pytest.approx([4e-3, 1e-3], rel=1e-15)


def test_micrometre_parts_are_meshed_as_large_ones(drawn, box_script):
    path = box_script()
    large = drawn(path)[0].mesh()
    path.write_text(path.read_text().replace('"mm"', '"um"'))
    small = drawn(path)[0].mesh()
    assert np.array_equal(small.cells, large.cells)
    assert small.points == pytest.approx(1e-3 * large.points, rel=1e-14)
