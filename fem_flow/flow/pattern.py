"""The sparsity pattern of a system, made once, and the places in it that element and edge blocks are written to."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sparse

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.space import Space


class Pattern:
    """A fixed CSR pattern with explicit zeros, so that an analysis of it can be kept.

    Unknowns are numbered velocity x, velocity y (in the nodal frames), pressure, port pressures; ``position`` gives the row of
    each in the matrix, -1 where it is fixed. Entries of fixed unknowns go to one spare place at the end of ``data``.

    Parameters
    ----------
    space : the mesh
    position : (size,) row numbers
    open_ports : ports whose edges carry a block of their own
    unknown_ports : ports whose pressure is unknown, in their order
    """

    def __init__(self, space: Space, position: np.ndarray, open_ports: list[Boundary], unknown_ports: list[Boundary]):
        self.space, self._position = space, position
        self.rows = int(position.max()) + 1
        n = space.n_velocity
        pairs = []
        for g in space.groups:
            velocity = np.concatenate([g.nodes, n + g.nodes], axis=1)
            pressure = 2 * n + g.corners
            pairs += [_pairs(velocity, velocity), _pairs(velocity, pressure), _pairs(pressure, velocity)]
        for k, port in enumerate(unknown_ports):
            dofs = border_dofs(port)
            own = np.full(len(dofs), 2 * n + space.n_pressure + k)
            pairs += [(own, dofs), (dofs, own), (own[:1], own[:1])]
        pieces = self._slots_of(pairs)
        rest = pieces[3 * len(space.groups) :]
        self._velocity = [pieces[3 * k].reshape(-1, 2, 6, 2, 6) for k in range(len(space.groups))]
        self._gradient = [pieces[3 * k + 1].reshape(-1, 2, 6, 3) for k in range(len(space.groups))]
        self._divergence = [pieces[3 * k + 2].reshape(-1, 3, 2, 6) for k in range(len(space.groups))]
        self._borders = {
            port.name: (rest[3 * k], rest[3 * k + 1], rest[3 * k + 2]) for k, port in enumerate(unknown_ports)
        }
        self._edges = {port.name: self._edge_slots(port.edges) for port in open_ports}
        del self._lookup

    def zeros(self) -> np.ndarray:
        """Values of an empty matrix, with the spare place at the end."""
        return np.zeros(len(self.indices) + 1)

    def matrix(self, data: np.ndarray) -> sparse.csr_matrix:
        """The matrix of these values."""
        return sparse.csr_matrix((data[:-1], self.indices, self.indptr), shape=(self.rows, self.rows))

    def add_velocity(self, data: np.ndarray, group: int, blocks: np.ndarray) -> None:
        """Add blocks (E, 2, 6, 2, 6): test component and node, velocity component and node."""
        _add(data, self._velocity[group], blocks)

    def add_pressure(self, data: np.ndarray, group: int, blocks: np.ndarray) -> None:
        """Add blocks (E, 2, 6, 3) of -int p div v, and their transpose for continuity."""
        _add(data, self._gradient[group], blocks)
        _add(data, self._divergence[group], blocks.transpose(0, 3, 1, 2))

    def add_border(self, data: np.ndarray, port: str, row: np.ndarray, column: np.ndarray, diagonal: float) -> None:
        """Add the row, the column (each over `border_dofs`) and the diagonal of an unknown port pressure."""
        for slots, values in zip(self._borders[port], (row, column, np.array([diagonal])), strict=True):
            _add(data, slots, values)

    def add_edges(self, data: np.ndarray, port: str, blocks: np.ndarray) -> None:
        """Add blocks (m, 2, 3, 2, 3) of the edges of an open port."""
        _add(data, self._edges[port], blocks)

    def _slots_of(self, pairs):
        """Make the pattern from (rows, columns) pairs of unknowns; the place of each pair in it."""
        rows = np.concatenate([self._position[r] for r, _ in pairs])
        columns = np.concatenate([self._position[c] for _, c in pairs])
        inside = (rows >= 0) & (columns >= 0)
        shape = (self.rows, self.rows)
        pattern = sparse.csr_matrix((np.ones(inside.sum()), (rows[inside], columns[inside])), shape=shape)
        pattern.sort_indices()
        self.indptr, self.indices = pattern.indptr.astype(np.int32), pattern.indices.astype(np.int32)
        self._lookup = sparse.csr_matrix((np.arange(1.0, pattern.nnz + 1), self.indices, self.indptr), shape=shape)
        slots = np.full(len(rows), pattern.nnz, dtype=np.int64)
        slots[inside] = self._find(rows[inside], columns[inside])
        return np.split(slots, np.cumsum([len(r) for r, _ in pairs])[:-1])

    def _find(self, rows, columns):
        return np.asarray(self._lookup[rows, columns]).ravel().astype(np.int64) - 1

    def _edge_slots(self, edges):
        slots = np.full((len(edges), 2, 3, 2, 3), len(self.indices), dtype=np.int64)
        dofs = self._position[np.stack([edges, self.space.n_velocity + edges], axis=1)]
        rows, columns = np.broadcast_arrays(dofs[:, :, :, None, None], dofs[:, None, None])
        inside = (rows >= 0) & (columns >= 0)
        if inside.any():
            slots[inside] = self._find(rows[inside], columns[inside])
        return slots


def border_dofs(port: Boundary) -> np.ndarray:
    """Velocity unknowns of a port's nodes: all x components, then all y components."""
    return np.concatenate([port.nodes, port.space.n_velocity + port.nodes])


def _pairs(rows, columns):
    r = np.broadcast_to(rows[:, :, None], (*rows.shape, columns.shape[1]))
    c = np.broadcast_to(columns[:, None, :], r.shape)
    return r.reshape(-1), c.reshape(-1)


def _add(data, slots, values):
    data += np.bincount(slots.ravel(), weights=values.ravel(), minlength=len(data))
