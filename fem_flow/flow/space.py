"""Taylor-Hood spaces on a curved mesh: velocity P2 on the mesh nodes, pressure P1 on its corners.

Degrees of freedom are numbered by us, so that a velocity value belongs to the mesh node of the same number; scikit-fem
gives the shape functions, the isoparametric mapping and the quadrature. Every integral carries the measure: dx dy in the
plane, r dx dr in axisymmetric flow (the 2 pi enters in reported figures only).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from skfem import CellBasis, ElementTriP2, MeshTri2

from fem_flow.flow.reference import p1_values, p2_values, quadrature_order
from fem_flow.part.mesh import MeshData


@dataclass(frozen=True)
class CellGroup:
    """Cells that share a quadrature rule.

    Attributes
    ----------
    index : (E,) cell numbers
    nodes : (E, 6); corners : (E, 3) pressure numbers
    phi : (q, 6); psi : (q, 3) shape functions at the quadrature points
    gx, gy : (E, q, 6) derivatives of the velocity shapes, in scaled length
    w : (E, q) quadrature weight times measure
    r : (E, q) radius, or None in the plane
    """

    index: np.ndarray
    nodes: np.ndarray
    corners: np.ndarray
    phi: np.ndarray
    psi: np.ndarray
    gx: np.ndarray
    gy: np.ndarray
    w: np.ndarray
    r: np.ndarray | None


class Space:
    """The discrete spaces of one mesh in scaled length.

    Attributes
    ----------
    kind : ``"planar"`` or ``"axisymmetric"``
    points : (n_nodes, 2) scaled
    cells : (n_cells, 6)
    n_velocity : nodes; n_pressure : corner nodes
    pressure_of_node : (n_nodes,) pressure number of a corner node, -1 for a middle node
    groups : tuple of CellGroup (straight cells, then curved cells)
    """

    def __init__(self, mesh: MeshData, kind: str, length: float, extra_order: int = 0):
        self.kind = kind
        self.length = length
        self.points = mesh.points / length
        self.cells = mesh.cells
        self.n_velocity = len(mesh.points)
        corner_nodes = np.unique(mesh.cells[:, :3])
        self.corner_nodes = corner_nodes
        self.n_pressure = len(corner_nodes)
        self.pressure_of_node = np.full(self.n_velocity, -1, dtype=np.int64)
        self.pressure_of_node[corner_nodes] = np.arange(self.n_pressure)
        self._extra = extra_order

    @cached_property
    def groups(self) -> tuple[CellGroup, ...]:
        """The cells with their quadrature; made when first asked for and not pickled."""
        return tuple(self._group(index, curved) for index, curved in self._split() if len(index))

    def __getstate__(self):
        return {key: value for key, value in self.__dict__.items() if key != "groups"}

    @property
    def axisymmetric(self) -> bool:
        return self.kind == "axisymmetric"

    def skfem_mesh(self) -> MeshTri2:
        """The same mesh for scikit-fem, its corners and cells in our order."""
        return MeshTri2(self.points.T.copy(), self.cells.T.astype(np.int32))

    def measure(self, xy: np.ndarray) -> np.ndarray:
        """Weight of an integral at points (..., 2): 1 in the plane, r in axisymmetric flow."""
        return xy[..., 1] if self.axisymmetric else np.ones(xy.shape[:-1])

    def _split(self):
        corners = self.points[self.cells[:, :3]]
        middles = self.points[self.cells[:, 3:]]
        straight = 0.5 * (corners + np.roll(corners, -1, axis=1))
        size = np.linalg.norm(corners - np.roll(corners, -1, axis=1), axis=2).max(axis=1)
        curved = np.linalg.norm(middles - straight, axis=2).max(axis=1) > 1e-9 * size
        return (np.flatnonzero(~curved), False), (np.flatnonzero(curved), True)

    def _group(self, index, curved):
        mesh = self.skfem_mesh()
        order = quadrature_order(self.kind, curved) + self._extra
        basis = CellBasis(mesh, ElementTriP2(), intorder=order, elements=index)
        gradients = [np.asarray(f[0].grad) for f in basis.basis]
        gx = np.stack([g[0] for g in gradients], axis=-1)
        gy = np.stack([g[1] for g in gradients], axis=-1)
        phi, psi = p2_values(basis.X.T), p1_values(basis.X.T)
        nodes = self.cells[index]
        y = self.points[nodes][:, :, 1] @ phi.T
        w = np.asarray(basis.dx) * (y if self.axisymmetric else 1.0)
        if self.axisymmetric and y.min() <= 0.0:
            raise ValueError("a quadrature point lies at r <= 0: the mesh crosses the axis")
        r = y if self.axisymmetric else None
        corners = self.pressure_of_node[nodes[:, :3]]
        return CellGroup(index, nodes, corners, phi, psi, gx, gy, w, r)
