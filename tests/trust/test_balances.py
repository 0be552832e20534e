"""Checks of the computation: convergence, balances against the error bars, resolution."""

import math
from dataclasses import replace

import numpy as np
import pytest
from meshes import box_mesh
from solved import SHUT, SLOT, flow, sliding, solved, static

from fem_flow.measure.all import measure
from fem_flow.measure.number import number
from fem_flow.measure.section import stations
from fem_flow.trust import balances
from fem_flow.trust.bars import with_bars

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}


def slot(names=SLOT, kind="planar", ports=None, **case):
    return solved(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), names), kind, ports=ports or PORTS, **case)


def only(check, solution, numbers=()):
    found = list(check(solution, list(numbers)))
    assert len(found) == 1
    return found[0]


def bend(x, y):
    return x, y * (1 + 0.4 * np.sin(np.pi * x / 3) ** 2)


def pair(n=6, **case):
    """A bent channel on two meshes: the fine solution and its numbers with bars."""
    case = {"ports": PORTS, "viscosity": 0.1, "density": 3.0, "depth": 40.0, **case}
    coarse, fine = (solved(box_mesh(2 * k, k, (0.0, 3.0, 0.0, 1.0), SLOT, bend), **case) for k in (n, 2 * n))
    return fine, with_bars(measure(fine), measure(coarse))


@pytest.fixture(scope="module")
def bent():
    return pair()


def test_converged():
    solution = slot()
    assert only(balances.converged, solution).verdict == "holds"
    solution.history.residual = 2e-10
    assert only(balances.converged, solution).verdict == "breaks"


def test_mass_balance():
    solution = slot()
    assert only(balances.mass_balance, solution).verdict == "holds"
    found = stations(solution)
    found["outlet"] = replace(found["outlet"], flow=found["outlet"].flow * (1 + 1e-9))
    assert only(balances.mass_balance, solution).verdict == "breaks"
    cavity = solved(box_mesh(4, 4, names=SHUT), walls={"lid": sliding(1.0)})
    assert only(balances.mass_balance, cavity).says == "nothing flows through the ports"


@pytest.mark.parametrize("check", [balances.momentum_balance, balances.energy_balance])
def test_balances_close_within_the_error_bars(bent, check):
    found = only(check, *bent)
    assert found.verdict == "holds"
    assert "within the" in found.says


@pytest.mark.parametrize("check", [balances.momentum_balance, balances.energy_balance])
@pytest.mark.parametrize(("size", "verdict"), [(1.0, "caution"), (1e3, "breaks")])
def test_balances_beyond_the_error_bars(bent, check, size, verdict):
    """Bars made too small are found out; a gap of 5 % and more breaks."""
    solution, numbers = bent
    tiny = [n if n.error_bar is None else n.with_(error_bar=n.error_bar * 1e-6) for n in numbers]
    if size > 1:  # spoil the fields
        solution = replace(solution, state=replace(solution.state, u=solution.state.u * 1.2))
    found = only(check, solution, tiny)
    assert found.verdict == verdict
    assert "a bar is too small" in found.says


@pytest.mark.parametrize("check", [balances.momentum_balance, balances.energy_balance])
def test_balances_without_bars_are_not_judged(bent, check):
    found = only(check, bent[0], measure(bent[0]))
    assert found.verdict == "caution"
    assert found.says.endswith("not judged, for a term has no error bar")


@pytest.mark.parametrize("check", [balances.momentum_balance, balances.energy_balance])
def test_exact_flow_closes_to_round_off_without_bars(check):
    assert only(check, slot()).says.endswith("round-off")


def test_balances_of_a_pressure_driven_flow_with_a_sliding_wall():
    """A common level of 100 bar carries no power, and the wall's power counts."""
    solution, numbers = pair(ports={"inlet": static(1e7 + 0.5), "outlet": static(1e7)}, walls={"low": sliding(0.3)})
    for check in (balances.momentum_balance, balances.energy_balance):
        assert only(check, solution, numbers).verdict == "holds"


def test_balances_where_walls_move_differently_are_not_judged():
    cavity = solved(box_mesh(4, 4, names=SHUT), walls={"lid": sliding(1.0)})
    found = only(balances.energy_balance, cavity, measure(cavity))
    assert found.verdict == "caution"
    assert "model the gap between them" in found.says


@pytest.mark.parametrize(("bar", "verdict"), [(4.9, "holds"), (5.1, "caution"), (19.0, "caution"), (21.0, "breaks")])
def test_resolution(bar, verdict):
    numbers = [
        number("total_pressure_drop", ("inlet", "outlet"), -100.0).with_(error_bar=bar),
        number("force_x", ("low",), 10.0).with_(error_bar=0.1),
    ]
    found = only(balances.resolution, slot(), numbers)
    assert found.verdict == verdict
    assert "total_pressure_drop inlet outlet" in found.says


def test_resolution_of_a_small_force_is_judged_by_the_largest():
    numbers = [number("force_x", ("a",), 100.0).with_(error_bar=1.0), number("force_x", ("b",), 0.1).with_(error_bar=0.4)]
    assert only(balances.resolution, slot(), numbers).verdict == "holds"


def test_resolution_is_not_spoilt_by_round_off():
    numbers = [
        number("total_pressure_drop", ("inlet", "outlet"), 1e-16).with_(error_bar=1e-15),
        number("total_pressure", ("inlet",), 1.0),
    ]
    assert only(balances.resolution, slot(), numbers).verdict == "holds"


def test_resolution_without_bars_is_a_caution():
    found = only(balances.resolution, slot(), [number("force_x", ("low",), 1.0)])
    assert (found.verdict, found.says) == ("caution", "force_x low has no error bar to judge the mesh by")


def test_resolution_of_a_cavity_is_judged_by_the_shear():
    numbers = [number("force_x", ("lid",), math.nan), number("wall_shear_p99", ("lid",), 1.0).with_(error_bar=0.3)]
    assert only(balances.resolution, slot(), numbers).verdict == "breaks"
