"""The shipped manifold in creeping flow against a network of straight slots."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from fem_flow.case.model import Case
from fem_flow.job import run
from fem_flow.verify.table import Row

BRANCHES, HEADER, BRANCH, PITCH, FILLET = 4, 6.0, 4.0, 14.0, 0.5
"""Count and mm; the header is narrow on purpose, so that the split is uneven."""
NETWORK = "exact; formula of a ladder of slots (12 mu L/gap^3 each), junctions without loss"


def case(widths: float) -> Case:
    """Straight branches of so many widths, all outlets at one pressure, no inertia."""
    outlets = {f"outlet_{k + 1}": {"static_pressure": "0 bar"} for k in range(BRANCHES)}
    return Case(
        title=f"Manifold, branches of {widths:g} widths",
        part={
            "script": "manifold", "branches": BRANCHES, "header": f"{HEADER:g} mm", "branch_width": f"{BRANCH:g} mm",
            "last_branch_width": f"{BRANCH:g} mm", "pitch": f"{PITCH:g} mm", "fillet": f"{FILLET:g} mm",
            "branch_length": f"{widths * BRANCH:g} mm", "inlet_leg": f"{2 * HEADER:g} mm", "dead_end": f"{HEADER:g} mm",
        },
        fluid={"name": "ISO VG 46", "temperature": "40 degC"},
        model={"inertia": False, "depth": "100 mm"},
        ports={"inlet": {"flow_in": "4 L/min"}, **outlets},
        accuracy={"target": "0.1 %", "of": ["flow_share"]},
    )  # fmt: skip


def ladder_shares(header: float, pitch: float, widths: Sequence[float], length: float) -> np.ndarray:
    """Shares of the flow through slots that leave a header one after the other, to one pressure; any unit of length.

    A branch counts from the wall of the header, a piece of header from the middle of one branch to that of the next.
    """
    branch = np.asarray(widths, dtype=float) ** 3 / length
    n, run_between = len(branch), header**3 / pitch
    matrix = np.diag(branch)
    for k in range(n - 1):
        matrix[k : k + 2, k : k + 2] += run_between * np.array([[1.0, -1.0], [-1.0, 1.0]])
    pressure = np.linalg.solve(matrix, np.eye(n)[0])
    return branch * pressure


def computed_shares(widths: float) -> np.ndarray:
    """Shares of the outlets with straight branches of so many widths."""
    result = run(case(widths))
    return np.array([float(result["flow_share", f"outlet_{k + 1}"]) for k in range(BRANCHES)])


def network_shares(widths: float) -> np.ndarray:
    """What the network says for `case`."""
    return ladder_shares(HEADER, PITCH, [BRANCH] * BRANCHES, widths * BRANCH + FILLET)


def manifold() -> Iterator[Row]:
    """Shares with branches of 20 widths, and how the difference falls when they are made twice as long."""
    computed, network = computed_shares(20), network_shares(20)
    for k, (share, expected) in enumerate(zip(computed.tolist(), network.tolist(), strict=True)):
        yield Row("manifold", f"share of outlet {k + 1}, branches of 20 widths", share, expected, 0.03, NETWORK)
    off = np.abs(computed / network - 1).max()
    half = np.abs(computed_shares(40) / network_shares(40) - 1).max()
    says = "exact in the limit: what the junctions add is a fixed length, so the difference falls like 1/length"
    yield Row("manifold", "largest difference at 20 widths over that at 40", float(off / half), 2.0, 0.1, says)
