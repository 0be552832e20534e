"""Straight pieces in the plane: where two of them cross, and how often points are encircled."""

from __future__ import annotations

import numpy as np

BLOCK = 1_000_000


def first_crossing(start: np.ndarray, end: np.ndarray, after: np.ndarray) -> tuple[int, int, np.ndarray] | None:
    """Two pieces that cross or touch without being neighbours, and where; None if there are none.

    Parameters
    ----------
    start, end : (n, 2)
    after : (n,) number of the piece that each one runs into
    """
    n = len(start)
    span = end - start
    number = np.arange(n)
    for first in range(0, n, max(1, BLOCK // n)):
        rows = number[first : first + max(1, BLOCK // n)]
        d, w = span[rows, None], start[None] - start[rows, None]
        cross = d[..., 0] * span[:, 1] - d[..., 1] * span[:, 0]
        with np.errstate(divide="ignore", invalid="ignore"):
            s = (w[..., 0] * span[:, 1] - w[..., 1] * span[:, 0]) / cross
            t = (w[..., 0] * d[..., 1] - w[..., 1] * d[..., 0]) / cross
        near = (number == rows[:, None]) | (after[rows, None] == number) | (after == rows[:, None])
        hit = (s >= -1e-9) & (s <= 1 + 1e-9) & (t >= -1e-9) & (t <= 1 + 1e-9) & ~near
        if hit.any():
            i, j = np.argwhere(hit)[0]
            return int(rows[i]), int(j), start[rows[i]] + s[i, j] * span[rows[i]]
    return None


def windings(points: np.ndarray, start: np.ndarray, end: np.ndarray) -> np.ndarray:
    """How many times the directed pieces run around each point (n, 2), anticlockwise positive: (n,) int."""
    found = np.zeros(len(points), dtype=np.int64)
    rise = end[:, 1] - start[:, 1]
    block = max(1, BLOCK // len(start))
    for first in range(0, len(points), block):
        x, y = points[first : first + block, 0, None], points[first : first + block, 1, None]
        up = (start[:, 1] <= y) & (end[:, 1] > y)
        down = (start[:, 1] > y) & (end[:, 1] <= y)
        with np.errstate(divide="ignore", invalid="ignore"):
            right = start[:, 0] + (y - start[:, 1]) * (end[:, 0] - start[:, 0]) / rise > x
        found[first : first + block] = (up & right).sum(axis=1) - (down & right).sum(axis=1)
    return found
