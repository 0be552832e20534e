"""Sphere at rest on the axis of a tube."""

from fem_flow import Parameter

kind = "axisymmetric"
unit = "mm"
parameters = {
    "tube": Parameter("2 mm", low="0.1 mm", high="1 m", says="bore of the tube"),
    "sphere": Parameter("1 mm", low="0.01 mm", high="1 m", says="diameter of the sphere"),
    "reach": Parameter("6 mm", low="0.1 mm", high="10 m", says="tube on each side of the centre"),
}
ports = ["inlet", "outlet"]


def draw(p):
    import gmsh

    occ = gmsh.model.occ
    tube = occ.addRectangle(-p.reach, 0, 0, 2 * p.reach, p.tube / 2)
    disk = occ.addDisk(0, 0, 0, p.sphere / 2, p.sphere / 2)
    occ.cut([(2, tube)], [(2, disk)])
    occ.synchronize()
    names = {"inlet": [], "outlet": [], "tube": [], "sphere": [], "axis": []}
    for _, tag in gmsh.model.getEntities(1):
        x, y, _ = occ.getCenterOfMass(1, tag)
        if x < -p.reach * (1 - 1e-6):
            names["inlet"].append(tag)
        elif x > p.reach * (1 - 1e-6):
            names["outlet"].append(tag)
        elif y > p.tube / 2 * (1 - 1e-6):
            names["tube"].append(tag)
        elif y < 1e-6:
            names["axis"].append(tag)
        else:
            names["sphere"].append(tag)
    for name, tags in names.items():
        gmsh.model.addPhysicalGroup(1, tags, name=name)
