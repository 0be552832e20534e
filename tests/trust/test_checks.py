"""The names of all checks, and what a verdict touches."""

import pytest
from meshes import box_mesh
from solved import SLOT, flow, solved, static

from fem_flow.measure.number import Check, number
from fem_flow.trust.checks import checks, judged

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}


NAMES = {
    "converged",
    "mass_balance",
    "momentum_balance",
    "energy_balance",
    "resolution",
    "laminar",
    "planar",
    "entrance_length",
    "developed_port",
    "reverse_flow",
    "mach",
    "relative_pressure_drop",
    "vapour_pressure",
    "temperature_rise",
}


def slot(names=SLOT, kind="planar", ports=None, **case):
    return solved(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), names), kind, ports=ports or PORTS, **case)


def test_the_names_of_the_checks():
    found = checks(slot(is_gas=True, sound_speed=340.0, ambient=1e5), []) + checks(slot(ambient=1e5, heat_capacity=1e3), [])
    assert {c.check for c in found} == NAMES
    assert {c.verdict for c in found} <= {"holds", "caution", "breaks"}
    assert all(c.source for c in found)
    assert not [c.says for c in found if c.says.endswith(".")]


FIGURES = [
    number("total_pressure_drop", ("inlet", "outlet"), 1.0),
    number("flow_rate", ("side",), 1.0),
    number("area", ("inlet",), 1.0),
    number("hydraulic_diameter", ("inlet",), 1.0),
    number("narrowest_gap", (), 1.0),
    number("force_x", ("poppet",), 1.0),
    number("excess_pressure_drop", ("inlet", "outlet"), 1.0),
    number("pressure_min", (), 1.0),
]
FLOW = {"total_pressure_drop", "flow_rate", "force_x", "excess_pressure_drop", "pressure_min"}


def touched(check, verdict, of=()):
    found = judged(FIGURES, [Check(check, of, verdict, "…", "…")])
    return {n.name for n in found if n.verdict == verdict}


@pytest.mark.parametrize("check", sorted(NAMES))
def test_a_check_that_breaks_touches_every_figure_of_the_flow_and_no_geometry(check):
    assert touched(check, "breaks", ("outlet",)) == FLOW


@pytest.mark.parametrize("check", ["resolution", "energy_balance", "momentum_balance"])
def test_a_caution_of_the_computation_is_carried_by_the_figures(check):
    assert touched(check, "caution") == FLOW


def test_a_caution_at_a_port():
    assert touched("laminar", "caution", ("outlet",)) == FLOW
    assert touched("reverse_flow", "caution", ("outlet",)) == {"total_pressure_drop", "excess_pressure_drop"}
    assert touched("entrance_length", "caution", ("outlet",)) == {"excess_pressure_drop"}
    assert touched("developed_port", "caution", ("side",)) == set()


@pytest.mark.parametrize("check", ["mach", "vapour_pressure", "temperature_rise", "relative_pressure_drop"])
def test_other_cautions_are_listed_only(check):
    assert touched(check, "caution") == set()


def test_the_worst_verdict_wins():
    found = judged(
        FIGURES[:1],
        [
            Check("resolution", (), "caution", "…", "…"),
            Check("laminar", ("x",), "breaks", "…", "…"),
            Check("planar", (), "holds", "…", "…"),
        ],
    )
    assert found[0].verdict == "breaks"
