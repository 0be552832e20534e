"""Which velocity components are fixed, and in which nodal frame.

Where several boundaries meet, the stronger one wins: walls at rest and closed ports, then sliding walls, then ports with a
given profile, then directions (symmetry, slip walls and the axis fix their normal component, ports with a pressure their
tangential one). Two different directions at a node fix both components, and no velocity is imposed through a boundary that
lets nothing through: where a sliding wall or a given profile meets a slip wall, its part across that wall is taken out.

Normals at nodes are those of the mass balance, int n phi: so the sum over the nodes of a curved slip wall lets nothing pass.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.profile import developed_profile
from fem_flow.flow.sliding import wall_direction

CROSSING = np.sin(np.radians(10.0))
"""Directions that differ by less than 10 degrees are one: curved edges of a smooth wall meet at such small angles."""


@dataclass(frozen=True)
class Frames:
    """Nodal frames: component 0 along (cos, sin), component 1 along (-sin, cos).

    ``turned`` are the nodes whose frame is not the x-y frame; ``cos`` and ``sin`` are (n_nodes,).
    """

    turned: np.ndarray
    cos: np.ndarray
    sin: np.ndarray

    def to_frame(self, v: np.ndarray) -> np.ndarray:
        """(2, n) Cartesian components to frame components."""
        return np.stack([self.cos * v[0] + self.sin * v[1], self.cos * v[1] - self.sin * v[0]])

    def to_cartesian(self, v: np.ndarray) -> np.ndarray:
        return np.stack([self.cos * v[0] - self.sin * v[1], self.sin * v[0] + self.cos * v[1]])


@dataclass(frozen=True)
class Fixed:
    """Fixed velocity components: ``mask`` and ``values`` are (2, n_nodes) in the frames."""

    frames: Frames
    mask: np.ndarray
    values: np.ndarray


@dataclass(frozen=True)
class _Directions:
    """Per node the one direction that a set of boundaries fixes: ``vector`` (2, n); ``count`` (n,) is 2 where there are two."""

    vector: np.ndarray
    count: np.ndarray

    def without(self, v: np.ndarray) -> np.ndarray:
        """The vectors (2, n) without their part along the direction; zero where there are two."""
        along = v - (v * self.vector).sum(axis=0) * self.vector
        return np.where(self.count == 0, v, np.where(self.count == 1, along, 0.0))


def fix_velocities(
    boundaries: dict[str, Boundary],
    resting: list[str],
    sliding: dict[str, float],
    flows: dict[str, float],
    normal_zero: list[str],
    tangent_zero: list[str],
) -> Fixed:
    """Collect the essential conditions; ``flows`` are scaled flows into the passage, ``sliding`` scaled wall velocities.

    Raises
    ------
    CaseError : a sliding wall turns back on itself or has a sharp corner
    """
    n = next(iter(boundaries.values())).space.n_velocity
    owner = np.zeros(n, dtype=bool)
    for name in resting:
        owner[boundaries[name].nodes] = True
    moving = np.zeros((2, n))
    for name, speed in sliding.items():
        velocity = speed * wall_direction(boundaries[name])
        free = boundaries[name].nodes[~owner[boundaries[name].nodes]]
        moving[:, free] = velocity[:, free]
        owner[free] = True
    tight = _normals(boundaries, [*normal_zero, *sliding], n)
    cartesian = tight.without(moving)
    is_wall = owner.copy()
    for name, flow in flows.items():
        _impose_profile(boundaries[name], flow, cartesian, owner, is_wall, tight)
    directions = _normals(boundaries, normal_zero, n)
    for name in tangent_zero:
        directions = _with_tangent(directions, boundaries[name])
    return _assemble(owner, cartesian, directions)


def _impose_profile(port, flow, cartesian, owner, is_wall, tight):
    """Set the developed profile on the free nodes of a port, its discrete flux the flow asked for."""
    inward = -port.normal[0, 0]
    ends = {int(node): float(inward @ cartesian[:, node]) for node in port.nodes if is_wall[node]}
    free = port.nodes[~owner[port.nodes]]
    profile = np.zeros_like(cartesian)
    profile[:, free] = (inward[:, None] * developed_profile(port, flow, ends))[:, free]
    kept = tight.without(profile)
    changed = np.hypot(*(kept - profile)) > 1e-14 * np.abs(profile).max(initial=0.0)
    cartesian[:, free] = kept[:, free]
    owner[free] = True
    if changed.any():
        scalable = free[~changed[free]]
        whole, part = -port.flux(cartesian), np.zeros_like(cartesian)
        part[:, scalable] = cartesian[:, scalable]
        part_flow = -port.flux(part)
        cartesian[:, scalable] *= (flow - (whole - part_flow)) / part_flow if part_flow else 1.0


def _normals(boundaries, names, n):
    """Normal directions at the nodes of named boundaries; two where edges meet at an angle."""
    if not names:
        return _Directions(np.zeros((2, n)), np.zeros(n, dtype=int))
    nodes = np.concatenate([boundaries[name].edges.ravel() for name in names])
    exact, plain = (np.concatenate([_edge_normals(boundaries[name], weight) for name in names]) for weight in ("w", "ds"))
    total = np.stack([np.bincount(nodes, weights=exact[:, k], minlength=n) for k in (0, 1)])
    rough = np.stack([np.bincount(nodes, weights=plain[:, k], minlength=n) for k in (0, 1)])
    on_axis = np.hypot(*total) < 1e-9 * np.hypot(*rough)
    total = np.where(on_axis, rough, total)
    size = np.hypot(*total)
    vector = np.divide(total, size, out=np.zeros_like(total), where=size > 0)
    count = np.zeros(n, dtype=int)
    count[nodes] = 1
    own = plain / np.hypot(*plain.T)[:, None]
    cross = np.abs(own[:, 0] * vector[1, nodes] - own[:, 1] * vector[0, nodes])
    against = (own * vector[:, nodes].T).sum(axis=1) <= 0.0
    count[nodes[(cross > 0.5 * CROSSING) | against]] = 2
    return _Directions(vector, count)


def _edge_normals(piece, weight):
    """int n phi of each node of each edge, (3m, 2); weighted by r in axisymmetric flow for ``"w"``, by length for ``"ds"``."""
    per_edge = np.einsum("eq,qi,eqc->eic", getattr(piece, weight), piece.shapes, piece.normal)
    return per_edge.reshape(-1, 2)


def _with_tangent(directions, port):
    """Directions with the tangent of a straight port added; at a smooth meeting the earlier direction stays."""
    vector, count = directions.vector.copy(), directions.count.copy()
    tangent = port.tangent[0, 0]
    nodes = port.nodes
    crossing = np.abs(vector[0, nodes] * tangent[1] - vector[1, nodes] * tangent[0]) > CROSSING
    free = count[nodes] == 0
    vector[:, nodes[free]] = tangent[:, None]
    count[nodes[free]] = 1
    count[nodes[~free & crossing]] = 2
    return _Directions(vector, count)


def _assemble(owner, cartesian, directions):
    n = len(owner)
    count = np.where(owner, 0, directions.count)
    vector = directions.vector
    one = count == 1
    along_x = one & (np.abs(vector[1]) < 1e-9)
    along_y = one & (np.abs(vector[0]) < 1e-9)
    turned = one & ~along_x & ~along_y
    cos, sin = np.ones(n), np.zeros(n)
    cos[turned], sin[turned] = vector[0, turned], vector[1, turned]
    both = owner | (count == 2)
    mask = np.stack([both | along_x | turned, both | along_y])
    return Fixed(Frames(np.flatnonzero(turned), cos, sin), mask, np.where(owner, cartesian, 0.0))
