"""Error bars of the first kind: the same case on a mesh of twice the size, graded alike."""

from __future__ import annotations

from collections import defaultdict
from statistics import median

from fem_flow.case.resolved import Accuracy
from fem_flow.measure.number import Number

FACTOR = 1.25
"""The bar is this times the difference to the mesh of twice the size.

An order of convergence p leaves an error of difference / (2^p - 1) on the finer mesh, so the factor covers p >= 0.85; behind a
graded corner and in smooth flow p is between 2 and 4.
"""

FALL = 8.0
"""A bar is not believed to fall by more than this from one mesh to the next of half the size (order 3)."""

SAID = f"{FACTOR:g} times the difference to the same case on a mesh of twice the size, or more where that is small by accident"
ROUND_OFF = 1e-10
"""A bar below this share of the largest figure of the same unit is round-off, not discretisation error."""


def with_bars(fine: list[Number], coarse: list[Number]) -> list[Number]:
    """The fine numbers with error bars; None where the coarse mesh has no such number or either is withheld.

    Figures of one name (points of attachment) are matched in their order; where the meshes find different numbers of them, each
    fine one is matched to a coarse one such that the differences are smallest in sum, and the rest go without a bar.

    A difference can be small by accident, where the error changes its sign between the two meshes. So a bar is at least an
    eighth (``FALL``) of the bar that the coarse number brings along, and at least ``FACTOR`` times the median share (of
    `size_of`) by which the figures of its quantity differ, where there are three or more of them; exact figures stay exact.
    """
    out = list(fine)
    other = _by_name(coarse)
    for key, here in _by_name(fine).items():
        for i, k in _matched([fine[i].value for i in here], [coarse[k].value for k in other.get(key, [])]):
            n, m = fine[here[i]], coarse[other[key][k]]
            if not n.withheld and not m.withheld:
                bar = FACTOR * abs(n.value - m.value)
                out[here[i]] = n.with_(error_bar=max(bar, m.error_bar / FALL) if m.error_bar and bar else bar)
    return _never_by_accident(out)


def _never_by_accident(numbers: list[Number]) -> list[Number]:
    """No bar below that of the median share of its quantity; figures given several times of one name (points) are left."""
    alone = {key for key, places in _by_name(numbers).items() if len(places) == 1}
    sizes = _sizes(numbers)
    shares: dict[str, list[float]] = defaultdict(list)
    for n in numbers:
        if _judged(n, alone, sizes):
            shares[n.name].append(n.error_bar / sizes[n.name, n.of])
    usual = {name: median(found) for name, found in shares.items() if len(found) >= 3}
    out = []
    for n in numbers:
        if n.name in usual and _judged(n, alone, sizes):
            n = n.with_(error_bar=max(n.error_bar, usual[n.name] * sizes[n.name, n.of]))
        out.append(n)
    return out


def _judged(n, alone, sizes):
    return n.error_bar is not None and (n.name, n.of) in alone and n.error_bar > ROUND_OFF * sizes[n.name, n.of]


def _sizes(numbers):
    """`size_of` every number that is given once of its name."""
    largest: dict[str, float] = defaultdict(float)
    for n in numbers:
        if not n.withheld:
            largest[n.name] = max(largest[n.name], abs(n.value))
    return {(n.name, n.of): max(abs(n.value), 0.1 * largest[n.name]) for n in numbers}


def _by_name(numbers):
    places: dict[tuple, list[int]] = defaultdict(list)
    for i, n in enumerate(numbers):
        places[n.name, n.of].append(i)
    return places


def _matched(fine: list[float], coarse: list[float]) -> list[tuple[int, int]]:
    if len(fine) == len(coarse):
        return [(i, i) for i in range(len(fine))]
    if not fine or not coarse:
        return []
    from scipy.optimize import linear_sum_assignment

    rows, columns = linear_sum_assignment([[abs(a - b) for b in coarse] for a in fine])
    return list(zip(rows.tolist(), columns.tolist(), strict=True))


def wanted(numbers: list[Number], accuracy: Accuracy) -> list[Number]:
    """The numbers that the accuracy names, each once; a pair of ports asked the other way round is the same pair."""

    def named(n: Number) -> bool:
        return any(n.name == name and (not of or n.of == of or (len(of) == 2 and n.of == of[::-1])) for name, of in accuracy.of)

    return [n for n in numbers if named(n)]


def tolerance(n: Number, numbers: list[Number], accuracy: Accuracy) -> float:
    """Bar that the accuracy allows a number.

    A percentage is of the figure's own size, but never finer than that percentage of a tenth of the largest figure of its
    quantity.
    """
    if not accuracy.relative:
        return accuracy.target
    return accuracy.target * size_of(n, numbers)


def size_of(n: Number, numbers: list[Number]) -> float:
    """What a bar is compared with: the figure's own size, or a tenth of the largest of its quantity where that is more.

    The two components of a force are one quantity: one that vanishes by symmetry is judged against the other.
    """
    same = (n.name, n.name.replace("force_x", "force_y"), n.name.replace("force_y", "force_x"))
    largest = max((abs(other.value) for other in numbers if other.name in same and not other.withheld), default=0.0)
    return max(abs(n.value), 0.1 * largest)


def is_round_off(n: Number, numbers: list[Number]) -> bool:
    """Whether a bar is round-off: the figure is exact, such as a drop or a force that is zero."""
    if n.error_bar is None or n.unit == "1":
        return n.error_bar == 0.0
    return n.error_bar <= ROUND_OFF * max(abs(other.value) for other in numbers if other.unit == n.unit and not other.withheld)


def missed(numbers: list[Number], accuracy: Accuracy | None) -> list[Number]:
    """Numbers named by the accuracy whose bar is above what it allows or unknown; withheld ones are left out."""
    if accuracy is None:
        return []
    named = [n for n in wanted(numbers, accuracy) if not n.withheld]
    return [n for n in named if not _met(n, numbers, accuracy)]


def _met(n, numbers, accuracy):
    return n.error_bar is not None and (n.error_bar <= tolerance(n, numbers, accuracy) or is_round_off(n, numbers))
