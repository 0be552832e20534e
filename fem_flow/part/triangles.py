"""Work on the triangles themselves: their sides, their quality, and corner triangles with two sides on the boundary."""

from __future__ import annotations

import numpy as np

LOCAL = ((0, 1), (1, 2), (2, 0))
LEAST_FLIP = 0.25
"""A corner triangle is mended by flipping only if both new triangles keep this scaled Jacobian."""


def sides(cells: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Distinct sides (n, 2) of triangles (m, 3), smaller node first and sorted, and the side number of 01, 12, 20: (m, 3)."""
    pairs = np.sort(np.concatenate([cells[:, [a, b]] for a, b in LOCAL]), axis=1)
    n = int(cells.max()) + 1
    key, back = np.unique(pairs[:, 0] * n + pairs[:, 1], return_inverse=True)
    return np.stack([key // n, key % n], axis=1), back.reshape(3, -1).T


def found_in(values: np.ndarray, pool: np.ndarray) -> np.ndarray:
    """Which of the integers are in the pool; by sorting, several times faster than numpy's hashing of large keys."""
    if not len(pool):
        return np.zeros(values.shape, bool)
    pool = np.sort(pool)
    return pool[np.minimum(np.searchsorted(pool, values), len(pool) - 1)] == values


def scaled_jacobians(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Smallest scaled Jacobian of each quadratic triangle (m, 6): 1 for a straight equilateral one, <= 0 for a folded one.

    The determinant of the map is a quadratic over the triangle; its six Bezier coefficients bound it from below. It is
    divided by the largest product of two of the three side vectors of the straight triangle, times sin 60 degrees.
    """
    x = points[cells]
    (a, b, c), (ab, bc, ca) = (x[:, i] for i in range(3)), (x[:, i] for i in range(3, 6))
    corner = x[:, :3]
    slopes = np.stack(
        [
            np.stack([4 * ab - 3 * a - b, 4 * ca - 3 * a - c], axis=1),
            np.stack([a + 3 * b - 4 * ab, a - c + 4 * (bc - ab)], axis=1),
            np.stack([a - b + 4 * (bc - ca), a + 3 * c - 4 * ca], axis=1),
        ],
        axis=1,
    )
    halves = 0.5 * (slopes + slopes[:, [1, 2, 0]])
    at_corner, at_middle = (cross(s[:, :, 0], s[:, :, 1]) for s in (slopes, halves))
    bezier = np.concatenate([at_corner, 2 * at_middle - 0.5 * (at_corner + at_corner[:, [1, 2, 0]])], axis=1)
    length = np.linalg.norm(corner - corner[:, [1, 2, 0]], axis=2)
    longest = np.sort(length, axis=1)
    return bezier.min(axis=1) / (longest[:, 1] * longest[:, 2]) * (2 / np.sqrt(3))


def straight_quality(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Scaled Jacobian of straight triangles (m, 3)."""
    x = points[cells]
    area = cross(x[:, 1] - x[:, 0], x[:, 2] - x[:, 0])
    length = np.sort(np.linalg.norm(x - x[:, [1, 2, 0]], axis=2), axis=1)
    return area / (length[:, 1] * length[:, 2]) * (2 / np.sqrt(3))


def free_corners(
    points: np.ndarray, cells: np.ndarray, surface: np.ndarray, outer: np.ndarray, fixed: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Mend triangles that have two or three sides on the boundary: their pressure is over-constrained.

    The side inside is flipped where that leaves good triangles, otherwise a node is put into the triangle.

    Parameters
    ----------
    points : (n, 2); cells : (m, 3) anticlockwise; surface : (m,) surface number of each cell
    outer : (k, 2) sides on the boundary; fixed : (k, 2) sides that must stay (boundary, sections)

    Returns
    -------
    points, cells, surface : new arrays
    """
    pairs, side_of = sides(cells)
    n = len(points)
    key = pairs[:, 0] * n + pairs[:, 1]

    def marked(edges):
        s = np.sort(edges, axis=1)
        return found_in(key, s[:, 0] * n + s[:, 1])

    on_boundary, must_stay = marked(outer), marked(fixed)
    cells, surface = cells.copy(), surface.copy()
    owners: dict[int, list[int]] = {}
    crowded = np.flatnonzero(on_boundary[side_of].sum(axis=1) >= 2)
    if not len(crowded):
        return points, cells, surface
    inner = {int(side_of[c, k]) for c in crowded for k in range(3) if not on_boundary[side_of[c, k]]}
    for c, k in zip(*np.nonzero(found_in(side_of, np.array(list(inner)))), strict=True):
        owners.setdefault(int(side_of[c, k]), []).append(int(c))
    touched, new_points, new_cells, new_surface = set(), [], [], []
    for c in map(int, crowded):
        free = [k for k in range(3) if not on_boundary[side_of[c, k]]]
        if len(free) == 1 and not must_stay[side_of[c, free[0]]] and c not in touched:
            k = free[0]
            other = next(o for o in owners[int(side_of[c, k])] if o != c)
            if other not in touched and on_boundary[side_of[other]].sum() == 0:
                a, b, apex = (int(cells[c, (k + i) % 3]) for i in range(3))
                far = int(next(v for v in cells[other] if v not in (a, b)))
                pair = np.array([[apex, a, far], [apex, far, b]])
                if straight_quality(points, pair).min() > LEAST_FLIP:
                    cells[c], cells[other] = pair
                    touched |= {c, other}
                    continue
        if c in touched:
            continue
        a, b, d = (int(v) for v in cells[c])
        m = n + len(new_points)
        new_points.append(points[[a, b, d]].mean(axis=0))
        cells[c] = (a, b, m)
        new_cells += [(b, d, m), (d, a, m)]
        new_surface += [surface[c]] * 2
        touched.add(c)
    if new_points:
        points = np.concatenate([points, np.array(new_points)])
        cells = np.concatenate([cells, np.array(new_cells)])
        surface = np.concatenate([surface, np.array(new_surface)])
    return points, cells, surface


def crowded_cells(cells: np.ndarray, boundaries: dict[str, np.ndarray]) -> int:
    """How many cells (m, 6) have two or more sides on the boundary."""
    middles = np.concatenate([e[:, 2] for e in boundaries.values()])
    return int((found_in(cells[:, 3:], middles).sum(axis=1) >= 2).sum())


def cross(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """a_x b_y - a_y b_x of vectors (..., 2)."""
    return a[..., 0] * b[..., 1] - a[..., 1] * b[..., 0]
