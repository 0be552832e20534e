"""The force on the shipped poppet against everything else that acts on the oil."""

from __future__ import annotations

from collections.abc import Iterator

from fem_flow.case.model import Case
from fem_flow.flow.solution import Solution
from fem_flow.job import run
from fem_flow.verify.table import Row

BALANCE = "exact; formula of the momentum balance: pressure and shear on all other boundaries, momentum through the ports"


def case() -> Case:
    """The shipped poppet with a longer outlet, oil at 10 degC."""
    return Case(
        title="Poppet, balance of axial forces",
        part={"script": "poppet_valve", "outlet_leg": "60 mm"},
        fluid={"name": "ISO VG 46", "temperature": "10 degC"},
        ports={"inlet": {"flow_in": "12 L/min"}, "outlet": {"static_pressure": "0 bar"}},
        accuracy={"target": "0.1 %", "of": ["force_x poppet"]},
    )


def force_by_the_others(solution: Solution, wall: str) -> float:
    """Axial force on a wall, N, from pressure and shear on all other boundaries and the momentum through the ports.

    Plain integrals of the computed fields, of second order: nothing of the reaction from which the forces of a result come.
    """
    s, force = solution, 0.0
    for name, piece in s.boundaries.items():
        if name != wall:
            force += float((piece.w * piece.traction(s.state.u, s.state.p, s.scales.mu)[..., 0]).sum())
        if name in s.case.ports:
            force -= s.rho * float((piece.w * piece.at_points(s.state.u[0]) * piece.normal_velocity(s.state.u)).sum())
    closure = float((s.boundaries[wall].w * s.boundaries[wall].normal[..., 0]).sum())
    return float(force * s.scales.force + s.scales.level * s.scales.area * closure)


def poppet_balance() -> Iterator[Row]:
    """Axial force on the poppet."""
    result = run(case())
    others = force_by_the_others(result.solution, "poppet")
    yield Row("poppet_balance", "axial force on the poppet, N", float(result["force_x", "poppet"]), others, 1e-3, BALANCE)
