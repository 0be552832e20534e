"""Finding points on a curved mesh: cells whose boxes hold the point, then Newton on the quadratic map."""

from __future__ import annotations

import numpy as np
from scipy.spatial import cKDTree

from fem_flow.flow.reference import p1_values, p2_values

MARGIN = 1e-3
"""A point within a thousandth of the local element of the boundary counts as on it."""

NEIGHBOURS = 4
"""How many near cells are tried for the value at a point outside the mesh."""


STEPS = 15
REACH = 1.2
"""Newton's steps, and how far from the centre of the reference triangle they are held, along and across a cell."""


class Finder:
    """Locate points in curved triangles.

    Every cell has a box that surely holds it; boxes are listed in square bins of about their own size, a level for each
    power of two, so that cells of very different size and shape are found equally well.

    Parameters
    ----------
    points : (n_nodes, 2); cells : (n_cells, 6)
    """

    def __init__(self, points: np.ndarray, cells: np.ndarray):
        a, b, c, ab, bc, ca = np.moveaxis(points[cells], 1, 0)
        self._tree = cKDTree((a + b + c) / 3)
        self._map = np.stack(
            [a, 4 * ab - 3 * a - b, 4 * ca - 3 * a - c, 2 * (a + b) - 4 * ab, 4 * (a + bc - ab - ca), 2 * (a + c) - 4 * ca]
        )
        hull = np.stack([a, b, c, 2 * ab - 0.5 * (a + b), 2 * bc - 0.5 * (b + c), 2 * ca - 0.5 * (c + a)])
        low, high = hull.min(axis=0), hull.max(axis=0)
        extent = (high - low).max(axis=1)
        self._extent = extent
        metric = np.einsum("ejx,ekx->ejk", *[np.stack([b - a, c - a], axis=1)] * 2)
        angle = 0.5 * np.arctan2(2 * metric[:, 0, 1], metric[:, 0, 0] - metric[:, 1, 1])
        self._along = np.stack([np.cos(angle), np.sin(angle)])
        room = 4 * MARGIN * extent[:, None]
        self._low, self._high = low - room, high + room
        self._origin = self._low.min(axis=0)
        level = np.ceil(np.log2(1.1 * extent))
        self._levels = [self._bins(power, np.flatnonzero(level == power)) for power in np.unique(level)]

    def locate(self, at: np.ndarray, with_linear: bool = False):
        """Cell, quadratic shape values and inside flag of each point.

        Points outside get a near cell, with the reference coordinates clipped to it.

        Returns
        -------
        cells (n,), shapes (n, 6), inside (n,) [, linear shapes (n, 3)]
        """
        at = np.asarray(at, dtype=float).reshape(-1, 2)
        best = np.full(len(at), np.inf)
        cell = np.zeros(len(at), dtype=np.int64)
        where = np.full((len(at), 2), 1 / 3)
        finite = np.flatnonzero(np.isfinite(at).all(axis=1))
        low, high = self._low.min(axis=0), self._high.max(axis=0)
        at = np.clip(at, 2 * low - high, 2 * high - low)
        for bins in self._levels:
            todo = finite[best[finite] > 1e-9]
            self._improve(at, *self._candidates(bins, at, todo), best, cell, where)
        inside = best <= MARGIN
        lost = finite[~inside[finite]]
        count = min(NEIGHBOURS, len(self._extent))
        near = self._tree.query(at[lost], k=count)[1].reshape(-1)
        self._improve(at, np.repeat(lost, count), near, best, cell, where)
        where = _clip(where)
        result = (cell, p2_values(where), inside)
        return (*result, p1_values(where)) if with_linear else result

    def _bins(self, level, members):
        """Cells of one level listed by the bins that their boxes touch (at most four): size, sorted keys, cells."""
        size = 2.0**level
        first = np.floor((self._low[members] - self._origin) / size).astype(np.int64)
        last = np.floor((self._high[members] - self._origin) / size).astype(np.int64)
        keys, cells = [], []
        for dx in (0, 1):
            for dy in (0, 1):
                touched = (first[:, 0] + dx <= last[:, 0]) & (first[:, 1] + dy <= last[:, 1])
                keys.append(_key(first[touched] + [dx, dy]))
                cells.append(members[touched])
        keys, cells = np.concatenate(keys), np.concatenate(cells)
        order = np.argsort(keys, kind="stable")
        return size, keys[order], cells[order]

    def _candidates(self, bins, at, todo):
        """Pairs (point, cell) of one level with the point in the box of the cell."""
        size, keys, cells = bins
        wanted = _key(np.floor((at[todo] - self._origin) / size).astype(np.int64))
        start, stop = np.searchsorted(keys, wanted), np.searchsorted(keys, wanted, side="right")
        point = np.repeat(todo, stop - start)
        place = np.arange(len(point)) - np.repeat(np.cumsum(stop - start) - (stop - start), stop - start)
        cell = cells[np.repeat(start, stop - start) + place]
        held = ((at[point] >= self._low[cell]) & (at[point] <= self._high[cell])).all(axis=1)
        return point[held], cell[held]

    def _improve(self, at, point, tried, best, cell, where):
        """Keep for each point the cell in which it lies, or the one that it misses by least."""
        local, outside = self._invert(tried, at[point])
        order = np.lexsort((outside, point))
        first = order[np.unique(point[order], return_index=True)[1]]
        better = first[outside[first] < best[point[first]]]
        best[point[better]], cell[point[better]], where[point[better]] = outside[better], tried[better], local[better]

    def _invert(self, cells, at):
        """Reference coordinates of points in given cells, and how far outside the reference triangle they are.

        In a thin curved cell the first step leads many thicknesses away: it is held across the cell alone, so that what it has
        found along the cell is kept.
        """
        local = np.full((2, len(at)), 1 / 3)
        miss = np.full(len(at), np.inf)
        active = np.arange(len(at))
        lost = np.zeros(len(at), dtype=bool)
        for number in range(STEPS):
            c0, c1, c2, c3, c4, c5 = self._map[:, cells[active]]
            s, t = local[:, active, None]
            gap = at[active] - (c0 + s * (c1 + s * c3 + t * c4) + t * (c2 + t * c5))
            miss[active] = np.abs(gap).max(axis=1) / self._extent[cells[active]]
            by_s, by_t = c1 + 2 * s * c3 + t * c4, c2 + s * c4 + 2 * t * c5
            det = by_s[:, 0] * by_t[:, 1] - by_t[:, 0] * by_s[:, 1]
            det = np.where(np.abs(det) < 1e-300, 1e-300, det)
            (x, y), (xs, ys), (xt, yt) = gap.T, by_s.T, by_t.T
            step = np.stack([yt * x - xt * y, xs * y - ys * x]) / det
            wanted = local[:, active] + step
            local[:, active] = self._held(cells[active], wanted)
            astray = np.abs(local[:, active] - wanted).max(axis=0) > 1e-12
            lost[active] = astray & (number >= 3)
            active = active[(np.abs(step).max(axis=0) > 1e-12) & ~lost[active]]
            if not len(active):
                break
        outside = np.maximum.reduce([-local[0], -local[1], local.sum(axis=0) - 1.0, np.zeros(len(at))])
        lost[active] = miss[active] > 1e-8
        return local.T, np.where(lost, 1e3 + miss, outside)

    def _held(self, cells, local):
        c, s = self._along[:, cells]
        x, y = local - 1 / 3
        along, across = np.clip(c * x + s * y, -REACH, REACH), np.clip(c * y - s * x, -REACH, REACH)
        return np.stack([c * along - s * across, s * along + c * across]) + 1 / 3


def _key(pair):
    """One number for a pair of bin numbers (below 2^31 each); points left of or below the mesh are in no bin."""
    return np.where((pair < 0).any(axis=-1), -1, (pair[..., 0] << 31) + pair[..., 1])


def _clip(local):
    local = np.maximum(local, 0.0)
    total = local.sum(axis=1, keepdims=True)
    return np.where(total > 1.0, local / np.maximum(total, 1.0), local)
