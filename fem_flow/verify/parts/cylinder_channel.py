"""Circular cylinder across a plane channel, slightly off its middle.

The circle is drawn in `arcs` pieces: the mesh takes at least three elements along every piece, so more arcs resolve the
pressure at single points of the cylinder.
"""

from math import pi

from fem_flow import Parameter

kind = "planar"
unit = "cm"
parameters = {
    "height": Parameter("41 cm", low="1 cm", high="1 m", says="height of the channel"),
    "length": Parameter("220 cm", low="1 cm", high="10 m", says="length of the channel"),
    "diameter": Parameter("10 cm", low="1 mm", high="1 m", says="diameter of the cylinder"),
    "x": Parameter("20 cm", low="1 mm", high="1 m", says="distance of its centre from the inlet"),
    "y": Parameter("20 cm", low="1 mm", high="1 m", says="height of its centre"),
    "arcs": Parameter(64, low=1, high=1000, says="pieces that the circle is drawn in"),
}
ports = ["inlet", "outlet"]


def draw(p):
    import gmsh

    occ = gmsh.model.occ
    channel = occ.addRectangle(0, 0, 0, p.length, p.height)
    turn = 2 * pi / p.arcs
    arcs = [occ.addCircle(p.x, p.y, 0, p.diameter / 2, angle1=k * turn, angle2=(k + 1) * turn) for k in range(p.arcs)]
    disk = occ.addPlaneSurface([occ.addCurveLoop(arcs)])
    fluid, _ = occ.cut([(2, channel)], [(2, disk)])
    occ.synchronize()
    names = {"inlet": [], "outlet": [], "channel": [], "cylinder": []}
    for _, tag in gmsh.model.getBoundary(fluid, oriented=False):
        x, y, _ = gmsh.model.occ.getCenterOfMass(1, tag)
        if x < 1e-6:
            names["inlet"].append(tag)
        elif x > p.length - 1e-6:
            names["outlet"].append(tag)
        elif y < 1e-6 or y > p.height - 1e-6:
            names["channel"].append(tag)
        else:
            names["cylinder"].append(tag)
    for name, tags in names.items():
        gmsh.model.addPhysicalGroup(1, tags, name=name)
