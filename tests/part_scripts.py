"""Small part scripts as text, and the default values of a declaration, for tests that draw."""

from fem_flow.case.parameters import value_of


def default_values(declared, **changed):
    """Default value of every parameter in the script's unit, with some texts changed."""
    return {name: value_of(p, changed.get(name, p.default), name, declared) for name, p in declared.parameters.items()}


BOX = """
import gmsh
kind = "planar"
unit = "mm"
ports = ["inlet", "outlet"]
def draw(p):
    gmsh.model.occ.addRectangle(0, 0, 0, 4, 1)
    gmsh.model.occ.synchronize()
    bottom, right, top, left = 1, 2, 3, 4
"""
"""A 4 x 1 mm channel without names; tests append their own lines, indented by four."""

NAMED = """
    gmsh.model.addPhysicalGroup(1, [bottom, top], name="wall")
    gmsh.model.addPhysicalGroup(1, [left], name="inlet")
    gmsh.model.addPhysicalGroup(1, [right], name="outlet")
"""
