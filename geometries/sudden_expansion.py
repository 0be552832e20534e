"""Sudden expansion: a narrow bore or slot that opens into a wider one in a sharp step.

                                          ______________________________________
      _______ small_bore ________________|                                      |
     |                                   : <- step (sharp, or with edge_radius)  |
  inlet                                throat                                 outlet
     |___________________________________:                                      |
                                         |________ large_bore __________________|

     |<----------- inlet_leg ----------->|<------------ outlet_leg ------------>|

shape = "round"  : axisymmetric; small_bore and large_bore are diameters, the axis is the line y = 0.
shape = "planar" : small_bore and large_bore are the heights of two slots, the line y = 0 is their middle. The whole section
                   is modelled, for the jet may lean to one side; half = true models the upper half with a symmetry line.
The flow may go either way: with flow out of the inlet the part is a sudden contraction.
"""

from fem_flow import GeometryError, Parameter
from fem_flow.part.contour import Edge, draw_contour

unit = "mm"
parameters = {
    "shape": Parameter("planar", choices=["planar", "round"], says="slots of a given depth, or round bores on one axis"),
    "small_bore": Parameter("10 mm", low="0.01 mm", high="200 mm", says="height or diameter of the narrow leg"),
    "large_bore": Parameter("20 mm", low="0.01 mm", high="1000 mm", says="height or diameter of the wide leg"),
    "inlet_leg": Parameter("20 mm", low="0.01 mm", high="20000 mm", says="straight length of the narrow leg"),
    "outlet_leg": Parameter("120 mm", low="0.01 mm", high="20000 mm", says="straight length of the wide leg"),
    "edge_radius": Parameter("0 mm", low="0 mm", high="50 mm", says="rounding of the edge of the step; 0 is knowingly sharp"),
    "half": Parameter(False, says="planar only: model the upper half, with a symmetry line"),
}
ports = ["inlet", "outlet"]
sections = ["throat"]


def kind(p):
    return "axisymmetric" if p.shape == "round" else "planar"


def legs(p):
    return {"inlet": p.inlet_leg - p.edge_radius, "outlet": p.outlet_leg}


def draw(p):
    step = (p.large_bore - p.small_bore) / 2
    if step <= 0:
        raise GeometryError(
            f"large_bore ({p.large_bore:g} mm) must be larger than small_bore ({p.small_bore:g} mm); raise large_bore or lower"
            " small_bore",
            reason="dimensions_cross",
            details={"parameters": ["large_bore", "small_bore"]},
        )
    if p.edge_radius >= min(step, p.inlet_leg):
        raise GeometryError(
            f"edge_radius ({p.edge_radius:g} mm) must be smaller than the step ({step:g} mm) and than inlet_leg"
            f" ({p.inlet_leg:g} mm); make it smaller",
            reason="radius_too_large",
            details={"parameters": ["edge_radius"]},
        )
    if p.shape == "round" and p.half:
        raise GeometryError(
            'half = true is for shape = "planar" only; a round part is modelled by its half section anyway: leave half out',
            reason="dimensions_cross",
            details={"parameters": ["half", "shape"]},
        )
    a, b, x, r = p.small_bore / 2, p.large_bore / 2, p.inlet_leg, p.edge_radius
    end = x + p.outlet_leg
    upper = [
        Edge(end, b, "large_bore"),
        Edge(x, b, "step"),
        Edge(x, a, "small_bore", r, "step"),
        Edge(0, a, "inlet"),
    ]
    if p.shape == "round" or p.half:
        centre = "axis" if p.shape == "round" else "symmetry"
        edges = [Edge(0, 0, centre), Edge(end, 0, "outlet"), *upper]
        throat = ((x - r, 0), (x - r, a))
    else:
        lower = [Edge(0, -a, "small_bore"), Edge(x, -a, "step", r, "step"), Edge(x, -b, "large_bore"), Edge(end, -b, "outlet")]
        edges = [*lower, *upper]
        throat = ((x - r, -a), (x - r, a))
    draw_contour(edges, unit, {"throat": throat})


if __name__ == "__main__":
    from fem_flow import alone

    alone(globals())
