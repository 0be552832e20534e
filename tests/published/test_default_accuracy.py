"""What a run without [accuracy] and [mesh] promises, against much finer meshes, for every shipped part.

The default aims at 1 % of total pressure drops and forces; a figure smaller than a tenth of the largest of its quantity is held
to 1 % of that tenth (the rule of the case file). And a bar must be a bar: the true error lies inside it.
"""

from dataclasses import dataclass

import numpy as np
import pytest

import fem_flow as ff
from fem_flow.case.check import parameter_values, resolve, script_reference
from fem_flow.flow.problem import solve
from fem_flow.measure.all import measure
from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script, shipped
from fem_flow.trust.bars import is_round_off, size_of

AIMED_AT = ("total_pressure_drop", "force_x", "force_y")
TARGET = 0.01
MOST_UNKNOWNS = 170_000
"""The finer mesh is a quarter of the size where it stays below this, else half."""

OIL = {"name": "ISO VG 46", "temperature": "40 degC"}
COLD = {"name": "ISO VG 46", "temperature": "10 degC"}
WATER = {"name": "water", "temperature": "20 degC"}


def through(flow: str) -> dict:
    return {"inlet": {"flow_in": flow}, "outlet": {"static_pressure": "0 bar"}}


def branching(flow: str, branches: int = 4) -> dict:
    return {"inlet": {"flow_in": flow}} | {f"outlet_{k + 1}": {"static_pressure": "0 bar"} for k in range(branches)}


DEEP = {"depth": "100 mm"}
ROUND = {"script": "sudden_expansion", "shape": "round"}
POPPET, MANIFOLD = {"script": "poppet_valve"}, {"script": "manifold"}
CREEPING = {"inertia": False}
PRESSURES = {"inlet": {"total_pressure": "0.1 bar"}, "outlet": {"static_pressure": "0 bar"}}
NARROW = {"small_bore": "2 mm", "large_bore": "6 mm", "inlet_leg": "6 mm", "outlet_leg": "60 mm"}
FLUSH = {"header": "6 mm", "dead_end": "0 mm"}
CASES = {
    "poppet, cold": (POPPET, COLD, through("12 L/min"), {}),
    "poppet, warm": (POPPET | {"outlet_leg": "100 mm"}, OIL, through("4 L/min"), {}),
    "poppet, small lift": (POPPET | {"lift": "0.3 mm"}, OIL, through("2 L/min"), {}),
    "poppet, flat": (POPPET | {"seat_angle": "90 deg", "lift": "1 mm"}, OIL, through("3 L/min"), {}),
    "poppet, sharp, creeping": (POPPET | {"edge_radius": "0 mm"}, OIL, through("6 L/min"), CREEPING),
    "poppet, given pressures": (POPPET, OIL, PRESSURES, {}),
    "expansion, planar": ({"script": "sudden_expansion"}, OIL, through("20 L/min"), {"depth": "200 mm"}),
    "expansion, creeping": ({"script": "sudden_expansion"}, OIL, through("20 L/min"), {"depth": "200 mm"} | CREEPING),
    "expansion, round": (ROUND, OIL, through("5 L/min"), {}),
    "expansion, rounded": (ROUND | {"edge_radius": "0.5 mm"}, OIL, through("4 L/min"), {}),
    "contraction": (ROUND, OIL, {"inlet": {"static_pressure": "0 bar"}, "outlet": {"flow_in": "5 L/min"}}, {}),
    "expansion 1:3, water": (ROUND | NARROW, WATER, through("10 mL/min"), {}),
    "manifold": (MANIFOLD, OIL, branching("10 L/min"), DEEP),
    "manifold, creeping, flush end": (MANIFOLD | FLUSH, OIL, branching("10 L/min"), DEEP | CREEPING),
    "manifold, sharp": (MANIFOLD | {"fillet": "0 mm"}, COLD, branching("10 L/min"), DEEP),
    "manifold, six": (MANIFOLD | {"branches": 6, "last_branch_width": "3 mm"}, OIL, branching("20 L/min", 6), DEEP),
}
QUICK = ["poppet, cold", "expansion, creeping", "manifold, creeping, flush end"]


@dataclass(frozen=True)
class Compared:
    """A figure of the default run, the same on the finer mesh, and what 1 % of it is counted from."""

    figure: ff.Number
    fine: float
    size: float

    @property
    def error(self) -> float:
        return abs(self.figure.value - self.fine)


def compared(case: ff.Case) -> list[Compared]:
    """Drops and forces of a default run that are not zero by symmetry or by round-off."""
    result = ff.run(case)
    factor = 0.25 if 16 * result.mesh.unknowns <= MOST_UNKNOWNS else 0.5
    with Drawing(find_script(script_reference(case), case.folder)) as drawing:
        values = parameter_values(case, drawing.declare())
        resolved = resolve(case, drawing.declare(values), drawing.draw(values).names("wall"))
        fine = solve(drawing.mesh(scale=factor * 0.5 ** (result.levels - 2)), resolved, result.solution)
    assert fine.unknowns > 3 * result.mesh.unknowns
    found = {(n.name, n.of): n.value for n in measure(fine)}
    listed = list(result.listed)
    aimed = [n for n in listed if n.name in AIMED_AT and not n.withheld and not is_round_off(n, listed)]
    return [Compared(n, found[n.name, n.of], size_of(n, listed)) for n in aimed]


def test_every_shipped_part_is_covered_several_times():
    scripts = [part["script"] for part, *_ in CASES.values()]
    assert set(scripts) == set(shipped())
    assert min(scripts.count(name) for name in shipped()) >= 4


@pytest.mark.parametrize("name", [n if n in QUICK else pytest.param(n, marks=pytest.mark.slow) for n in CASES])
def test_default_keeps_one_per_cent_and_its_own_bars(name):
    part, fluid, ports, model = CASES[name]
    rows = compared(ff.Case(part=part, fluid=fluid, ports=ports, model=model))
    assert {row.figure.name for row in rows} >= {"total_pressure_drop", "force_x"}
    for row in rows:
        assert np.isfinite(row.fine)
        assert row.figure.error_bar <= TARGET * row.size, row
        assert row.error <= TARGET * row.size, row
    outside = [(r.figure.name, r.figure.of, r.error, r.figure.error_bar) for r in rows if r.error > r.figure.error_bar]
    assert outside == []
