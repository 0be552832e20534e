"""Straight passage: slot, tube or annulus.

     wall
    ------------------------
    inlet            outlet     gap between the walls; a tube has its axis at the bottom
    ------------------------
"""

from fem_flow import Parameter

unit = "mm"
parameters = {
    "shape": Parameter("slot", choices=["slot", "tube", "annulus"], says="form of the passage"),
    "gap": Parameter("1 mm", low="1 um", high="1 m", says="height of the slot, radius of the tube, radial gap of the annulus"),
    "inner": Parameter("1 mm", low="1 um", high="1 m", says="inner radius of the annulus"),
    "length": Parameter("4 mm", low="1 um", high="10 m", says="length"),
}
ports = ["inlet", "outlet"]


def kind(p):
    return "planar" if p.shape == "slot" else "axisymmetric"


def legs(p):
    return {"inlet": p.length, "outlet": 0.0}


def draw(p):
    import gmsh

    base = p.inner if p.shape == "annulus" else 0.0
    surface = gmsh.model.occ.addRectangle(0, base, 0, p.length, p.gap)
    gmsh.model.occ.synchronize()
    bottom, right, top, left = (abs(tag) for _, tag in gmsh.model.getBoundary([(2, surface)]))
    gmsh.model.addPhysicalGroup(1, [left], name="inlet")
    gmsh.model.addPhysicalGroup(1, [right], name="outlet")
    gmsh.model.addPhysicalGroup(1, [top], name="outer")
    gmsh.model.addPhysicalGroup(1, [bottom], name="axis" if p.shape == "tube" else "inner")
