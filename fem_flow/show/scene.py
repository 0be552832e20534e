"""From nodal fields on curved quadratic triangles to what can be drawn: small flat triangles, edges, level lines.

Everything is built here with numpy from the quadratic shape functions; no filter of a graphics library ever sees a curved
cell, because those filters treat it as if it were straight.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Surface:
    """Small flat triangles with values at their corners.

    Attributes
    ----------
    points : (m, 2), in the unit of what was subdivided
    triangles : (k, 3), point numbers, anticlockwise
    values : name -> (m,)
    cell : (k,), the quadratic cell that each triangle is a piece of
    """

    points: np.ndarray
    triangles: np.ndarray
    values: dict[str, np.ndarray]
    cell: np.ndarray


def shape_functions(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """The six quadratic shape functions at (a, b) of the unit triangle; (n, 6), nodes in the order of ``MeshData.cells``."""
    c = 1.0 - a - b
    return np.stack([c * (2 * c - 1), a * (2 * a - 1), b * (2 * b - 1), 4 * c * a, 4 * a * b, 4 * b * c], axis=-1)


def lattice(parts: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """A unit triangle cut into parts² pieces: coordinates a and b of its points, and the pieces (parts², 3), anticlockwise."""
    number = {}
    for j in range(parts + 1):
        for i in range(parts + 1 - j):
            number[i, j] = len(number)
    pieces = []
    for j in range(parts):
        for i in range(parts - j):
            pieces.append((number[i, j], number[i + 1, j], number[i, j + 1]))
            if i + j < parts - 1:
                pieces.append((number[i + 1, j], number[i + 1, j + 1], number[i, j + 1]))
    ij = np.array(list(number), dtype=float)
    return ij[:, 0] / parts, ij[:, 1] / parts, np.array(pieces)


def parts_for(n_cells: int) -> int:
    """Into how many parts an edge is cut: smooth fields on small meshes, bounded work on large ones."""
    return 4 if n_cells <= 2_500 else 3 if n_cells <= 8_000 else 2


def subdivide(fields, parts: int | None = None) -> Surface:
    """Cut every curved cell of a ``NodalFields`` into parts² flat triangles.

    The values carried are ``speed``, ``u``, ``v`` (m/s), ``pressure`` (Pa) and ``stream``. Speed is formed from the
    interpolated velocity, so it is zero on a wall at rest and never negative.
    """
    cells = np.asarray(fields.cells)
    parts = parts or parts_for(len(cells))
    a, b, pieces = lattice(parts)
    shape = shape_functions(a, b)
    per_cell = len(a)

    def spread(nodal):
        return np.einsum("qk,ck->cq", shape, np.asarray(nodal)[cells]).ravel()

    points = np.column_stack([spread(fields.points[:, 0]), spread(fields.points[:, 1])])
    u, v = spread(fields.velocity[0]), spread(fields.velocity[1])
    values = {"u": u, "v": v, "speed": np.hypot(u, v), "pressure": spread(fields.pressure), "stream": spread(fields.stream)}
    triangles = (pieces[None] + per_cell * np.arange(len(cells))[:, None, None]).reshape(-1, 3)
    return Surface(points, triangles, values, np.repeat(np.arange(len(cells)), len(pieces)))


def edges(cells: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Every edge once as (start, end, middle) node numbers: those inside, and those of the boundary, fluid on their left."""
    cells = np.asarray(cells)
    every = np.concatenate([cells[:, [0, 1, 3]], cells[:, [1, 2, 4]], cells[:, [2, 0, 5]]])
    ends = np.sort(every[:, :2], axis=1).astype(np.int64)
    key = ends[:, 0] * (int(cells.max()) + 1) + ends[:, 1]
    _, first, count = np.unique(key, return_index=True, return_counts=True)
    return every[first[count == 2]], every[first[count == 1]]


def edge_lines(points: np.ndarray, edge: np.ndarray, parts: int = 6) -> np.ndarray:
    """Quadratic edges as polylines, shape (n_edges, parts + 1, 2); curved edges come out curved."""
    t = np.linspace(0.0, 1.0, parts + 1)
    weights = np.stack([(1 - t) * (1 - 2 * t), t * (2 * t - 1), 4 * t * (1 - t)])
    return np.einsum("kt,ekd->etd", weights, points[edge])


def level_lines(surface: Surface, name: str, levels, only_cells: np.ndarray | None = None, carry=()) -> dict[str, np.ndarray]:
    """Where a field takes the given levels, as straight segments across the small triangles.

    Returns ``start`` and ``end`` (n, 2), ``level`` (n,) and for every name in ``carry`` the mean of that field on the segment.
    ``only_cells`` restricts the search to the pieces of those quadratic cells.
    """
    triangles = surface.triangles
    if only_cells is not None:
        triangles = triangles[np.isin(surface.cell, only_cells)]
    value = surface.values[name][triangles]
    low, high = value.min(axis=1), value.max(axis=1)
    found: dict[str, list] = {"start": [], "end": [], "level": [], **{n: [] for n in carry}}
    for level in levels:
        hit = np.flatnonzero((low < level) & (high >= level))
        above = value[hit] >= level
        # the corner that is alone on its side; the line crosses the two edges that leave it
        lone = np.where(above.sum(axis=1) == 1, above.argmax(axis=1), (~above).argmax(axis=1))
        ends = []
        for step in (1, 2):
            other = (lone + step) % 3
            i, j = triangles[hit, lone], triangles[hit, other]
            vi, vj = value[hit, lone], value[hit, other]
            t = (level - vi) / (vj - vi)
            ends.append((i, j, t))
        cut = [surface.points[i] + t[:, None] * (surface.points[j] - surface.points[i]) for i, j, t in ends]
        found["start"].append(cut[0])
        found["end"].append(cut[1])
        found["level"].append(np.full(len(hit), level))
        for n in carry:
            f = surface.values[n]
            found[n].append(sum(f[i] + t * (f[j] - f[i]) for i, j, t in ends) / 2)
    empty = {"start": np.zeros((0, 2)), "end": np.zeros((0, 2))}
    return {n: np.concatenate(v) if v else empty.get(n, np.zeros(0)) for n, v in found.items()}


def mirrored(points: np.ndarray) -> np.ndarray:
    """The other half of an axisymmetric part: y becomes -y."""
    return points * np.array([1.0, -1.0])


def ribbon(points: np.ndarray, width: float, side: float, closed: bool) -> np.ndarray:
    """A line set off sideways: the outer rim of a band along a polyline, shape (n, 2).

    ``side`` is +1 for the left of the walking direction and -1 for the right. At a corner, where a point may stand twice, the
    rim is mitred, at most to twice the width.
    """
    length = np.linalg.norm(np.diff(points, axis=0), axis=1)
    new = np.concatenate([[True], length > 1e-9 * length.sum()])
    place = np.cumsum(new) - 1
    step = np.diff(points[new], axis=0)
    normal = side * np.column_stack([-step[:, 1], step[:, 0]]) / np.linalg.norm(step, axis=1)[:, None]
    before = np.vstack([normal[-1:] if closed else normal[:1], normal])
    after = np.vstack([normal, normal[:1] if closed else normal[-1:]])
    both = before + after
    size = np.maximum((both**2).sum(axis=1) / 2.0, 0.5)
    return points + (width * both / size[:, None])[place]


def outer_side(curve_points: np.ndarray, boundary_lines: np.ndarray) -> float:
    """On which side of a wall curve the metal lies: -1 where it runs as the boundary does (fluid on its left), else +1."""
    middle = boundary_lines[:, boundary_lines.shape[1] // 2]
    along = boundary_lines[:, -1] - boundary_lines[:, 0]
    centre = (curve_points[1:] + curve_points[:-1]) / 2
    step = np.diff(curve_points, axis=0)
    pick = np.unique(np.linspace(0, len(centre) - 1, min(len(centre), 25)).astype(int))
    nearest = np.array([((middle - centre[k]) ** 2).sum(axis=1).argmin() for k in pick])
    vote = np.sign((along[nearest] * step[pick]).sum(axis=1)).sum()
    return -1.0 if vote >= 0 else 1.0
