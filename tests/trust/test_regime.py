"""Checks of the regime with their verdicts from constructed situations."""

from dataclasses import replace

import numpy as np
import pytest
from meshes import box_mesh
from solved import CLOSED, PIPE, SHUT, SLIP, SLOT, case_of, flow, renamed, sliding, solved, static, step

from fem_flow.case.resolved import Fluid
from fem_flow.measure.all import measure
from fem_flow.measure.section import stations
from fem_flow.trust import regime

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}


def slot(names=SLOT, kind="planar", ports=None, **case):
    return solved(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), names), kind, ports=ports or PORTS, **case)


def with_(solution, fluid=None, **case):
    """The same fields told of another case: only what the checks read changes."""
    known = solution.case
    return replace(solution, case=replace(known, fluid=replace(known.fluid, **(fluid or {})), **case))


def only(check, solution, numbers=()):
    found = list(check(solution, list(numbers)))
    assert len(found) == 1
    return found[0]


def at(check, solution, name, numbers=()):
    return next(c for c in check(solution, list(numbers)) if c.of == (name,))


def bend(x, y):
    return x, y * (1 + 0.4 * np.sin(np.pi * x / 3) ** 2)


# --- laminar, planar


def reynolds(solution, wanted, name="inlet"):
    st = stations(solution)[name]
    return with_(solution, {"viscosity": solution.case.fluid.density * abs(st.mean_velocity) * st.diameter / wanted})


LAMINAR = {
    "slot": (SLOT, "planar", [(2599, "holds"), (2601, "caution"), (2799, "caution"), (2801, "breaks")], "twice the width"),
    "tube": (PIPE, "axisymmetric", [(1999, "holds"), (2001, "caution"), (2299, "caution"), (2301, "breaks")], "bore"),
}


@pytest.mark.parametrize("form", LAMINAR)
def test_laminar(form):
    names, kind, limits, length = LAMINAR[form]
    solution = slot(names, kind)
    for re, verdict in limits:
        found = at(regime.laminar, reynolds(solution, re), "inlet")
        assert found.verdict == verdict, re
        assert f"on {length} (" in found.says


def test_laminar_in_an_annulus():
    names = {**SLOT, "bottom": ("shaft", "wall"), "top": ("bore", "wall")}
    solution = solved(box_mesh(4, 4, (0.0, 2.0, 1.0, 1.5), names), "axisymmetric", ports=PORTS)
    for re, verdict in [(1999, "holds"), (2100, "caution"), (2400, "breaks")]:
        found = at(regime.laminar, reynolds(solution, re), "outlet")
        assert found.verdict == verdict
    assert "on twice the gap (1e+03 mm)" in found.says


def test_laminar_leaves_closed_ports_out():
    mesh = renamed(box_mesh(6, 6, (0.0, 2.0, 0.0, 3.0), SLOT), "high", "tap", lambda x, y: 0.9 < x < 1.6, "port")
    found = list(regime.laminar(solved(mesh, ports={**PORTS, "tap": CLOSED}), []))
    assert [c.of for c in found] == [("inlet",), ("outlet",)]


@pytest.mark.parametrize(("depth", "verdict"), [(20.0, "holds"), (19.9, "caution"), (5.0, "caution"), (4.9, "breaks")])
def test_planar(depth, verdict):
    assert only(regime.planar, slot(depth=depth)).verdict == verdict


def test_planar_says_what_the_side_walls_add():
    assert only(regime.planar, slot(depth=10.0)).says == (
        "the depth is 10 times the width of inlet: the side walls add about 6.7 % to the drop (20 and more holds,"
        " below 5 breaks)"
    )


def test_planar_takes_the_widest_port():
    found = only(regime.planar, solved(step(2), ports=PORTS, depth=20.0))
    assert (found.of, found.verdict) == (("outlet",), "caution")


def test_planar_is_no_check_of_a_round_part():
    assert not list(regime.planar(slot(PIPE, "axisymmetric"), []))


# --- ports


def test_entrance_length_is_that_of_durst():
    """Pipe: L/D = (0.619^1.6 + (0.0567 Re)^1.6)^(1/1.6) ; slot, on the gap: (0.631^1.6 + (0.0442 Re)^1.6)^(1/1.6).

    By hand at Re 100: (0.4642 + 16.0594)^0.625 and (0.4787 + 10.7814)^0.625.
    """
    pipe = reynolds(slot(PIPE, "axisymmetric"), 100.0, "outlet")
    assert regime.development_length(pipe, stations(pipe)["outlet"]) / 2.0 == pytest.approx(5.7718, rel=1e-4)
    still = reynolds(pipe, 1e-6, "outlet")
    assert regime.development_length(still, stations(still)["outlet"]) / 2.0 == pytest.approx(0.619, rel=1e-6)
    flat = reynolds(slot(), 200.0, "outlet")  # Re 100 on the gap
    assert regime.development_length(flat, stations(flat)["outlet"]) == pytest.approx(4.5416, rel=1e-4)


def test_entrance_length():
    solution = reynolds(slot(legs={"inlet": 0.0, "outlet": 4.0}), 200.0)
    assert at(regime.entrance_length, solution, "inlet").says == "the developed profile is given at this inlet"
    assert at(regime.entrance_length, solution, "outlet").verdict == "caution"
    assert at(regime.entrance_length, with_(solution, legs={"outlet": 5.0}), "outlet").verdict == "holds"
    assert at(regime.entrance_length, with_(solution, legs=None), "outlet").says.startswith(
        "the part declares no straight leg here"
    )


def test_developed_port():
    good, bad = slot(), solved(step(3, 3.0), ports={"inlet": flow(1.0), "outlet": static(0.0)}, viscosity=0.02)
    for name in ("inlet", "outlet"):
        assert at(regime.developed_port, good, name, measure(good)).verdict == "holds"
    found = at(regime.developed_port, bad, "outlet", measure(bad))
    assert found.verdict == "caution"
    assert "1.54 when developed" in found.says


def test_developed_port_knows_a_sliding_wall():
    """Couette flow has a kinetic-energy coefficient of 2, which is developed there."""
    solution = slot(ports={"inlet": static(0.0), "outlet": static(0.0)}, walls={"high": sliding(1.0)})
    found = at(regime.developed_port, solution, "outlet", measure(solution))
    assert (found.verdict, found.says) == ("holds", "kinetic-energy coefficient 2, 2 when developed (within 5 %)")


def test_developed_port_where_a_given_profile_is_disturbed():
    """The bend begins at the inlet: the pressure over it is far from uniform."""
    solution = solved(box_mesh(12, 6, (0.0, 3.0, 0.0, 1.0), SLOT, bend), ports=PORTS, viscosity=0.1, density=3.0)
    assert at(regime.developed_port, solution, "inlet", measure(solution)).verdict == "caution"


def reversing(share):
    """An outlet through which a share of the net flow comes back: -a below y = 0.2, the rest above."""
    solution = slot(inertia=False)
    u = np.zeros_like(solution.state.u)
    y = solution.space.points[:, 1] / solution.space.points[:, 1].max()
    u[0] = np.where(y < 0.5, -share * y * (0.5 - y), (1 + share) * (y - 0.5) * (1 - y))
    return replace(solution, state=replace(solution.state, u=u))


@pytest.mark.parametrize(("share", "verdict"), [(0.0, "holds"), (0.009, "caution"), (0.011, "breaks")])
def test_reverse_flow(share, verdict):
    found = only(regime.reverse_flow, reversing(share))
    assert found.verdict == verdict
    assert found.of == ("outlet",)
    if share:
        assert found.says.startswith(f"{100 * share:.2g} % of the flow comes back")


def test_reverse_flow_in_a_computed_flow():
    """The drawing ends within the eddy behind a step."""
    solution = solved(step(4, 3.0), ports={"inlet": flow(1.0), "outlet": static(0.0)}, viscosity=0.02)
    assert only(regime.reverse_flow, solution).verdict == "breaks"


# --- gas and liquid


def test_mach():
    gas = slot(is_gas=True)
    assert only(regime.mach, gas).says == "the speed of sound is unknown: give sound_speed under [fluid]"
    assert only(regime.mach, with_(gas, {"sound_speed": 3.0 / 0.29})).verdict == "holds"  # the crest is 1.5 V = 3 m/s
    assert only(regime.mach, with_(gas, {"sound_speed": 3.0 / 0.31})).verdict == "breaks"
    assert not list(regime.mach(slot(), []))
    assert only(regime.mach, slot(sound_speed=1500.0)).verdict == "holds"


def test_relative_pressure_drop():
    gas = slot(is_gas=True, viscosity=0.1)  # 7.2 Pa
    found = only(regime.relative_pressure_drop, gas)
    assert (found.verdict, found.says) == ("caution", "the absolute level is unknown: give ambient under [model]")
    assert only(regime.relative_pressure_drop, with_(gas, ambient=150.0)).verdict == "holds"
    assert only(regime.relative_pressure_drop, with_(gas, ambient=100.0)).verdict == "breaks"
    assert only(regime.relative_pressure_drop, with_(gas, ambient=-10.0)).verdict == "breaks"
    assert not list(regime.relative_pressure_drop(slot(), []))


LIQUID = {
    "no ambient": (None, 2e3, 5.0, "caution", "give ambient under [model]"),
    "above both": (1.2e5, 2e3, 5.0, "holds", "vapour pressure 0.02 bar"),
    "air comes out": (0.9e5, 2e3, 5.0, "caution", "below 1 bar dissolved air comes out"),
    "boils": (1e5, 2e3, -0.99e5, "breaks", "the liquid can boil there"),
    "below zero": (1e5, None, -1.01e5, "breaks", "outside the single-phase liquid model"),
    "unknown": (1.2e5, None, 5.0, "caution", "give vapour_pressure under [fluid]"),
}


@pytest.mark.parametrize("situation", LIQUID)
def test_vapour_pressure(situation):
    ambient, vapour, outlet, verdict, words = LIQUID[situation]
    solution = slot(ports={"inlet": flow(2.0), "outlet": static(outlet)}, ambient=ambient, vapour_pressure=vapour)
    found = only(regime.vapour_pressure, solution)
    assert found.verdict == verdict
    assert words in found.says


def test_vapour_pressure_next_to_a_sharp_corner():
    """Fluid that turns round a sharp edge: the lowest pressure lies there and has no limit."""
    solution = solved(
        step(3, 4.0), ports={"inlet": flow(-1.0), "outlet": static(0.0)}, viscosity=0.01, ambient=2e5, vapour_pressure=1e3
    )
    away = with_(solution, ambient=None)
    assert only(regime.vapour_pressure, away).verdict == "caution"
    spoilt = solution.state.p.copy()
    space = solution.space
    corner = np.argmin(np.linalg.norm(space.points[space.corner_nodes] * solution.scales.length - [2.0, 0.0], axis=1))
    spoilt[corner] = -1e9
    found = only(regime.vapour_pressure, replace(solution, state=replace(solution.state, p=spoilt)))
    assert found.verdict == "caution"
    assert "it has no lower limit, for there is a sharp re-entrant corner at x = 2000 mm, y = 0 mm" in found.says


def test_a_gas_has_no_vapour_pressure_and_no_heating():
    gas = slot(is_gas=True, ambient=1e5, heat_capacity=1e3)
    assert not list(regime.vapour_pressure(gas, []))
    assert not list(regime.heating(gas, []))


@pytest.mark.parametrize(("rise", "verdict"), [(0.59, "holds"), (0.61, "caution"), (2.0, "caution"), (2.2, "breaks")])
def test_temperature_rise(rise, verdict):
    solution = slot(viscosity=0.1)  # 7.2 Pa of friction
    assert only(regime.heating, with_(solution, {"heat_capacity": 7.2 / rise})).verdict == verdict


def test_temperature_rise_without_heat_capacity_names_the_key():
    assert only(regime.heating, slot()).says == "the heat capacity is unknown: give heat_capacity under [fluid]"
    cavity = solved(box_mesh(4, 4, names=SHUT), walls={"floor": SLIP})
    assert not list(regime.heating(cavity, []))


def test_gas_is_what_the_fluid_says():
    assert case_of(is_gas=True).fluid == Fluid("as given", 1.0, 1.0, is_gas=True)
    assert not list(regime.relative_pressure_drop(slot(density=1.2), []))
