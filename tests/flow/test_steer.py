"""How a steady state is reached: Picard, Newton, damping, continuation, a start, and what is said when there is none."""

from __future__ import annotations

import re

import numpy as np
import pytest
from flow_tools import CHANNEL, HALF, flow_case
from meshes import box_mesh

from fem_flow.case.resolved import WallCondition
from fem_flow.errors import NoSteadySolution
from fem_flow.flow import steer
from fem_flow.flow.linear import Factorization
from fem_flow.flow.problem import _transferred, solve
from fem_flow.flow.steer import NotConverged, steady

STATIC = ("static_pressure", 0.0)
LID = {"top": WallCondition("sliding", 1.0)}


def graded(x, y):
    return 0.5 * (1 - np.cos(np.pi * x)), 0.5 * (1 - np.cos(np.pi * y))


def cavity(n, reynolds, start=None, **kwargs):
    return solve(box_mesh(n, n, bend=graded), flow_case({}, mu=1 / reynolds, rho=1.0, walls=LID, **kwargs), start)


def nozzle(nx=20, ny=4):
    """Half of a channel that narrows to three tenths."""
    def bend(x, y):
        return x, y * (1 - 0.7 * np.exp(-(((x - 1.5) / 0.25) ** 2)))

    return box_mesh(nx, ny, box=(0, 5, 0, 0.5), names=HALF, bend=bend)


def through_nozzle(reynolds, start=None, inlet=("velocity", 1.0)):
    return solve(nozzle(), flow_case({"inlet": inlet, "outlet": STATIC}, mu=1 / reynolds, rho=1.0), start)


def kinds(solution):
    return [s["step"] for s in solution.history.steps]


def test_creeping_flow_takes_one_step():
    solution = cavity(6, 100.0, inertia=False)
    assert kinds(solution) == ["Stokes"]
    assert solution.counts.factorisations == solution.counts.analyses == 1
    assert solution.history.residual <= 1e-10


def test_easy_flow_by_picard_then_newton_with_one_analysis_after_stokes():
    solution = cavity(8, 100.0)
    steps = kinds(solution)
    assert steps[0] == "Stokes"
    assert steps[1] == "Picard"
    assert steps[-2:] == ["Newton", "Newton"]
    assert steps == sorted(steps, key=["Stokes", "Picard", "Newton"].index)
    assert solution.counts.analyses == 2
    assert solution.counts.factorisations == len(steps)
    assert solution.history.shares == [1.0]


def test_newton_converges_quadratically():
    residuals = [s["residual"] for s in cavity(8, 400.0).history.steps if s["step"] == "Newton"]
    near = [r for r in residuals if 1e-13 < r < 1e-2]
    assert len(near) >= 2
    for before, after in zip(near, near[1:]):
        assert after < 30 * before**1.7


def test_every_step_is_recorded_with_its_damping():
    history = through_nozzle(1000.0).history
    for step in history.steps:
        assert set(step) == {"step", "share_of_flow", "damping", "residual"}
        assert step["damping"] == 1.0 or step["step"] == "Newton"
        assert 0.0 <= step["share_of_flow"] <= 1.0
    assert history.steps[-1]["residual"] == history.residual <= steer.TOLERANCE


def newton_alone(system):
    """Plain undamped Newton from Stokes flow: the residual after ten steps."""
    state = system.start()
    with Factorization(system.blocks) as solver:
        for step in range(11):
            rho = system.rho if step else 0.0
            solver.factorise(system.matrix(state, rho, newton=True))
            state = system.advance(state, solver.solve(-system.residual(state, rho)[0]))
    return system.residual(state, system.rho)[1]


def test_continuation_reaches_what_newton_from_stokes_does_not():
    """At Re 1000 in the nozzle plain Newton from creeping flow is lost; raising the flow in steps arrives."""
    solution = through_nozzle(1000.0)
    assert newton_alone(solution.system) > 1e-3
    shares = solution.history.shares
    assert len(shares) > 1
    assert shares == sorted(shares)
    assert shares[-1] == 1.0
    assert solution.history.residual <= 1e-10


def test_damped_steps_do_not_raise_the_residual_norm():
    solution = through_nozzle(1000.0)
    system = solution.system
    state = steady_state_of_stokes(system)
    with Factorization(system.blocks) as solver:
        vector, _ = system.residual(state, system.rho)
        solver.factorise(system.matrix(state, system.rho, newton=True))
        delta = solver.solve(-vector)
    full, _ = system.residual(system.advance(state, delta), system.rho)
    assert np.linalg.norm(full) > np.linalg.norm(vector)
    _, new, _, share = steer._damped(system, state, delta, system.rho, vector, whole=False)
    assert steer.SMALLEST_STEP <= share < 1.0
    assert np.linalg.norm(new) <= (1 - 0.2 * share) * np.linalg.norm(vector)


def steady_state_of_stokes(system):
    state = system.start()
    with Factorization(system.blocks) as solver:
        solver.factorise(system.matrix(state, 0.0, newton=False))
        return system.advance(state, solver.solve(-system.residual(state, 0.0)[0]))


def test_start_from_a_coarser_mesh_saves_steps_and_changes_nothing():
    coarse, cold = cavity(10, 400.0), cavity(14, 400.0)
    warm = cavity(14, 400.0, start=coarse)
    assert 0 < warm.history.iterations < cold.history.iterations
    assert set(kinds(warm)) == {"Newton"}
    np.testing.assert_allclose(warm.state.u, cold.state.u, atol=1e-8)
    np.testing.assert_allclose(warm.state.p, cold.state.p, atol=1e-8)


def test_start_from_the_same_case_on_the_same_mesh_has_nothing_to_do():
    mesh, case = box_mesh(8, 8), flow_case({}, mu=0.01, rho=1.0, walls=LID)
    first = solve(mesh, case)
    again = solve(mesh, case, start=first)
    assert again.history.iterations == 0
    assert again.history.residual <= 1e-10
    np.testing.assert_allclose(again.state.u, first.state.u, atol=1e-14)


def test_start_from_a_case_with_other_conditions_at_the_ports():
    """A given flow, then the total pressure that it has: the port's pressure is unknown only in the second."""
    first = through_nozzle(100.0)
    port = first.boundaries["inlet"]
    static = float((port.w * port.pressure(first.state.p)).sum()) / port.area * first.scales.pressure
    total = static + 54 / 35 * 0.5
    second = through_nozzle(100.0, start=first, inlet=("total_pressure", total))
    assert kinds(second) == ["Newton"] * second.history.iterations
    assert second.history.iterations >= 1
    flows = [s.boundaries["inlet"].flux(s.state.u) * s.scales.flow for s in (first, second)]
    assert flows[1] == pytest.approx(flows[0], rel=0.02)


def test_transferred_state_is_the_start_in_the_new_scales():
    """Fields and the unknown port pressure in SI come back out, from a level of 7 bar into one of 3 bar."""
    mesh = nozzle()

    def run(inlet, level, start=None):
        case = flow_case({"inlet": inlet, "outlet": ("static_pressure", level)}, mu=0.02, rho=1.0)
        return solve(mesh, case, start)

    first = run(("velocity", 1.0), 7e5)
    second = run(("total_pressure", 3e5 + 40.0), 3e5)
    state = _transferred(first, second.system, second.scales)
    np.testing.assert_allclose(state.u * second.scales.velocity, first.state.u * first.scales.velocity, atol=1e-12)
    pressure = state.p * second.scales.pressure + second.scales.level
    np.testing.assert_allclose(pressure, first.state.p * first.scales.pressure + first.scales.level, rtol=1e-14)
    inlet = float(state.ports[0] * second.scales.pressure + second.scales.level)
    port = second.space.pressure_of_node[np.intersect1d(second.boundaries["inlet"].nodes, second.space.corner_nodes)]
    assert pressure[port].min() <= inlet <= pressure[port].max()


def test_a_start_that_leads_nowhere_is_dropped():
    far = cavity(8, 10.0)
    object.__setattr__(far.state, "u", 1e6 * np.random.default_rng(0).normal(size=far.state.u.shape))
    solution = cavity(8, 100.0, start=far)
    assert "Stokes" in kinds(solution)
    np.testing.assert_allclose(solution.state.u, cavity(8, 100.0).state.u, atol=1e-9)


def share_reached(reynolds):
    with pytest.raises(NoSteadySolution) as caught:
        cavity(8, reynolds)
    return caught.value


def test_share_that_was_reached_is_that_of_the_flow():
    """On a mesh far too coarse steady states end at some Reynolds number; half the share remains of twice the flow."""
    once, twice = share_reached(1e4), share_reached(2e4)
    for error in (once, twice):
        assert error.reason == "no_steady_solution"
        assert error.details["iterations"] > 10
    reached = once.details["share_of_flow"], twice.details["share_of_flow"]
    assert 0.0 < reached[0] < 1.0
    assert abs(reached[0] - 2 * reached[1]) < 0.2 * reached[0]
    assert re.fullmatch(
        r"a steady flow was found up to \d+\.\d % of the wall speed asked for, none beyond: Picard and Newton steps from"
        r" creeping flow and from smaller speeds were tried; the real flow is probably unsteady there\. Lower the speed of the"
        r" walls, take a thicker fluid, or ask for a finer mesh with \[mesh\] size",
        str(once),
    )


@pytest.mark.parametrize(("inlet", "words"), [
    (("velocity", 1.0), ("of the flow asked for", "from smaller flow rates were", "Lower the flow rate,")),
    (("static_pressure", 3.0), ("of the pressures asked for", "from smaller pressures were", "Lower the pressure difference,")),
])
def test_sentence_names_what_drives_the_flow(monkeypatch, inlet, words):
    monkeypatch.setattr(steer, "MAX_STAGES", 4)
    monkeypatch.setattr(steer, "MAX_STEPS", 8)
    monkeypatch.setattr(steer, "SMALLEST_RAISE", 0.0)
    with pytest.raises(NoSteadySolution) as caught:
        through_nozzle(1e5, inlet=inlet)
    for word in words[1:] if "no steady flow was found" in str(caught.value) else words:
        assert word in str(caught.value)


def test_not_converged_carries_the_state_of_the_share_reached(monkeypatch):
    system = through_nozzle(1000.0).system
    monkeypatch.setattr(steer, "MAX_STAGES", 2)
    with Factorization(system.blocks) as solver, pytest.raises(NotConverged) as caught:
        steady(system, solver)
    error = caught.value
    assert 0 < error.share < 1
    assert system.residual(error.state, error.share * system.rho)[1] <= 1e-10
    assert error.history.shares[-1] == error.share


def test_progress_is_told():
    told = []
    solve(box_mesh(6, 6), flow_case({}, mu=0.01, rho=1.0, walls=LID), progress=told.append)
    assert told[0] == "Stokes flow"
    assert re.fullmatch(r"Newton step \d+, residual \d\.\de-\d\d", told[-1])


def test_badly_guessed_scales_are_corrected_once():
    """A pressure difference over a narrow throat: the guess of developed flow over the whole length is far too fast."""
    mesh = box_mesh(20, 4, box=(0, 5, 0, 0.5), names=HALF, bend=lambda x, y: (x, y * (1 - 0.88 * np.exp(-((x - 2) ** 2)))))
    case = flow_case({"inlet": ("static_pressure", 5.0), "outlet": STATIC}, mu=0.1, rho=1.0)
    guess = 5.0 * 1.0**2 / (48 * 0.1 * np.hypot(5.0, 0.5))
    solution = solve(mesh, case)
    assert solution.scales.velocity < 0.1 * guess
    port = solution.boundaries["inlet"]
    mean = -port.flux(solution.state.u) / port.area
    assert 0.1 < mean < 10
    assert kinds(solution)[0] == "Stokes"
    assert solution.history.shares[-1] == 1.0


def test_flow_driven_and_pressure_driven_channels_agree():
    def bend(x, y):
        return x, y * (1 - 0.4 * np.sin(np.pi * x / 2) ** 2)

    mesh = box_mesh(10, 4, box=(0, 2, 0, 1), names=CHANNEL, bend=bend)
    first = solve(mesh, flow_case({"inlet": STATIC, "outlet": ("static_pressure", -2.0)}, mu=0.02, rho=1.0))
    flow = -first.boundaries["inlet"].flux(first.state.u) * first.scales.flow
    total = first.port_pressure("inlet")
    assert abs(total) < 1e-15
    back = solve(mesh, flow_case({"inlet": STATIC, "outlet": ("velocity", -flow)}, mu=0.02, rho=1.0))
    assert back.boundaries["outlet"].flux(back.state.u) * back.scales.flow == pytest.approx(flow, rel=1e-10)
    assert back.pressure([(1.0, 0.2)])[0] == pytest.approx(first.pressure([(1.0, 0.2)])[0], rel=0.05)
