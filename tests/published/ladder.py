"""Ladder of slots: a feed header below, a collecting header above, and branches between them.

All lengths as in the reference file: branch_length lies between the middles of the headers, pitch between the middles of
branches; closed ends reach one header beyond the last branch, the end runs are 2 headers long. The sections branch_1, branch_2,
... lie halfway.
"""

from fem_flow import Parameter

kind = "planar"
unit = "mm"
parameters = {
    "arrangement": Parameter("Z", choices=["Z", "U"], says="outlet at the far end (Z) or above the inlet (U)"),
    "branches": Parameter(5, low=2, high=12, says="how many branches"),
    "header": Parameter("1 mm", low="0.1 mm", high="10 mm", says="gap of both headers"),
    "branch": Parameter("0.25 mm", low="0.01 mm", high="10 mm", says="gap of the branches"),
    "pitch": Parameter("3 mm", low="0.1 mm", high="100 mm", says="between the middles of branches"),
    "branch_length": Parameter("12 mm", low="1 mm", high="1000 mm", says="between the middles of the headers"),
}
ports = ["inlet", "outlet"]


def draw(p):
    import gmsh

    occ, h, n = gmsh.model.occ, p.header, p.branches
    last = (n - 1) * p.pitch
    low, high = -2 * h, last + 2 * h
    feed = occ.addRectangle(low, 0, 0, last + h - low, h)
    first, end = (-h, high) if p.arrangement == "Z" else (low, last + h)
    collect = occ.addRectangle(first, p.branch_length, 0, end - first, h)
    gap = p.branch_length - h
    branches = [(2, occ.addRectangle(k * p.pitch - p.branch / 2, h, 0, p.branch, gap)) for k in range(n)]
    whole, _ = occ.fuse([(2, feed)], [(2, collect), *branches])
    middle = h + gap / 2
    lines = []
    for k in range(n):
        a = occ.addPoint(k * p.pitch - p.branch / 2, middle, 0)
        b = occ.addPoint(k * p.pitch + p.branch / 2, middle, 0)
        lines.append((1, occ.addLine(a, b)))
    occ.fragment(whole, lines)
    occ.synchronize()
    groups = {"inlet": [], "outlet": [], "walls": [], **{f"branch_{k + 1}": [] for k in range(n)}}
    for _, tag in gmsh.model.getEntities(1):
        x, y, _ = occ.getCenterOfMass(1, tag)
        inside = len(gmsh.model.getAdjacencies(1, tag)[0]) == 2
        if inside:
            groups[f"branch_{round(x / p.pitch) + 1}"].append(tag)
        elif y < h and abs(x - low) < 1e-6:
            groups["inlet"].append(tag)
        elif y > p.branch_length and abs(x - (high if p.arrangement == "Z" else low)) < 1e-6:
            groups["outlet"].append(tag)
        else:
            groups["walls"].append(tag)
    for name, tags in groups.items():
        gmsh.model.addPhysicalGroup(1, tags, name=name)
