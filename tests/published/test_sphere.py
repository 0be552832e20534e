"""Stokes drag of a sphere at rest in a tube, against the computed table of nine sizes."""

import pytest
from flow_tools import reference
from verified import rows

from fem_flow.verify.sphere import K2, drag_factor, haberman_sayre

(TABLE,) = [e for e in reference("sphere_in_tube")["values"] if e["quantity"].startswith("K2 (fixed sphere")]
FACTORS = dict(zip(TABLE["lambda"], TABLE["value"], strict=True))


def test_the_shipped_factors_are_those_of_the_reference():
    assert {ratio: FACTORS[ratio] for ratio in K2} == K2


@pytest.mark.parametrize("ratio", [0.1, 0.3, 0.4, 0.6, 0.7, 0.9])
def test_drag_factor(ratio):
    assert drag_factor(ratio) == pytest.approx(FACTORS[ratio], rel=1e-4)


def test_drag_factors_of_verify():
    found = [row for row in rows("sphere").values() if "rational" not in row.source]
    assert [row.published for row in found] == [FACTORS[0.2], FACTORS[0.5], FACTORS[0.8]]
    for row in found:
        assert row.computed == pytest.approx(row.published, rel=1e-4)


def test_the_published_formula_holds_where_it_is_said_to_and_fails_beyond():
    for ratio in (0.1, 0.2, 0.3):
        assert haberman_sayre(ratio) == pytest.approx(FACTORS[ratio], rel=1e-3)
    assert haberman_sayre(0.8) < 0.75 * FACTORS[0.8]
