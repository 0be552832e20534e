"""Integrals along boundaries and sections: quadratic edges with their own Gauss rule."""

from __future__ import annotations

from functools import cached_property

import numpy as np

from fem_flow.flow.reference import LOCAL_EDGES, REFERENCE_CORNERS, line_shapes, p2_gradients
from fem_flow.flow.space import Space


class Boundary:
    """The edges of one named boundary or section.

    Attributes
    ----------
    name : str
    edges : (m, 3) nodes (start, end, middle), the fluid (or the upstream side of a section) on the left
    nodes : (k,) its node numbers, sorted
    x : (m, q, 2) quadrature points; w : (m, q) weight times measure
    normal : (m, q, 2) unit normal to the right of the edge: outward on a boundary
    shapes : (q, 3)
    """

    def __init__(self, space: Space, name: str, edges: np.ndarray):
        self.space = space
        self.name = name
        self.edges = np.asarray(edges, dtype=np.int64).reshape(-1, 3)
        self.nodes = np.unique(self.edges)
        self.s, gauss, self.shapes, slopes = line_shapes()
        corners = space.points[self.edges]
        self.x = np.einsum("qi,eix->eqx", self.shapes, corners)
        along = np.einsum("qi,eix->eqx", slopes, corners)
        speed = np.linalg.norm(along, axis=2)
        self.tangent = along / speed[:, :, None]
        self.normal = np.stack([self.tangent[..., 1], -self.tangent[..., 0]], axis=-1)
        self.ds = gauss * speed
        self.w = self.ds * space.measure(self.x)

    @property
    def area(self) -> float:
        """Scaled area: length in the plane, int r ds in axisymmetric flow."""
        return float(self.w.sum())

    @property
    def length(self) -> float:
        return float(self.ds.sum())

    def at_points(self, nodal: np.ndarray) -> np.ndarray:
        """Trace (m, q) of a nodal P2 field (n_nodes,)."""
        return nodal[self.edges] @ self.shapes.T

    def normal_velocity(self, u: np.ndarray) -> np.ndarray:
        """u.n at the quadrature points, (m, q)."""
        return self.at_points(u[0]) * self.normal[..., 0] + self.at_points(u[1]) * self.normal[..., 1]

    def flux(self, u: np.ndarray) -> float:
        """int u.n along the positive normal."""
        return float((self.w * self.normal_velocity(u)).sum())

    def scatter(self, per_edge: np.ndarray) -> np.ndarray:
        """Sum per-edge vectors (m, 3) into a nodal vector (n_nodes,)."""
        return np.bincount(self.edges.ravel(), weights=per_edge.ravel(), minlength=self.space.n_velocity)

    def load(self, density: np.ndarray) -> np.ndarray:
        """Nodal vector int density phi of a density given at the quadrature points (m, q)."""
        return self.scatter((self.w * density) @ self.shapes)

    def normal_load(self) -> np.ndarray:
        """(2, n_nodes): int n phi."""
        return np.stack([self.load(self.normal[..., 0]), self.load(self.normal[..., 1])])

    @property
    def end_tangents(self) -> tuple[np.ndarray, np.ndarray]:
        """Unit tangents (m, 2) at the start and at the end of each edge, in its direction."""
        p = self.space.points[self.edges]
        start, end = 4 * p[:, 2] - 3 * p[:, 0] - p[:, 1], p[:, 0] + 3 * p[:, 1] - 4 * p[:, 2]
        return tuple(t / np.linalg.norm(t, axis=1)[:, None] for t in (start, end))

    @cached_property
    def cells_and_sides(self) -> tuple[np.ndarray, np.ndarray]:
        """For each edge the cell on its left and which side of that cell it is."""
        return find_cells(self.space.cells, self.edges)

    @cached_property
    def _slopes(self):
        """Derivatives of the six cell shapes at the edge points: (m, q, 6, 2)."""
        cells, sides = self.cells_and_sides
        slopes = np.empty((len(cells), len(self.s), 6, 2))
        for side, (a, b, _) in enumerate(LOCAL_EDGES):
            chosen = np.flatnonzero(sides == side)
            start, end = REFERENCE_CORNERS[a], REFERENCE_CORNERS[b]
            reference = p2_gradients(start + self.s[:, None] * (end - start))
            slopes[chosen] = physical_gradients(self.space.points[self.space.cells[cells[chosen]]], reference)
        return slopes

    def velocity_gradient(self, u: np.ndarray) -> np.ndarray:
        """(m, q, 2, 2): [..., i, j] = d u_i / d x_j from the cell on the left."""
        cells, _ = self.cells_and_sides
        nodal = u[:, self.space.cells[cells]]
        return np.einsum("cen,eqnx->eqcx", nodal, self._slopes)

    def pressure(self, p: np.ndarray) -> np.ndarray:
        """P1 pressure at the edge points, (m, q); continuous, so the same from both sides."""
        ends = p[self.space.pressure_of_node[self.edges[:, :2]]]
        return ends[:, :1] * (1 - self.s) + ends[:, 1:] * self.s

    def traction(self, u: np.ndarray, p: np.ndarray, mu: float) -> np.ndarray:
        """(m, q, 2): stress of the computed fields on the positive normal."""
        grad = self.velocity_gradient(u)
        viscous = mu * np.einsum("eqij,eqj->eqi", grad + np.swapaxes(grad, 2, 3), self.normal)
        return viscous - self.pressure(p)[..., None] * self.normal


def connected_runs(edges: np.ndarray) -> list[np.ndarray]:
    """Connected runs of directed edges (m, 3): edge numbers of each run in order along it."""
    after = {int(edge[0]): number for number, edge in enumerate(edges)}
    ends = {int(node) for node in edges[:, 1]}
    left = set(range(len(edges)))
    runs = []
    while left:
        first = next((number for number in sorted(left) if int(edges[number, 0]) not in ends), min(left))
        run, number = [], first
        while number in left:
            left.discard(number)
            run.append(number)
            number = after.get(int(edges[number, 1]), -1)
        ends -= {int(edges[k, 1]) for k in run}
        runs.append(np.array(run))
    return runs


def physical_gradients(corners: np.ndarray, reference: np.ndarray) -> np.ndarray:
    """Shape gradients in space: nodes (m, 6, 2), reference gradients (q, 6, 2) -> (m, q, 6, 2)."""
    jacobian = np.einsum("mnx,qnk->mqxk", corners, reference)
    return np.einsum("qnk,mqkx->mqnx", reference, np.linalg.inv(jacobian))


def find_cells(cells: np.ndarray, edges: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The cell that has each directed edge (start, end, ...), and which of its sides it is.

    Raises
    ------
    ValueError : an edge is not a side of any cell, or runs against it
    """
    n = int(cells.max()) + 1
    keys = np.concatenate([cells[:, a].astype(np.int64) * n + cells[:, b] for a, b, _ in LOCAL_EDGES])
    order = np.argsort(keys)
    wanted = edges[:, 0].astype(np.int64) * n + edges[:, 1]
    found = order[np.minimum(np.searchsorted(keys, wanted, sorter=order), len(order) - 1)]
    if not np.array_equal(keys[found], wanted):
        raise ValueError("an edge of a named boundary is not a side of a cell, or runs against it")
    return found % len(cells), found // len(cells)
