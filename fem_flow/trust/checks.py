"""Whether the model holds, and which figures each check touches.

A check is one function that yields `Check`s; it is listed in `CHECKS` of `fem_flow.trust.balances` or `fem_flow.trust.regime`.
"""

from __future__ import annotations

from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Check, Number
from fem_flow.trust import balances, regime

GEOMETRY = ("area", "hydraulic_diameter", "narrowest_gap")
"""Figures that no check of the flow touches."""
LOSSES = ("excess_pressure_drop", "loss_coefficient")
SPREADS: dict[str, tuple[str, ...] | None] = {
    "laminar": None, "planar": None, "resolution": None, "momentum_balance": None, "energy_balance": None, "reverse_flow": None,
    "entrance_length": LOSSES, "developed_port": LOSSES,
}  # fmt: skip
"""Checks whose caution is carried by the figures they touch, and which figures (None: all); other cautions are listed only."""


def checks(solution: Solution, numbers: list[Number]) -> list[Check]:
    """All checks of a solution; ``numbers`` carry their error bars."""
    return [c for f in balances.CHECKS + regime.CHECKS for c in f(solution, numbers)]


def judged(numbers: list[Number], found: list[Check]) -> list[Number]:
    """The numbers with the verdict of the checks that touch them."""
    rank = ("holds", "caution", "breaks")
    out = []
    for n in numbers:
        worst = max((rank.index(c.verdict) for c in found if _touches(c, n)), default=0)
        out.append(n.with_(verdict=rank[worst]))
    return out


def _touches(check: Check, n: Number) -> bool:
    """A check that breaks touches every figure of the flow; a caution at a port or section those that name it."""
    if n.name in GEOMETRY or check.verdict == "holds":
        return False
    if check.verdict == "breaks":
        return True
    if check.check not in SPREADS:
        return False
    figures = SPREADS[check.check]
    if figures is not None and n.name not in figures:
        return False
    return check.check in ("laminar", "planar") or not check.of or bool(set(check.of) & set(n.of))
