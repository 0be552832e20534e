"""Geometry of ports and sections that the laws, scales and figures share."""

from __future__ import annotations

import numpy as np

from fem_flow.flow.boundary import Boundary
from fem_flow.part.mesh import MeshData


def is_straight(piece: Boundary) -> bool:
    """Whether all edges of a port or section lie on one line."""
    return bool(np.abs(piece.normal - piece.normal[0, 0]).max() < 1e-6)


def hydraulic_diameter(piece: Boundary, symmetry_nodes: np.ndarray) -> float:
    """Scaled hydraulic diameter: bore of a tube, twice the gap of an annulus, twice the width of a planar section.

    A section that ends on the axis is a tube, one that ends on a symmetry line is counted whole.
    """
    length = piece.length
    if np.isin(piece.nodes, symmetry_nodes).any():
        length *= 2
    return 2 * length


def flow_factor(kind: str, depth: float | None, length: float, images: int = 1) -> float:
    """Whole-part flow (m^3/s) of a scaled flux at a scale velocity of 1 m/s: depth L or 2 pi L^2, times the mirror images."""
    return images * (depth * length if kind == "planar" else 2 * np.pi * length**2)


def mirrors(mesh: MeshData) -> list[tuple[np.ndarray, np.ndarray]]:
    """Symmetry lines of a mesh, each once: (a point in m, unit normal). The whole part has 2^k of what is modelled.

    Two parallel lines bound one cell of an endless row; figures are then those of the cell, and neither line is listed.
    """
    edges = [mesh.boundaries[name][:, :2] for name in mesh.names("symmetry")]
    if not edges:
        return []
    start, end = mesh.points[np.concatenate(edges)].transpose(1, 0, 2)
    return distinct_lines(start, end, 1e-6 * np.ptp(mesh.points, axis=0).max())


def distinct_lines(start: np.ndarray, end: np.ndarray, size: float) -> list[tuple[np.ndarray, np.ndarray]]:
    """Lines through segments (n, 2) to (n, 2), each once, as (point, unit normal); none of two parallel ones."""
    along = (end - start) / np.linalg.norm(end - start, axis=1)[:, None]
    found: list[tuple[np.ndarray, np.ndarray]] = []
    for point, t in zip(start, along, strict=True):
        if not any(abs(n @ t) < 1e-6 and abs((point - p) @ n) < size for p, n in found):
            found.append((point, np.array([t[1], -t[0]])))
    return [(p, n) for p, n in found if sum(abs(n[0] * m[1] - n[1] * m[0]) < 1e-6 for _, m in found) == 1]
