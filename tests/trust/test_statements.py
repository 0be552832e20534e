"""The sentences beside the numbers: wording, order, and which apply when."""

from dataclasses import replace

import pytest
from meshes import box_mesh
from solved import PIPE, SHUT, SLOT, flow, renamed, sliding, solved, static

from fem_flow.measure.all import measure
from fem_flow.measure.number import Check
from fem_flow.trust.statements import scope, statements

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}
CAPACITY = (
    "Capacity and pressure safety of such equipment are established by the applicable code and certified tests, not by this"
    " computation."
)
PATIENT = (
    "Values are for comparing design variants. Safety and performance need bench and biological testing under the applicable"
    " standards, within a documented risk-management process."
)
FORBIDDEN = ("safe ", "compliant", "certified by", "approved", "non-haemolytic", "leak-tight ", "rated")


def slot(**case):
    return solved(box_mesh(4, 2, (0.0, 3.0, 0.0, 1.0), SLOT), ports=case.pop("ports", PORTS), **case)


@pytest.fixture(scope="module")
def plain():
    return slot()


def said(solution, checks=(), **case):
    solution = replace(solution, case=replace(solution.case, **case)) if case else solution
    return statements(solution, measure(solution), list(checks))


def test_the_scope_comes_first(plain):
    assert said(plain)[0] == (
        "Steady laminar single-phase 2-D (planar) computation on nominal geometry. Not a strength, fatigue, leak-tightness,"
        " cavitation, biocompatibility or compliance assessment. Numerical error bars exclude model and input uncertainty"
        " unless stated."
    )
    assert "2-D (axisymmetric)" in scope("axisymmetric")


def test_what_breaks_comes_next_each_check_once(plain):
    found = [
        Check("laminar", ("inlet",), "breaks", "Re = 3000", "x"),
        Check("planar", ("inlet",), "caution", "shallow", "x"),
        Check("laminar", ("throat",), "breaks", "Re = 9000", "x"),
        Check("resolution", (), "breaks", "coarse", "x"),
    ]
    assert said(plain, found)[1:3] == [
        "NOT FOR USE as a design value: inlet: Re = 3000 (likewise: throat).", "NOT FOR USE as a design value: coarse.",
    ]  # fmt: skip


@pytest.mark.parametrize(
    "title", ["Relief valve", "safety valves of a boiler", "pressure vessel inlet", "Cover, PS 10 bar", "rupture disc"]
)
def test_words_of_pressure_safety(plain, title):
    assert CAPACITY in said(plain, title=title)


@pytest.mark.parametrize("title", ["poppet valve", "100 ps pulse", "relieved edge", "blood vessel", "unsafety"])
def test_words_that_only_look_so(plain, title):
    assert CAPACITY not in said(plain, title=title)


def test_words_are_looked_for_in_the_part_the_ports_and_the_walls_too(plain):
    assert CAPACITY in said(plain, filled={"part": {"script": "/some/where/relief_valve.py"}})
    assert CAPACITY not in said(plain, filled={"part": {"script": "/relief/drawings/poppet.py"}})
    mesh = renamed(box_mesh(4, 2, (0.0, 3.0, 0.0, 1.0), SLOT), "low", "safety_valve", lambda x, y: True)
    assert CAPACITY in said(solved(mesh, ports=PORTS))


@pytest.mark.parametrize("title", ["Blood pump", "infusion restrictor", "patients", "drug mixer", "dialysis"])
def test_words_of_medicine(plain, title):
    assert PATIENT in said(plain, title=title)


def test_a_fluid_by_name_sets_them_too(plain):
    assert PATIENT in said(plain, fluid=replace(plain.case.fluid, name="blood analogue"))
    assert PATIENT not in said(plain)


def test_oxygen_and_leakage(plain):
    assert any("ASTM G88" in s for s in said(plain, title="oxygen regulator"))
    assert not any("ASTM G88" in s for s in said(plain, title="oxygenator"))
    assert any("2.5 times as much" in s for s in said(plain, title="spool leakage"))


def test_flow_pressures_are_not_design_pressures_from_half_a_bar():
    sentence = "Flow pressures are not design pressures; strength, fatigue and proof test are not covered."
    assert sentence in said(slot(ports={"inlet": flow(2.0), "outlet": static(0.6e5)}))
    assert sentence not in said(slot(ports={"inlet": flow(2.0), "outlet": static(0.4e5)}))


def test_forces_and_flow_coefficients(plain):
    assert any(s.startswith("Forces are those of steady flow on nominal walls") for s in said(plain))
    assert any(s.startswith("Flow coefficients hold at this Reynolds number only") for s in said(plain))
    cavity = solved(box_mesh(4, 4, names=SHUT), walls={n: sliding(1.0) for n in ("lid", "left", "right", "floor")})
    assert not any(s.startswith(("Forces", "Flow coefficients")) for s in said(cavity))


def test_a_split_is_to_be_run_cold_and_hot(plain):
    mesh = renamed(box_mesh(6, 6, (0.0, 2.0, 0.0, 3.0), SLOT), "outlet", "upper", lambda x, y: y > 2, "port")
    mesh = renamed(mesh, "outlet", "middle", lambda x, y: 1 < y < 2)
    split = solved(mesh, ports={**PORTS, "upper": static(5.0)})
    assert any("run it cold and hot" in s for s in said(split))
    assert not any("run it cold and hot" in s for s in said(plain))


def test_the_lowest_pressure_is_a_flag_where_its_check_does_not_hold(plain):
    check = Check("vapour_pressure", (), "caution", "…", "…")
    assert any(s.startswith("The lowest pressure is a flag") for s in said(plain, [check], ambient=1e5))
    assert not any(
        s.startswith("The lowest pressure is a flag") for s in said(plain, [replace(check, verdict="holds")], ambient=1e5)
    )
    assert not any(s.startswith("The lowest pressure is a flag") for s in said(plain, [check]))  # the check names the key


def test_a_free_level_is_said():
    cavity = solved(box_mesh(4, 4, names=SHUT), walls={"lid": sliding(1.0)})
    assert "No port gives a pressure level: pressures are counted from their mean over the fluid." in said(cavity)


def test_creeping_flow_tells_its_reynolds_number():
    found = said(slot(inertia=False, viscosity=0.5))
    assert found[-1] == (
        "Creeping flow: inertia is left out, and with it the kinetic part of every total pressure; the largest Reynolds"
        " number is 8, and inertia matters from about 1 on."
    )


def test_a_handful_and_no_forbidden_word(plain):
    """An oil case with everything that applies by content; none of the words that no report may use."""
    pipe = solved(
        box_mesh(4, 2, (0.0, 3.0, 0.0, 1.0), PIPE),
        "axisymmetric",
        ports={"inlet": flow(2.0), "outlet": static(1e5)},
        ambient=1e5,
        title="Poppet check valve",
    )
    found = said(pipe, [Check("vapour_pressure", (), "caution", "…", "…")])
    assert len(found) <= 6
    assert len(set(found)) == len(found)
    assert not [s for s in found if any(word in s.lower() for word in FORBIDDEN)]
