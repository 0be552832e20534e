"""Force on the shipped poppet against pressure, shear and momentum of all other boundaries.

Three forms: the identity of the discrete equations, which holds to round-off; the physical balance with forces from the
reaction, off by the divergence that the discrete velocity has; and plain integrals of the computed fields.
"""

from functools import cache

import pytest
from flow_tools import fitted_order
from verified import rows

from fem_flow.case.check import parameter_values, resolve, script_reference
from fem_flow.case.model import Case
from fem_flow.flow import kernels
from fem_flow.flow.problem import solve
from fem_flow.flow.solution import Solution
from fem_flow.measure.energy import discrete_momentum_defect, momentum_terms
from fem_flow.measure.force import wall_force
from fem_flow.measure.rim import rim_of
from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script
from fem_flow.trust.bars import FACTOR
from fem_flow.verify.balance import case, force_by_the_others

COARSE, FINE = (2.0, 1.0), (1.0, 0.5, 0.25)
"""Multiples of the automatic sizes."""
POINTS = {"cold": ("10 degC", "12 L/min"), "warm": ("40 degC", "6 L/min")}


@cache
def solutions(point: str, scales: tuple[float, ...]) -> tuple[Solution, ...]:
    """The poppet on meshes that are each twice as fine as the one before."""
    temperature, flow = POINTS[point]
    return on_meshes(case().with_(fluid={"temperature": temperature}, ports={"inlet": {"flow_in": flow}}), scales)


def on_meshes(given: Case, scales: tuple[float, ...]) -> tuple[Solution, ...]:
    path = find_script(script_reference(given), given.folder)
    with Drawing(path) as drawing:
        values = parameter_values(given, drawing.declare())
        declaration = drawing.declare(values)
        resolved = resolve(given, declaration, drawing.draw(values).names("wall"))
        found = [solve(drawing.mesh(scale=scales[0]), resolved)]
        for scale in scales[1:]:
            found.append(solve(drawing.mesh(scale=scale), resolved, found[-1]))
    return tuple(found)


def force(solution: Solution) -> float:
    return float(wall_force(solution, "poppet")[0][0])


def inertia(solution: Solution) -> float:
    """rho int (u.grad) u_x over the fluid, N: what the equations leave when they are tested with a unit velocity along x."""
    total = 0.0
    for g in solution.space.groups:
        s = kernels.states(g, solution.state.u, solution.state.p)
        total += float((g.w * (s.ux * s.ux_x + s.uy * s.ux_y)).sum())
    return solution.rho * total * solution.scales.force


@pytest.mark.parametrize("point", POINTS)
def test_identity_of_the_discrete_equations(point):
    for solution in solutions(point, COARSE):
        assert abs(discrete_momentum_defect(solution)) <= 1e-10


@pytest.mark.parametrize("point", POINTS)
def test_force_is_what_all_other_boundaries_leave(point):
    """The same from the convective form and the reactions of all other boundaries, ports included."""
    for solution in solutions(point, COARSE):
        rim = rim_of(solution)
        others = [name for name in solution.boundaries if name != "poppet"]
        of_others = sum(float(rim.share(rim.of(name))[0].sum()) for name in others) * solution.scales.force
        assert solution.scales.level == 0.0
        assert force(solution) == pytest.approx(of_others - inertia(solution), rel=1e-10)


@pytest.mark.parametrize("point", POINTS)
def test_physical_balance_is_within_the_error_bar(point):
    coarse, fine = solutions(point, COARSE)
    assert physical_gap(fine) <= FACTOR * abs(force(fine) - force(coarse))


def physical_gap(solution: Solution) -> float:
    """What the forces of the walls and the pressure and momentum of the ports leave, N."""
    return abs(sum(float(t[0]) for t in momentum_terms(solution).values())) * solution.scales.force


@pytest.mark.slow
@pytest.mark.parametrize("point", POINTS)
def test_physical_balance_falls_at_fourth_order(point):
    """Twice the order of the stresses, as of the force itself."""
    found = solutions(point, FINE)
    gaps = [physical_gap(s) for s in found]
    assert gaps[0] > gaps[1] > gaps[2]
    assert fitted_order(FINE, gaps) >= 3.85
    for k in (1, 2):
        assert gaps[k] <= FACTOR * abs(force(found[k]) - force(found[k - 1]))


@pytest.mark.slow
@pytest.mark.parametrize("point", POINTS)
def test_integrated_pressure_and_shear_approach_the_force_at_second_order(point):
    found = solutions(point, FINE)
    gaps = [abs(force_by_the_others(s, "poppet") - force(s)) for s in found]
    assert gaps[0] <= 2e-3 * abs(force(found[0]))
    assert gaps[0] > gaps[1] > gaps[2]
    assert fitted_order(FINE, gaps) >= 1.85


def test_row_of_verify_is_the_reaction_against_the_integrals():
    (row,) = rows("poppet_balance").values()
    assert 0 < abs(row.computed - row.published) <= 1e-3 * abs(row.published)
