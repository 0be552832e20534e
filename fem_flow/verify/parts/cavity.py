"""Square cavity closed by a sliding lid."""

from fem_flow import Parameter

kind = "planar"
unit = "m"
parameters = {"side": Parameter("1 m", low="1 mm", high="10 m", says="side of the square")}
ports = []


def draw(p):
    import gmsh

    surface = gmsh.model.occ.addRectangle(0, 0, 0, p.side, p.side)
    gmsh.model.occ.synchronize()
    bottom, right, top, left = (abs(tag) for _, tag in gmsh.model.getBoundary([(2, surface)]))
    gmsh.model.addPhysicalGroup(1, [top], name="lid")
    gmsh.model.addPhysicalGroup(1, [left, bottom, right], name="walls")
