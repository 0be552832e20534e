"""All figures of a solution."""

from __future__ import annotations

from fem_flow.flow.solution import Solution
from fem_flow.measure import drops, energy, force, section, shear_figures, whole
from fem_flow.measure.number import Number

FAMILIES = (section.measure, drops.measure, force.measure, shear_figures.measure, energy.measure, whole.measure)


KINETIC = (
    "total_pressure",
    "total_pressure_drop",
    "excess_pressure_drop",
    "loss_coefficient",
    "hydraulic_resistance",
    "discharge_coefficient",
)
CREEPING = "; inertia = false: the kinetic part of every total pressure is left out"


def measure(solution: Solution) -> list[Number]:
    """Every figure of a solution, without error bars; without inertia the definitions say what is left out."""
    found = [n for family in FAMILIES for n in family(solution)]
    if solution.case.inertia:
        return found
    return [n.with_(definition=n.definition + CREEPING) if n.name in KINETIC else n for n in found]
