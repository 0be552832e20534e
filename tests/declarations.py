"""Hand-made declarations of parts, for tests that need no drawing."""

from fem_flow.case.declaration import Declaration, Parameter

POPPET = Declaration(
    name="poppet_valve",
    path="geometries/poppet_valve.py",
    says="Poppet valve with a conical seat.",
    sketch="",
    unit="mm",
    kind="axisymmetric",
    parameters={
        "bore": Parameter("12 mm", low="2 mm", high="60 mm", says="diameter of the inlet bore"),
        "lift": Parameter("1 mm", low="0.05 mm", high="10 mm", says="axial opening of the poppet"),
        "seat_angle": Parameter("45 deg", low="20 deg", high="80 deg", says="half angle of the seat"),
        "stem": Parameter("plain", choices=("plain", "necked"), says="form of the stem"),
        "guides": Parameter(0, low=0, high=4, says="number of guide rings"),
        "ratio": Parameter(1.5, low=1.0, says="chamber over bore"),
        "vented": Parameter(False, says="whether the stem has a vent"),
    },
    sections=("throat",),
    ports=("inlet", "outlet"),
    legs={"inlet": 36.0},
)
POPPET_WALLS = ("poppet", "seat", "housing")

MANIFOLD = Declaration(
    name="manifold",
    path="geometries/manifold.py",
    says="Header with branches.",
    sketch="",
    unit="mm",
    kind="planar",
    parameters={"header": Parameter("10 mm", low="1 mm", high="100 mm"), "pad": Parameter("20 mm^2")},
    ports=("inlet", "outlet_1", "outlet_2"),
)
MANIFOLD_WALLS = ("header_wall", "branch_wall")

CAVITY = Declaration(
    name="cavity", path="cavity.py", says="Box with a lid.", sketch="", unit="mm", kind="planar",
    parameters={"side": Parameter("10 mm", low="1 mm")}, ports=(),
)  # fmt: skip
CAVITY_WALLS = ("lid", "sides")

PARTS = {"poppet_valve": (POPPET, POPPET_WALLS), "manifold": (MANIFOLD, MANIFOLD_WALLS), "cavity": (CAVITY, CAVITY_WALLS)}
