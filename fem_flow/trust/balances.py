"""Checks of the computation itself: convergence, the three balances, and whether the mesh resolves the flow.

The physical balances of energy and momentum do not close to round-off, because the discrete velocity is not quite free of
divergence. Their gap is a sum of the errors of their terms, so it cannot be larger than the sum of the terms' error bars, if
each bar holds. A larger gap proves that a bar is too small: that is what the two checks look for.
"""

from __future__ import annotations

from collections.abc import Iterator

from fem_flow.flow.sections import mirrors
from fem_flow.flow.solution import Solution
from fem_flow.flow.steer import TOLERANCE
from fem_flow.measure.energy import dissipation, momentum_terms, wall_power
from fem_flow.measure.number import Check, Number
from fem_flow.measure.section import stations
from fem_flow.measure.singular import first_jump
from fem_flow.trust.bars import is_round_off, size_of

OWN = "fem_flow"
ROUND_OFF = 1e-9
LARGE = 0.05
"""A gap beyond the error bars and above this share of the largest term breaks; below it is a caution."""


def converged(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """The residual of the nonlinear equations."""
    r = solution.history.residual
    yield Check(
        "converged",
        (),
        "holds" if r <= TOLERANCE else "breaks",
        f"residual {r:.1e} of the forces and flows in the problem, at most {TOLERANCE:.0e}",
        OWN,
    )


def mass_balance(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """What enters leaves."""
    flows = [st.flow for st in stations(solution).values() if st.is_port]
    through = 0.5 * sum(map(abs, flows))
    if through == 0.0:
        yield Check("mass_balance", (), "holds", "nothing flows through the ports", OWN)
        return
    share = abs(sum(flows)) / through
    yield Check(
        "mass_balance",
        (),
        "holds" if share <= 1e-10 else "breaks",
        f"what enters and what leaves differ by {share:.1e} of the flow, at most 1e-10",
        OWN,
    )


def momentum_balance(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """x forces on all walls against pressure and momentum of all ports."""
    if any(abs(normal[0]) > 1e-6 for _, normal in mirrors(solution.mesh)):
        yield Check("momentum_balance", (), "holds", "the x forces cancel by symmetry", OWN)
        return
    s = solution.scales
    terms = {name: float(t[0]) * s.force for name, t in momentum_terms(solution).items()}
    size = max((abs(t) for t in terms.values()), default=0.0)
    bars = [(1.0, "force_x", (name,)) for name in solution.mesh.names("wall")]
    bars += [(st.area, "total_pressure", (st.name,)) for st in _flowing(solution)]
    yield _balance("momentum_balance", "x forces of walls and ports", sum(terms.values()), size, "N", bars, solution, numbers)


def energy_balance(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Power of the ports and sliding walls against dissipation."""
    ports = _flowing(solution)
    base = min((st.total for st in ports), default=0.0)  # a common level carries no power, for the flows add up to zero
    power = sum((st.total - base) * st.flow for st in ports)
    lost = dissipation(solution)
    gap = power + wall_power(solution) * solution.scales.power - lost
    bars = [(1.0, "dissipated_power", ())]
    bars += [(abs(st.flow), "total_pressure", (st.name,)) for st in ports]
    bars += [(abs(st.total - base), "flow_rate", (st.name,)) for st in ports]
    axes = "xy" if solution.case.kind == "planar" else "x"
    for name, condition in solution.case.walls.items():
        if condition.what == "sliding" and condition.value != 0.0:
            bars += [(abs(condition.value), f"force_{axis}", (name,)) for axis in axes]
    yield _balance("energy_balance", "power of ports and walls minus dissipation", gap, lost, "W", bars, solution, numbers)


def _flowing(solution):
    return [st for st in stations(solution).values() if st.is_port and st.total is not None]


def _balance(name, what, gap, size, unit, bars, solution, numbers):
    """Judge a gap by the error bars (factor, quantity, of) of its terms."""
    if size == 0.0:
        return Check(name, (), "holds", "nothing moves", OWN)
    jump = first_jump(solution)
    if jump is not None:
        return Check(name, (), "caution", f"not judged, for force and power have no limit: {jump.says}", OWN)
    share = abs(gap) / size
    said = f"{what}: {gap:.2e} {unit}, {100 * share:.2g} % of the largest term"
    if share <= ROUND_OFF:
        return Check(name, (), "holds", f"{said}: round-off", OWN)
    found = {(n.name, n.of): n.error_bar for n in numbers}
    known = [(factor, found.get((quantity, of))) for factor, quantity, of in bars]
    if any(bar is None for _, bar in known):
        return Check(name, (), "caution", f"{said}; not judged, for a term has no error bar", OWN)
    allowed = sum(factor * bar for factor, bar in known)
    if abs(gap) <= allowed:
        return Check(name, (), "holds", f"{said}, within the {allowed:.2g} {unit} that the error bars of its terms allow", OWN)
    verdict = "caution" if share <= LARGE else "breaks"
    return Check(
        name,
        (),
        verdict,
        f"{said}, more than the {allowed:.2g} {unit} that the error bars of its terms allow: a bar is too small",
        OWN,
    )


def resolution(solution: Solution, numbers: list[Number]) -> Iterator[Check]:
    """Whether the mesh resolves the flow: error bars of flows, total drops and forces (or of the shear) against their size."""
    for quantities in (("flow_rate", "total_pressure_drop", "force_x", "force_y"), ("wall_shear_p99",)):
        judged = [n for n in numbers if n.name in quantities and not n.withheld]
        if judged:
            break
    if not judged:
        yield Check("resolution", (), "holds", "there is no flow, drop, force or shear to judge the mesh by", OWN)
        return
    if any(n.error_bar is None for n in judged):
        lacking = next(" ".join((n.name, *n.of)) for n in judged if n.error_bar is None)
        yield Check("resolution", (), "caution", f"{lacking} has no error bar to judge the mesh by", OWN)
        return
    shares = {(n.name, *n.of): 0.0 if is_round_off(n, numbers) else n.error_bar / size_of(n, numbers) for n in judged}
    label, worst = max(shares.items(), key=lambda item: item[1])
    verdict = "holds" if worst <= 0.05 else "caution" if worst <= 0.2 else "breaks"
    says = f"the largest error bar is {100 * worst:.2g} % ({' '.join(label)}); above 5 % is caution, above 20 % breaks"
    yield Check("resolution", (), verdict, says, OWN)


CHECKS = (converged, mass_balance, momentum_balance, energy_balance, resolution)
