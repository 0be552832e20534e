"""Names partition the boundary, or the drawing is refused with a sentence."""

import numpy as np
import pytest
from part_scripts import NAMED

from fem_flow.errors import GeometryError


def refusal(drawn, path):
    with pytest.raises(GeometryError) as caught:
        drawn(path)
    return str(caught.value), caught.value.reason


def test_the_named_box_is_accepted(drawn, box_script):
    _, outline, _ = drawn(box_script())
    assert outline.names("port") == ("outlet", "inlet")
    assert outline.names("wall") == ("wall",)
    assert outline.area == pytest.approx(4e-6, rel=1e-12)
    assert outline.box == pytest.approx((0.0, 0.0, 4e-3, 1e-3))


def group(tags, name):
    return f'    gmsh.model.addPhysicalGroup(1, {tags}, name="{name}")\n'


WRONG = {
    "unnamed": (
        group("[bottom]", "wall") + group("[left]", "inlet") + group("[right]", "outlet"),
        "one piece of the boundary has no name, the first from (4, 1) mm to (0, 1) mm; name every piece as a port, a wall, axis"
        " or symmetry",
        "unnamed_boundary",
    ),
    "two names": (
        NAMED + group("[top]", "lid"),
        "one piece of the outline carries two names, wall and lid; each piece needs exactly one",
        "two_names",
    ),
    "port missing": (
        group("[bottom, top, left]", "wall") + group("[right]", "outlet"),
        "the script declares the port inlet, but no boundary in its drawing has that name; it named: wall, outlet",
        "missing_port",
    ),
    "no such curve": (
        NAMED + group("[17]", "lid"),
        "the name lid is given to curve 17, which does not exist; name things after the last Boolean, which renumbers them,"
        " and after gmsh.model.occ.synchronize()",
        "no_such_curve",
    ),
    "no such surface": (
        NAMED + '    gmsh.model.addPhysicalGroup(2, [1, 2], name="oil")\n',
        "the name oil is given to surface 2, which does not exist; name things after the last Boolean, which renumbers them,"
        " and after gmsh.model.occ.synchronize()",
        "no_such_surface",
    ),
    "loose curve": (
        "    loose = gmsh.model.occ.addLine(gmsh.model.occ.addPoint(9, 9, 0), gmsh.model.occ.addPoint(9, 8, 0))\n"
        "    gmsh.model.occ.synchronize()\n" + NAMED + group("[loose]", "lid"),
        "the name lid is given to a curve that is no part of the fluid region",
        "loose_curve",
    ),
    "group without a name": (
        NAMED + "    gmsh.model.addPhysicalGroup(1, [top])\n",
        "a group of curves (number 4) has no name; give addPhysicalGroup a name",
        "unnamed_group",
    ),
    "axis in a planar part": (
        group("[bottom]", "axis") + group("[top]", "wall") + group("[left]", "inlet") + group("[right]", "outlet"),
        "a planar part has no axis; call the line of symmetry symmetry",
        "axis_in_planar",
    ),
    "nothing drawn": (
        "    gmsh.model.occ.remove([(2, 1)], recursive=True)\n",
        "the script drew no fluid region: it drew no surface",
        "no_surface",
    ),
    "lifted": (
        "    gmsh.model.occ.translate([(2, 1)], 0, 0, 1)\n    gmsh.model.occ.synchronize()\n" + NAMED,
        "the drawing leaves the plane z = 0 (it reaches z = 1 mm)",
        "not_plane",
    ),
    "overlap": (
        "    gmsh.model.occ.addRectangle(1, 0.5, 0, 1, 2)\n    gmsh.model.occ.synchronize()\n" + NAMED,
        "the drawn surfaces overlap, or the outline crosses itself, at (2, 1) mm; fuse or fragment surfaces that meet",
        "overlap",
    ),
    "one inside the other": (
        "    gmsh.model.occ.addRectangle(1, 0.25, 0, 1, 0.5)\n    gmsh.model.occ.synchronize()\n" + NAMED,
        "the drawn surfaces overlap, or the outline crosses itself, at (1.5, 0.25) mm; fuse or fragment surfaces that meet",
        "overlap",
    ),
    "gmsh closed": (
        NAMED + "    gmsh.finalize()\n",
        "the script own.py closed gmsh; leave gmsh.initialize and gmsh.finalize to fem_flow",
        "script_failed",
    ),
}


@pytest.mark.parametrize("case", WRONG)
def test_a_wrong_drawing_is_refused(drawn, box_script, case):
    lines, sentence, reason = WRONG[case]
    said, why = refusal(drawn, box_script(lines))
    assert (said, why) == (sentence, reason)


AXIS = group("[bottom]", "axis") + group("[top]", "wall") + group("[left]", "inlet") + group("[right]", "outlet")


def test_axisymmetric_lines(drawn, box_script):
    drawing, outline, _ = drawn(box_script(AXIS, kind="axisymmetric"))
    assert outline.names("axis") == ("axis",)
    mesh = drawing.mesh()
    axis = np.unique(mesh.boundaries["axis"])
    assert (mesh.points[axis, 1] == 0.0).all()
    assert (np.delete(mesh.points[:, 1], axis) > 0.0).all()
    assert outline.narrowest_gap == pytest.approx(2e-3)


def test_axis_must_lie_on_y_0(drawn, box_script):
    said, why = refusal(drawn, box_script(AXIS, kind="axisymmetric", corner="0, 0.5, 0, 4"))
    assert (said, why) == ("a curve named axis leaves the line y = 0 at (0, 0.5) mm", "axis_off_line")


def test_nothing_lies_below_the_axis(drawn, box_script):
    said, why = refusal(drawn, box_script(NAMED, kind="axisymmetric", corner="0, -0.5, 0, 4"))
    assert said == "the outline reaches below the axis, to (0, -0.5) mm; an axisymmetric part lies in y >= 0"
    assert why == "below_axis"


def test_the_line_y_0_is_called_axis(drawn, box_script):
    said, why = refusal(drawn, box_script(NAMED, kind="axisymmetric"))
    assert said == "the boundary wall lies on the axis y = 0; the name of that line is axis"
    assert why == "axis_name"


def test_a_section_that_is_declared_must_be_drawn(drawn, box_script):
    said, why = refusal(drawn, box_script(NAMED, ports='["inlet", "outlet"]\nsections = ["throat"]'))
    assert said == (
        "the script declares the section throat, but no curve inside the fluid in its drawing has that name; it named: wall,"
        " outlet, inlet"
    )
    assert why == "missing_section"


def test_two_surfaces_that_meet_in_a_point_are_refused(drawn, script):
    text = """
    import gmsh
    kind = "planar"
    unit = "mm"
    ports = []
    def draw(p):
        occ = gmsh.model.occ
        occ.fragment([(2, occ.addRectangle(0, 0, 0, 1, 1))], [(2, occ.addRectangle(1, 1, 0, 1, 1))])
        occ.synchronize()
        gmsh.model.addPhysicalGroup(1, [t for _, t in gmsh.model.getEntities(1)], name="wall")
    """
    said, why = refusal(drawn, script(text))
    assert (said, why) == ("the outline touches itself at (1, 1) mm", "touching")


def test_an_unknown_unit_never_reaches_the_mesh(drawn, box_script):
    path = box_script()
    path.write_text(path.read_text().replace('"mm"', '"mn"'))
    said, why = refusal(drawn, path)
    assert said.startswith("the script own.py cannot be used: its unit 'mn' is not known")
    assert why == "bad_script"
