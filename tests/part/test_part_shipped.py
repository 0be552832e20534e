"""The shipped parts: their dimensions on the mesh, designs at random in their box, and what they refuse."""

import numpy as np
import pytest
from part_scripts import default_values

from fem_flow.case.parameters import value_of
from fem_flow.errors import GeometryError
from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script, shipped
from fem_flow.part.triangles import crowded_cells


def length(mesh, name):
    """Length of a boundary or section, by Gauss on its quadratic edges, m."""
    edges = mesh.sections[name] if name in mesh.sections else mesh.boundaries[name]
    a, b, m = (mesh.points[edges[:, k]] for k in range(3))
    nodes, weights = np.polynomial.legendre.leggauss(4)
    return sum(
        0.5 * w * np.linalg.norm(a * (4 * s - 3) + b * (4 * s - 1) + m * (4 - 8 * s), axis=1).sum()
        for s, w in zip((nodes + 1) / 2, weights, strict=True)
    )


def ends(mesh, name):
    points = mesh.points[np.unique(mesh.boundaries[name])]
    return points.min(axis=0), points.max(axis=0)


def test_sudden_expansion_planar(drawn):
    drawing, outline, declared = drawn("sudden_expansion")
    mesh = drawing.mesh(scale=2.0)
    assert (declared.kind, declared.legs) == ("planar", {"inlet": 20.0, "outlet": 120.0})
    expected = {"inlet": 10, "outlet": 20, "small_bore": 40, "large_bore": 240, "step": 10, "throat": 10}
    for name, exact in expected.items():
        assert length(mesh, name) == pytest.approx(exact * 1e-3, rel=1e-12)
    assert outline.area == pytest.approx((20 * 10 + 120 * 20) * 1e-6, rel=1e-12)
    throat = mesh.points[np.unique(mesh.sections["throat"])]
    assert throat[:, 0] == pytest.approx(20e-3, rel=1e-12)
    assert len(outline.corners) == 2


def test_sudden_expansion_round_and_half(drawn):
    drawing, outline, declared = drawn("sudden_expansion", shape="round", edge_radius="1 mm")
    mesh = drawing.mesh(scale=2.0)
    assert (declared.kind, declared.legs) == ("axisymmetric", {"inlet": 19.0, "outlet": 120.0})
    assert length(mesh, "inlet") == pytest.approx(5e-3)
    assert length(mesh, "step") == pytest.approx((4 + np.pi / 2) * 1e-3, rel=2e-5)
    assert outline.corners == ()
    drawing, outline, declared = drawn("sudden_expansion", half=True)
    assert declared.kind == "planar"
    assert outline.names("symmetry") == ("symmetry",)
    assert outline.area == pytest.approx((20 * 10 + 120 * 20) * 0.5e-6, rel=1e-12)
    assert outline.narrowest_gap == pytest.approx(10e-3)


def test_poppet_valve(drawn):
    drawing, outline, declared = drawn("poppet_valve")
    mesh = drawing.mesh(scale=2.0)
    assert (declared.kind, declared.legs) == ("axisymmetric", {"inlet": 24.0, "outlet": 28.0})
    assert outline.names("wall") == ("poppet", "stem", "outlet_bore", "chamber", "seat", "bore")
    assert outline.corners == (), "all edges that the oil flows around are rounded"
    assert length(mesh, "inlet") == pytest.approx(6e-3)
    assert length(mesh, "outlet") == pytest.approx(7e-3)
    gap = 1.2e-3 * np.sin(np.pi / 4)
    assert outline.narrowest_gap == pytest.approx(gap, rel=1e-9)
    assert length(mesh, "throat") == pytest.approx(gap, rel=1e-3)
    chain = mesh.boundaries["poppet"]
    assert (chain[1:, 0] == chain[:-1, 1]).all(), "the poppet is one piece, from the nose to the stem"
    assert ends(mesh, "poppet")[1][1] == pytest.approx(7.5e-3)
    assert mesh.points[mesh.sections["throat"][0, 0], 1] < mesh.points[mesh.sections["throat"][-1, 1], 1]


def test_poppet_throat_area_is_the_frustum_of_the_seat_gap(drawn):
    """Of the equally short lines across a parallel seat gap the one at the smallest radius is the throat: the least area."""
    drawing, _, _ = drawn("poppet_valve", edge_radius="0 mm")
    mesh = drawing.mesh(scale=2.0)
    y = mesh.points[mesh.sections["throat"][[0, -1], [0, 1]], 1]
    gap = 1.2 * np.sin(np.pi / 4)
    assert sorted(y * 1e3) == pytest.approx([6 - gap * np.sqrt(0.5), 6], rel=1e-9)


@pytest.mark.parametrize("angle", ["25 deg", "60 deg", "90 deg"])
@pytest.mark.parametrize("radius", ["0 mm", "0.2 mm"])
def test_poppet_angles_and_sharp_edges(drawn, angle, radius):
    drawing, outline, _ = drawn("poppet_valve", seat_angle=angle, edge_radius=radius)
    mesh = drawing.mesh(scale=2.0)
    opening = 1.2e-3 * np.sin(np.radians(float(angle.split()[0])))
    assert outline.narrowest_gap == pytest.approx(opening, rel=1e-6)
    assert length(mesh, "throat") == pytest.approx(opening, rel=1e-3)
    assert bool(outline.corners) == (radius == "0 mm")
    assert mesh.min_scaled_jacobian > 0.2


def test_poppet_with_a_pointed_cone(drawn):
    drawing, outline, _ = drawn("poppet_valve", nose="0 mm")
    mesh = drawing.mesh(scale=2.0)
    (tip,) = outline.corners
    assert (tip.y, tip.angle, tip.walls) == (0.0, pytest.approx(270.0), ("poppet",))
    assert mesh.min_scaled_jacobian > 0.2


def test_manifold(drawn):
    drawing, outline, declared = drawn("manifold", branches=3, branch_width="3 mm", last_branch_width="5 mm")
    mesh = drawing.mesh(scale=2.0)
    assert declared.ports == ("inlet", "outlet_1", "outlet_2", "outlet_3")
    assert declared.legs == {"inlet": 20.0, "outlet_1": 24.0, "outlet_2": 24.0, "outlet_3": 24.0}
    assert set(outline.names("wall")) == {"header", "branch_1", "branch_2", "branch_3"}
    for k, width in enumerate((3, 4, 5)):
        assert length(mesh, f"outlet_{k + 1}") == pytest.approx(width * 1e-3)
        assert length(mesh, f"branch_{k + 1}") == pytest.approx((2 * 24 + np.pi) * 1e-3, rel=2e-5)
    assert length(mesh, "inlet") == pytest.approx(10e-3)
    assert outline.narrowest_gap == pytest.approx(3e-3)
    assert outline.corners == ()


def test_manifold_sharp_flush_and_long(drawn):
    drawing, outline, _ = drawn("manifold", fillet="0 mm", dead_end="0 mm", branches=2, branch_length="160 mm")
    mesh = drawing.mesh(scale=2.0)
    assert len(outline.corners) == 3, "the flush side of the last branch is no re-entrant corner"
    assert length(mesh, "branch_2") == pytest.approx((160 + 160) * 1e-3)
    assert length(mesh, "header") == pytest.approx((20 + 14 - 4 + 38 + 10) * 1e-3)
    assert mesh.min_scaled_jacobian > 0.2


def test_a_single_branch(drawn):
    _, outline, declared = drawn("manifold", branches=1)
    assert declared.ports == ("inlet", "outlet_1")
    assert outline.names("port") == ("outlet_1", "inlet")


REFUSED = [
    (
        "poppet_valve", {"lift": "0 mm"}, "the valve is closed (lift = 0 mm) and nothing can flow; give a lift above 0",
        "zero_gap",
    ),
    (
        "poppet_valve", {"stem": "18 mm"},
        "poppet_diameter (15 mm) must be larger than stem (18 mm); raise poppet_diameter or lower stem", "dimensions_cross",
    ),
    (
        "poppet_valve", {"bore": "15 mm"},
        "poppet_diameter (15 mm) must be larger than bore (15 mm); raise poppet_diameter or lower bore", "dimensions_cross",
    ),
    (
        "poppet_valve", {"nose": "12 mm"}, "bore (12 mm) must be larger than nose (12 mm); raise bore or lower nose",
        "dimensions_cross",
    ),
    (
        "poppet_valve", {"lift": "9 mm"},
        "at this lift the back of the poppet lies 12.5 mm behind the seat edge, beyond chamber_length (12 mm); raise"
        " chamber_length, or lower lift or rim", "dimensions_cross",
    ),
    (
        "poppet_valve", {"outlet_diameter": "30 mm"},
        "outlet_diameter (30 mm) must not exceed chamber_diameter (26 mm); lower outlet_diameter or raise chamber_diameter",
        "dimensions_cross",
    ),
    (
        "poppet_valve", {"seat_width": "8 mm"},
        "the seat (bore + 2 seat_width = 28 mm) must be smaller than chamber_diameter (26 mm); lower seat_width or raise"
        " chamber_diameter", "dimensions_cross",
    ),
    (
        "poppet_valve", {"edge_radius": "2 mm"},
        "the edge radius 2 mm does not fit on the wall poppet: its roundings take 2.828 mm of the 2 mm there; make the radius"
        " smaller or that wall longer", "radius_too_large",
    ),
    (
        "manifold", {"pitch": "6 mm"},
        "branches 1 and 2 overlap: their half widths and fillets take 6 mm of the pitch of 6 mm; raise pitch, or lower"
        " branch_width, last_branch_width or fillet", "branches_overlap",
    ),
    (
        "manifold", {"dead_end": "0.5 mm"},
        "dead_end (0.5 mm) leaves no room for the fillet (1 mm) of the last branch; raise dead_end above it, lower fillet, or"
        " give dead_end = 0 mm to end the header flush with the branch", "dimensions_cross",
    ),
    (
        "sudden_expansion", {"small_bore": "20 mm"},
        "large_bore (20 mm) must be larger than small_bore (20 mm); raise large_bore or lower small_bore", "dimensions_cross",
    ),
    (
        "sudden_expansion", {"edge_radius": "6 mm"},
        "edge_radius (6 mm) must be smaller than the step (5 mm) and than inlet_leg (20 mm); make it smaller",
        "radius_too_large",
    ),
    (
        "sudden_expansion", {"shape": "round", "half": True},
        'half = true is for shape = "planar" only; a round part is modelled by its half section anyway: leave half out',
        "dimensions_cross",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("name", "changed", "sentence", "reason"), REFUSED)
def test_dimensions_that_contradict_are_named(name, changed, sentence, reason):
    with Drawing(find_script(name, ".")) as drawing:
        values = default_values(drawing.declare(), **changed)
        with pytest.raises(GeometryError) as caught:
            drawing.draw(values)
    assert (str(caught.value), caught.value.reason) == (sentence, reason)


def random_values(declared, rng, spread):
    """A design near the default one: every dimension times up to ``spread`` either way, all else at random."""
    values = {}
    for name, p in declared.parameters.items():
        default = value_of(p, p.default, name, declared)
        if p.choices:
            values[name] = p.choices[rng.integers(len(p.choices))]
        elif isinstance(default, bool):
            values[name] = bool(rng.random() < 0.2)
        elif isinstance(default, int):
            values[name] = int(rng.integers(1, 6))
        else:
            low, high = (value_of(p, limit, name, declared) for limit in (p.low, p.high))
            values[name] = float(np.clip(default * spread ** rng.uniform(-1, 1), low, high))
    return values


@pytest.mark.parametrize("name", shipped())
def test_random_designs_are_meshed_well_or_refused_with_a_sentence(name):
    rng = np.random.default_rng(7)
    meshed, refused, names = 0, [], None
    with Drawing(find_script(name, ".")) as drawing:
        declared = drawing.declare()
        for _ in range(20):
            values = random_values(declared, rng, 1.5)
            ports = drawing.declare(values).ports
            try:
                drawing.draw(values)
            except GeometryError as error:
                refused.append(error)
                continue
            mesh = drawing.mesh(scale=2.0, max_cells=50_000)
            meshed += 1
            assert mesh.min_scaled_jacobian > 0.2
            assert crowded_cells(mesh.cells, mesh.boundaries) == 0
            assert set(mesh.names("port")) == set(ports)
            walls = {w.rstrip("0123456789") for w in mesh.names("wall")}
            assert walls == (names or walls)
            names = walls
            if meshed == 10:
                break
    assert meshed >= 8
    for error in refused:
        assert error.reason in ("dimensions_cross", "branches_overlap", "radius_too_large", "walls_cross", "zero_gap")
        assert any(word in str(error) for word in declared.parameters) or error.reason in ("radius_too_large", "walls_cross")


@pytest.mark.parametrize("name", shipped())
def test_every_dimension_may_change_by_a_fifth(name):
    """Same names on the boundary, or a refusal that names dimensions; of these few are expected."""
    refused = []
    with Drawing(find_script(name, ".")) as drawing:
        declared = drawing.declare()
        values = default_values(declared)
        names = {c.name for c in drawing.draw(values).curves}
        changed = [(k, f) for k, v in values.items() if isinstance(v, float) and v > 0 for f in (0.8, 1.2)]
        assert len(changed) >= 8
        for key, factor in changed:
            try:
                found = {c.name for c in drawing.draw({**values, key: values[key] * factor}).curves}
            except GeometryError as error:
                refused += [(key, str(error))]
            else:
                assert found == names
    assert len(refused) <= 2
    assert all(key in sentence for key, sentence in refused)
