"""Rows of `fem-flow verify`, each check run once however many tests look at it."""

from __future__ import annotations

from functools import cache

from fem_flow.verify.run import run_checks
from fem_flow.verify.table import Row


@cache
def rows(name: str) -> dict[str, Row]:
    """The rows of one check by their quantity."""
    found = run_checks((name,))
    assert found, f"{name} compares nothing"
    return {row.quantity: row for row in found}
