"""Manifold: a header that feeds several branches in a row, each with its own outlet, and ends dead behind the last one.

Planar: the section in plan, of a depth that the case gives.

             outlet_1        outlet_2        outlet_3
              |    |          |    |          |    |
      branch_1|    |  branch_2|    |  branch_3|    |                 ^
              |    |          |    |          |    |                 | branch_length
      _______/      \\________/      \\________/      \\________        v   (fillet where a branch meets the header)
     |                                                        |      ^
   inlet                      header                          |      | header
     |________________________________________________________|      v

     |<-----><-- pitch -->                          |<------->|
     inlet_leg                                       dead_end

branches            how many branches
header              height of the header
branch_width        width of the first branch;  last_branch_width that of the last, those between change evenly
pitch               distance between the middles of neighbouring branches
fillet              radius where a branch meets the header; 0 is knowingly sharp
branch_length       straight length of each branch behind the fillet
inlet_leg           straight header ahead of the first fillet
dead_end            header beyond the last branch; 0 ends it flush with that branch

Walls: header (with its dead end), branch_1, branch_2, ... (both sides, with their fillets).
"""

from fem_flow import GeometryError, Parameter
from fem_flow.part.contour import Edge, draw_contour

kind = "planar"
unit = "mm"
parameters = {
    "branches": Parameter(4, low=1, high=24, says="how many branches"),
    "header": Parameter("10 mm", low="0.02 mm", high="500 mm", says="height of the header"),
    "branch_width": Parameter("4 mm", low="0.01 mm", high="200 mm", says="width of the first branch"),
    "last_branch_width": Parameter("4 mm", low="0.01 mm", high="200 mm", says="width of the last branch"),
    "pitch": Parameter("14 mm", low="0.02 mm", high="1000 mm", says="distance between the middles of branches"),
    "fillet": Parameter("1 mm", low="0 mm", high="50 mm", says="radius where a branch meets the header; 0 is sharp"),
    "branch_length": Parameter("24 mm", low="0.01 mm", high="20000 mm", says="straight length of each branch"),
    "inlet_leg": Parameter("20 mm", low="0.01 mm", high="20000 mm", says="straight header ahead of the first branch"),
    "dead_end": Parameter("6 mm", low="0 mm", high="1000 mm", says="header beyond the last branch"),
}


def ports(p):
    return ["inlet", *(f"outlet_{k + 1}" for k in range(p.branches))]


def legs(p):
    return {"inlet": p.inlet_leg, **{f"outlet_{k + 1}": p.branch_length for k in range(p.branches)}}


def widths(p):
    """Width of each branch."""
    if p.branches == 1:
        return [p.branch_width]
    step = (p.last_branch_width - p.branch_width) / (p.branches - 1)
    return [p.branch_width + k * step for k in range(p.branches)]


def check(p, width):
    """Refuse dimensions that contradict each other, naming them."""
    for k in range(p.branches - 1):
        needed = (width[k] + width[k + 1]) / 2 + 2 * p.fillet
        if needed >= p.pitch:
            raise GeometryError(
                f"branches {k + 1} and {k + 2} overlap: their half widths and fillets take {needed:.4g} mm of the pitch of"
                f" {p.pitch:g} mm; raise pitch, or lower branch_width, last_branch_width or fillet",
                reason="branches_overlap",
                details={"parameters": ["pitch", "branch_width", "last_branch_width", "fillet"]},
            )
    if 0 < p.dead_end <= p.fillet:
        raise GeometryError(
            f"dead_end ({p.dead_end:g} mm) leaves no room for the fillet ({p.fillet:g} mm) of the last branch; raise dead_end"
            " above it, lower fillet, or give dead_end = 0 mm to end the header flush with the branch",
            reason="dimensions_cross",
            details={"parameters": ["dead_end", "fillet"]},
        )


def draw(p):
    width = widths(p)
    check(p, width)
    top = p.header + p.fillet + p.branch_length
    first = p.inlet_leg + p.fillet + width[0] / 2
    end = first + (p.branches - 1) * p.pitch + width[-1] / 2 + p.dead_end
    edges = [Edge(0, 0, "header"), Edge(end, 0, "header")]
    for k in reversed(range(p.branches)):
        left, right = first + k * p.pitch - width[k] / 2, first + k * p.pitch + width[k] / 2
        branch = f"branch_{k + 1}"
        if k == p.branches - 1 and p.dead_end > 0:
            edges.append(Edge(end, p.header, "header"))
        if k == p.branches - 1 and p.dead_end == 0:
            edges.append(Edge(right, p.header, branch))
        else:
            edges.append(Edge(right, p.header, branch, p.fillet, branch))
        edges += [Edge(right, top, f"outlet_{k + 1}"), Edge(left, top, branch)]
        edges.append(Edge(left, p.header, "header", p.fillet, branch))
    edges.append(Edge(0, p.header, "inlet"))
    draw_contour(edges, unit)


if __name__ == "__main__":
    from fem_flow import alone

    alone(globals())
