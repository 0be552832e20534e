"""The list of verifications and how it is run."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import partial

from fem_flow.errors import CaseError
from fem_flow.verify.balance import poppet_balance
from fem_flow.verify.cavity import cavity
from fem_flow.verify.cylinder import cylinder
from fem_flow.verify.exact import annulus, slot, tube
from fem_flow.verify.manifold import manifold
from fem_flow.verify.sphere import sphere
from fem_flow.verify.table import Row

CHECKS: dict[str, Callable[[], Iterator[Row]]] = {
    "slot": slot,
    "tube": tube,
    "annulus": annulus,
    "sphere": sphere,
    "manifold": manifold,
    "poppet_balance": poppet_balance,
    "cylinder": cylinder,
    "cavity_100": partial(cavity, 100),
    "cavity_400": partial(cavity, 400),
    "cavity_1000": partial(cavity, 1000),
}


def run_checks(names: tuple[str, ...] = (), progress: Callable[[str, float | None], None] | None = None) -> list[Row]:
    """Run the named checks, all of them without names; each row carries the seconds that its check took.

    Raises
    ------
    CaseError : there is no check of that name
    """
    for name in names:
        if name not in CHECKS:
            raise CaseError(f"there is no check called {name}; there are: {', '.join(CHECKS)}", reason="unknown_check")
    wanted = names or tuple(CHECKS)
    rows = []
    for k, name in enumerate(wanted):
        if progress is not None:
            progress(f"verifying {name}", k / len(wanted))
        clock = time.perf_counter()
        found = list(CHECKS[name]())
        seconds = round(time.perf_counter() - clock, 2)
        rows += [replace(row, seconds=seconds) for row in found]
    return rows
