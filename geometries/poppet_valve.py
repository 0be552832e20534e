"""Poppet valve: a poppet that lifts off a conical or flat seat, in a chamber with an annular outlet around the stem.

The upper half of the section; x is the axis, the flow goes to the right, and the poppet opens to the right.

                          __________ chamber _________
                         |            ______          |
              shoulder > |          /  rim   |        |_____ outlet_bore _______
                        /  seat    /         |                                  |
      ____ bore _______/  throat  /  poppet  |                               outlet
     |                           |           |____________ stem ________________|
  inlet                  nose >  |
     |___________ axis __________|

     |<--- inlet_leg --->|                            |<----- outlet_leg ------>|

bore              diameter of the inlet bore
lift              axial opening: 0 is the poppet sitting on its seat
seat_angle        angle between the seat and the axis (half the cone's included angle); 90 deg is a flat seat and a flat poppet
seat_width        width of the seat, measured along the radius
poppet_diameter   diameter of the poppet at its rim; larger than the bore
nose              diameter of the flat end of the poppet's cone; 0 is a pointed cone (a flat poppet has none)
rim               length of the cylindrical rim
stem              diameter of the stem that leaves through the outlet
edge_radius       rounding of all edges of metal that the oil flows around; 0 is knowingly sharp
chamber_diameter  bore of the chamber;  chamber_length from the inner edge of the seat to the end of the chamber
outlet_diameter   outer diameter of the outlet annulus, at most that of the chamber
inlet_leg         straight bore ahead of the seat and of the closed poppet's nose;  outlet_leg straight annulus at the outlet

Walls: bore, seat (with its rounded edges), poppet (nose, cone, rim and back), stem, chamber, outlet_bore. The section throat is
the shortest line across the seat gap.
"""

from math import pi, tan

from fem_flow import GeometryError, Parameter
from fem_flow.part.contour import Edge, draw_contour

kind = "axisymmetric"
unit = "mm"
parameters = {
    "bore": Parameter("12 mm", low="1 mm", high="100 mm", says="diameter of the inlet bore"),
    "lift": Parameter("1.2 mm", low="0 mm", high="30 mm", says="axial opening of the poppet; 0 is closed"),
    "seat_angle": Parameter("45 deg", low="20 deg", high="90 deg", says="angle between seat and axis; 90 deg is flat"),
    "seat_width": Parameter("2 mm", low="0.05 mm", high="30 mm", says="radial width of the seat"),
    "poppet_diameter": Parameter("15 mm", low="1 mm", high="150 mm", says="diameter of the poppet at its rim"),
    "nose": Parameter("5 mm", low="0 mm", high="100 mm", says="diameter of the flat end of the cone"),
    "rim": Parameter("2 mm", low="0.1 mm", high="50 mm", says="length of the poppet's cylindrical rim"),
    "stem": Parameter("6 mm", low="0.5 mm", high="100 mm", says="diameter of the stem"),
    "edge_radius": Parameter("0.2 mm", low="0 mm", high="5 mm", says="rounding of the edges; 0 is knowingly sharp"),
    "chamber_diameter": Parameter("26 mm", low="2 mm", high="300 mm", says="bore of the chamber"),
    "chamber_length": Parameter("12 mm", low="1 mm", high="300 mm", says="from the seat's inner edge to the chamber's end"),
    "outlet_diameter": Parameter("20 mm", low="1 mm", high="300 mm", says="outer diameter of the outlet annulus"),
    "inlet_leg": Parameter("24 mm", low="0.5 mm", high="2000 mm", says="straight bore ahead of seat and nose"),
    "outlet_leg": Parameter("28 mm", low="0.5 mm", high="2000 mm", says="straight annulus at the outlet"),
}
ports = ["inlet", "outlet"]
sections = ["throat"]


def legs(p):
    return {"inlet": p.inlet_leg, "outlet": p.outlet_leg}


def larger(p, big, small):
    """Refuse where one diameter must be larger than another and is not."""
    if getattr(p, big) <= getattr(p, small):
        raise GeometryError(
            f"{big} ({getattr(p, big):g} mm) must be larger than {small} ({getattr(p, small):g} mm); raise {big} or lower"
            f" {small}",
            reason="dimensions_cross",
            details={"parameters": [big, small]},
        )


def check(p, poppet_end):
    """Refuse dimensions that contradict each other, naming them."""
    if p.lift <= 0:
        raise GeometryError(
            "the valve is closed (lift = 0 mm) and nothing can flow; give a lift above 0",
            reason="zero_gap",
            details={"parameters": ["lift"]},
        )
    larger(p, "poppet_diameter", "bore")
    larger(p, "poppet_diameter", "stem")
    larger(p, "chamber_diameter", "poppet_diameter")
    larger(p, "outlet_diameter", "stem")
    if p.seat_angle < pi / 2:
        larger(p, "bore", "nose")
    if p.outlet_diameter > p.chamber_diameter:
        raise GeometryError(
            f"outlet_diameter ({p.outlet_diameter:g} mm) must not exceed chamber_diameter ({p.chamber_diameter:g} mm); lower"
            " outlet_diameter or raise chamber_diameter",
            reason="dimensions_cross",
            details={"parameters": ["outlet_diameter", "chamber_diameter"]},
        )
    if p.bore + 2 * p.seat_width >= p.chamber_diameter:
        raise GeometryError(
            f"the seat (bore + 2 seat_width = {p.bore + 2 * p.seat_width:g} mm) must be smaller than chamber_diameter"
            f" ({p.chamber_diameter:g} mm); lower seat_width or raise chamber_diameter",
            reason="dimensions_cross",
            details={"parameters": ["bore", "seat_width", "chamber_diameter"]},
        )
    if poppet_end >= p.chamber_length:
        raise GeometryError(
            f"at this lift the back of the poppet lies {poppet_end:.4g} mm behind the seat edge, beyond chamber_length"
            f" ({p.chamber_length:g} mm); raise chamber_length, or lower lift or rim",
            reason="dimensions_cross",
            details={"parameters": ["chamber_length", "lift", "rim"]},
        )


def draw(p):
    flat = p.seat_angle > pi / 2 - 1e-6
    rise = 0.0 if flat else 1 / tan(p.seat_angle)
    bore, seat, rim, stem = p.bore / 2, p.bore / 2 + p.seat_width, p.poppet_diameter / 2, p.stem / 2
    nose = 0.0 if flat else p.nose / 2
    chamber, outlet, r = p.chamber_diameter / 2, p.outlet_diameter / 2, p.edge_radius
    poppet_end = p.lift + (rim - bore) * rise + p.rim
    check(p, poppet_end)
    x0 = p.inlet_leg + max((bore - nose) * rise, r * tan(p.seat_angle / 2))  # the inner edge of the seat

    def cone(y, shift=0.0):
        return x0 + shift + (y - bore) * rise

    x_nose, x_back = cone(nose, p.lift), x0 + poppet_end
    x_end = x0 + p.chamber_length
    x_out = x_end + p.outlet_leg + (r if outlet < chamber else 0.0)
    edges = [
        Edge(0, 0, "axis"),
        Edge(x_nose, 0, "poppet"),
        Edge(x_nose, nose, "poppet", r if nose > 0 else 0.0),
        Edge(cone(rim, p.lift), rim, "poppet", r),
        Edge(x_back, rim, "poppet", r),
        Edge(x_back, stem, "stem"),
        Edge(x_out, stem, "outlet"),
        Edge(x_out, outlet, "outlet_bore"),
        Edge(x_end, outlet, "chamber", r),
        Edge(x_end, chamber, "chamber"),
        Edge(cone(seat), chamber, "chamber"),
        Edge(cone(seat), seat, "seat", r),
        Edge(x0, bore, "bore", r, "seat"),
        Edge(0, bore, "inlet"),
    ]
    draw_contour(edges, unit, {"throat": ("seat", "poppet")})


if __name__ == "__main__":
    from fem_flow import alone

    alone(globals())
