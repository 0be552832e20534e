"""Small structured meshes for tests that must not depend on the mesh generator."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from fem_flow.part.mesh import MeshData


def box_mesh(
    nx: int,
    ny: int,
    box: tuple[float, float, float, float] = (0.0, 1.0, 0.0, 1.0),
    names: dict[str, tuple[str, str]] | None = None,
    bend: Callable[[np.ndarray, np.ndarray], tuple[np.ndarray, np.ndarray]] | None = None,
    periodic: bool = False,
) -> MeshData:
    """A grid of nx x ny squares cut into curved triangles.

    ``names`` gives (name, role) of the sides ``left``, ``right``, ``bottom``, ``top``; ``bend`` maps the unit square's
    coordinates (after scaling to the box) to space, for all quadratic nodes. ``periodic`` joins left to right (a ring).
    """
    x0, x1, y0, y1 = box
    names = names or {s: (s, "wall") for s in ("left", "right", "bottom", "top")}
    columns = 2 * nx if periodic else 2 * nx + 1
    i, j = np.meshgrid(np.arange(columns), np.arange(2 * ny + 1), indexing="ij")
    x, y = x0 + (x1 - x0) * i / (2 * nx), y0 + (y1 - y0) * j / (2 * ny)
    if bend is not None:
        x, y = bend(x, y)
    points = np.stack([x.ravel(), y.ravel()], axis=1)

    def node(a, b):
        return (a % columns if periodic else a) * (2 * ny + 1) + b

    cells = []
    for a in range(0, 2 * nx, 2):
        for b in range(0, 2 * ny, 2):
            lower = [(a, b), (a + 2, b), (a + 2, b + 2)] if (a + b) // 2 % 2 == 0 else [(a, b), (a + 2, b), (a, b + 2)]
            upper = [(a, b), (a + 2, b + 2), (a, b + 2)] if (a + b) // 2 % 2 == 0 else [(a + 2, b), (a + 2, b + 2), (a, b + 2)]
            for t in (lower, upper):
                middles = [((p[0] + q[0]) // 2, (p[1] + q[1]) // 2) for p, q in zip(t, t[1:] + t[:1], strict=True)]
                cells.append([node(*p) for p in t + middles])
    sides = {
        "bottom": [(node(a, 0), node(a + 2, 0), node(a + 1, 0)) for a in range(0, 2 * nx, 2)],
        "right": [(node(2 * nx, b), node(2 * nx, b + 2), node(2 * nx, b + 1)) for b in range(0, 2 * ny, 2)],
        "top": [(node(a + 2, 2 * ny), node(a, 2 * ny), node(a + 1, 2 * ny)) for a in range(0, 2 * nx, 2)][::-1],
        "left": [(node(0, b + 2), node(0, b), node(0, b + 1)) for b in range(0, 2 * ny, 2)][::-1],
    }
    if periodic:
        sides = {s: sides[s] for s in ("bottom", "top")}
    boundaries, roles = {}, {}
    for side, edges in sides.items():
        name, role = names[side]
        boundaries[name] = np.concatenate([boundaries.get(name, np.zeros((0, 3), int)), np.array(edges)])
        roles[name] = role
    n = len(points)
    return MeshData(
        points, np.array(cells), boundaries, roles, {}, {}, np.full(n, -1), np.full(n, np.nan), (), min(x1 - x0, y1 - y0), 1.0
    )
