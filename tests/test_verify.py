"""`fem-flow verify`: its list of checks, its rows, and that every row passes."""

import dataclasses

import pytest
from verified import rows

import fem_flow as ff
from fem_flow.verify.run import CHECKS, run_checks
from fem_flow.verify.table import Row

QUICK = ["slot", "tube", "annulus", "sphere", "poppet_balance"]
LONG = ["manifold", "cylinder", "cavity_100", "cavity_400", "cavity_1000"]
ROWS = {"slot": 3, "tube": 3, "annulus": 2, "sphere": 4, "manifold": 5, "poppet_balance": 1, "cylinder": 4}
ROWS |= {"cavity_100": 5, "cavity_400": 5, "cavity_1000": 5}


def test_every_check_is_in_a_test():
    assert sorted(QUICK + LONG) == sorted(CHECKS)
    assert sorted(ROWS) == sorted(CHECKS)


@pytest.mark.parametrize("name", QUICK + [pytest.param(name, marks=pytest.mark.slow) for name in LONG])
def test_every_row_passes(name):
    found = rows(name)
    assert len(found) == ROWS[name]
    for row in found.values():
        assert row.name == name
        assert row.passed, row
        assert row.source
        assert row.seconds > 0
        assert isinstance(row.computed, float)
        assert row.computed != row.published or name in ("slot", "tube")  # nothing is handed through


def test_exact_rows_say_so_and_others_name_a_publication():
    for name in QUICK:
        for row in rows(name).values():
            assert ("exact; formula of" in row.source) == (name != "sphere")


def test_difference_is_relative_unless_said():
    row = Row("x", "y", 1.01, 1.0, 0.02, "z")
    assert row.difference == pytest.approx(0.01)
    assert row.passed
    assert not dataclasses.replace(row, computed=0.97).passed
    assert dataclasses.replace(row, published=10.0, computed=10.01, absolute=True).difference == pytest.approx(0.01)
    assert not dataclasses.replace(row, published=10.0, computed=10.03, absolute=True).passed
    assert not dataclasses.replace(row, computed=float("nan")).passed


def test_plain_data_of_a_row():
    data = Row("x", "y", 1.01, 1.0, 0.02, "z", seconds=1.5).to_dict()
    assert list(data) == [
        "name", "quantity", "computed", "published", "tolerance", "source", "absolute", "seconds", "difference", "passed",
    ]  # fmt: skip
    assert (data["passed"], data["seconds"]) == (True, 1.5)


def test_progress_and_rows_of_one_check():
    said = []
    found = run_checks(("tube",), lambda text, share: said.append((text, share)))
    assert said == [("verifying tube", 0.0)]
    assert {row.name for row in found} == {"tube"}


def test_an_unknown_check_is_refused_in_a_sentence():
    with pytest.raises(ff.CaseError) as caught:
        run_checks(("tubes",))
    assert str(caught.value).startswith("there is no check called tubes; there are: slot, tube, annulus")
    assert caught.value.reason == "unknown_check"
