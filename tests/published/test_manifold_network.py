"""Flow split in creeping flow: the shipped manifold and ladders of slots against networks and a 2-D solution."""

from pathlib import Path

import numpy as np
import pytest
from flow_tools import fitted_order, reference
from verified import rows

import fem_flow as ff
from fem_flow.verify.manifold import computed_shares, ladder_shares, network_shares

ENTRIES = reference("manifold_network")["values"]
EXAMPLES = {"A": (5, 1.0, 0.25, 3.0, 12.0), "B": (4, 1.0, 0.4, 3.0, 12.0), "C": (6, 1.0, 0.5, 3.0, 10.0)}


def entry(begins: str, example: str, arrangement: str) -> dict:
    (found,) = [
        e for e in ENTRIES
        if e["quantity"].startswith(begins) and (e["at"].get("example"), e["at"].get("kind")) == (example, arrangement)
    ]  # fmt: skip
    return found


def shares_of(example: str, arrangement: str) -> np.ndarray:
    """Share of each branch from the sections halfway along them."""
    n, header, branch, pitch, length = EXAMPLES[example]
    result = ff.run(
        ff.Case(
            part={
                "script": str(Path(__file__).parent / "ladder.py"), "arrangement": arrangement, "branches": n,
                "header": f"{header} mm", "branch": f"{branch} mm", "pitch": f"{pitch} mm", "branch_length": f"{length} mm",
            },
            fluid={"density": "900 kg/m^3", "viscosity": "40 mPa*s"},
            model={"inertia": False, "depth": "100 mm"},
            ports={"inlet": {"flow_in": "1 L/min"}, "outlet": {"static_pressure": "0 bar"}},
            accuracy={"target": "0.2 %", "of": ["total_pressure_drop"]},
        )
    )  # fmt: skip
    flows = np.array([float(result["flow_rate", f"branch_{k + 1}"]) for k in range(n)])
    return flows / float(result["flow_rate", "inlet"])


def test_network_of_equal_branches_behind_a_wide_header_splits_evenly():
    assert ladder_shares(1e3, 1.0, [1.0] * 4, 10.0) == pytest.approx([0.25] * 4, rel=1e-6)


def test_network_of_two_branches_by_hand():
    """Branch conductances 1/10 and 8/10, header run 1/2: the second path has 10/8 + 2."""
    second = 1 / (10 / 8 + 2)
    assert ladder_shares(1.0, 2.0, [1.0, 2.0], 10.0) == pytest.approx(np.array([0.1, second]) / (0.1 + second))


def test_manifold_of_verify_is_within_three_per_cent_of_the_network():
    found = rows("manifold")
    shares = [row for quantity, row in found.items() if quantity.startswith("share of outlet")]
    assert len(shares) == 4
    assert sum(row.computed for row in shares) == pytest.approx(1.0, abs=1e-9)
    assert max(row.published for row in shares) > 1.3 * min(row.published for row in shares)  # uneven
    for row in shares:
        assert row.computed == pytest.approx(row.published, rel=0.03)


@pytest.mark.slow
def test_difference_to_the_network_falls_like_one_over_length():
    lengths = [20, 40, 80]
    off = [np.abs(computed_shares(n) / network_shares(n) - 1).max() for n in lengths]
    assert off[0] <= 0.03
    assert fitted_order(lengths, off) == pytest.approx(-1.0, abs=0.15)


@pytest.mark.slow
@pytest.mark.parametrize(("example", "arrangement"), [("A", "Z"), ("B", "U"), ("C", "U"), ("C", "Z")])
def test_ladder_against_the_published_2d_solution(example, arrangement):
    computed = shares_of(example, arrangement)
    two_d = entry("2-D Stokes shares", example, arrangement)
    assert computed == pytest.approx(np.array(two_d["share_2d"]), abs=3e-5 if example != "C" else 1e-4)
    bracket = entry("shares q_i/Q from the inlet side", example, arrangement)
    assert (np.array(bracket["share_low"]) - 1e-6 <= computed).all()
    assert (computed <= np.array(bracket["share_high"]) + 1e-6).all()
