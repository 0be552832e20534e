"""From gmsh's straight triangles to curved quadratic ones in metres, with the names carried along and everything checked."""

from __future__ import annotations

import numpy as np

from fem_flow.errors import GeometryError
from fem_flow.part.cad import FLAT, Cad, CadCurve
from fem_flow.part.chains import ordered, oriented_section
from fem_flow.part.mesh import Corner, MeshData
from fem_flow.part.triangles import cross, found_in, free_corners, scaled_jacobians, sides

LEAST_JACOBIAN = 0.05
"""Elements whose scaled Jacobian (1 for an equilateral triangle) is below this are refused."""


class BadElements(Exception):
    """Elements below ``LEAST_JACOBIAN``; ``places`` (n, 2) in drawing units, ``worst`` the smallest value."""

    def __init__(self, places: np.ndarray, worst: float):
        super().__init__(f"{len(places)} bad elements")
        self.places = places
        self.worst = worst


def mesh_data(gmsh, cad: Cad, corners: tuple[Corner, ...], gap: float) -> MeshData:
    """Take the mesh out of gmsh.

    Parameters
    ----------
    gap : narrowest gap in drawing units

    Raises
    ------
    BadElements : some elements are folded or nearly so
    GeometryError : a name was lost or is double, or the mesh does not fill the drawing
    """
    tags, xyz, _ = gmsh.model.mesh.getNodes()
    points = np.reshape(xyz, (-1, 3))[:, :2].copy()
    number = np.full(int(tags.max()) + 1, -1, dtype=np.int64)
    number[tags.astype(np.int64)] = np.arange(len(tags))
    per_surface = [number[_elements(gmsh, 2, s).astype(np.int64)].reshape(-1, 3) for s in cad.surfaces]
    cells = np.concatenate(per_surface)
    surface = np.repeat(np.array(cad.surfaces), [len(c) for c in per_surface])
    turned = cross(points[cells[:, 1]] - points[cells[:, 0]], points[cells[:, 2]] - points[cells[:, 0]]) < 0
    cells[turned] = cells[turned][:, [0, 2, 1]]
    lines = {c.tag: _curve_nodes(gmsh, c, number) for c in cad.boundary + cad.inside}
    fixed = np.concatenate([np.stack([n[:-1], n[1:]], axis=1) for n, _ in lines.values()])
    outer = np.concatenate([np.stack([lines[c.tag][0][:-1], lines[c.tag][0][1:]], axis=1) for c in cad.boundary])
    points, cells, surface = free_corners(points, cells, surface, outer, fixed)
    points, cells, lines = _compressed(points, cells, lines)
    _snap_axis(cad, points, lines)
    return _curved(gmsh, cad, points, cells, surface, lines, corners, gap)


def _curved(gmsh, cad, points, cells, surface, lines, corners, gap):
    n = len(points)
    edges, edge_of_side = sides(cells)
    middles = 0.5 * (points[edges[:, 0]] + points[edges[:, 1]])
    key = edges[:, 0] * n + edges[:, 1]
    node_curve = np.full(n + len(edges), -1, dtype=np.int64)
    node_parameter = np.full(n + len(edges), np.nan)
    found: dict[int, np.ndarray] = {}
    for curve in cad.inside + cad.boundary:
        nodes, t = lines[curve.tag]
        pair = np.sort(np.stack([nodes[:-1], nodes[1:]], axis=1), axis=1)
        at = np.searchsorted(key, pair[:, 0] * n + pair[:, 1])
        if (key[np.minimum(at, len(key) - 1)] != pair[:, 0] * n + pair[:, 1]).any():
            raise GeometryError(f"the mesh does not follow the curve named {curve.name}", reason="lost_name")
        t_middle = 0.5 * (t[:-1] + t[1:])
        if not curve.straight:
            t_middle = _halfway(gmsh, curve.tag, points[nodes[:-1]], points[nodes[1:]], t[:-1], t[1:])
            middles[at] = _value(gmsh, curve.tag, t_middle)
        found[curve.tag] = np.stack([nodes[:-1], nodes[1:], n + at], axis=1)
        if curve.role not in ("section", "inside"):
            node_curve[nodes], node_parameter[nodes] = curve.tag, t
            node_curve[n + at], node_parameter[n + at] = curve.tag, t_middle
    points = np.concatenate([points, middles])
    cells = np.concatenate([cells, n + edge_of_side], axis=1)
    boundaries, roles = {}, {}
    for curve in cad.boundary:
        boundaries.setdefault(curve.name, []).append(found[curve.tag])
        roles[curve.name] = curve.role
    boundaries = {name: ordered(_directed(np.concatenate(e), cells)) for name, e in boundaries.items()}
    sections = {}
    for curve in cad.inside:
        if curve.role == "section":
            sections.setdefault(curve.name, []).append(found[curve.tag])
    sections = {name: oriented_section(np.concatenate(e), points) for name, e in sections.items()}
    regions = {name: np.flatnonzero(np.isin(surface, tags)) for name, tags in cad.regions.items()}
    quality = scaled_jacobians(points, cells)
    if quality.min() < LEAST_JACOBIAN:
        raise BadElements(points[cells[quality < LEAST_JACOBIAN][:, :3]].mean(axis=1), float(quality.min()))
    _check(cad, points, cells, edge_of_side, boundaries)
    return MeshData(
        points * cad.metres,
        cells,
        boundaries,
        roles,
        sections,
        regions,
        node_curve,
        node_parameter,
        corners,
        float(gap * cad.metres),
        float(quality.min()),
    )


def _elements(gmsh, dim, tag):
    kinds, _, nodes = gmsh.model.mesh.getElements(dim, tag)
    return nodes[0] if len(kinds) else np.zeros(0, dtype=np.uint64)


def _curve_nodes(gmsh, curve: CadCurve, number):
    """Node numbers along a curve in the sense of its parameter, and the parameters."""
    pairs = number[_elements(gmsh, 1, curve.tag).astype(np.int64)].reshape(-1, 2)
    if not len(pairs) or (pairs[1:, 0] != pairs[:-1, 1]).any():
        raise GeometryError(f"the curve named {curve.name} was not meshed", reason="lost_name", details={"name": curve.name})
    nodes = np.append(pairs[:, 0], pairs[-1, 1])
    low, high = (float(v[0]) for v in gmsh.model.getParametrizationBounds(1, curve.tag))
    tags, _, parameters = gmsh.model.mesh.getNodes(1, curve.tag, includeBoundary=False, returnParametricCoord=True)
    t = np.empty(len(nodes))
    t[0], t[-1] = low, high
    if len(tags):
        at = np.full(int(number.max()) + 1, np.nan)
        at[number[tags.astype(np.int64)]] = parameters
        t[1:-1] = at[nodes[1:-1]]
    if len(t) > 2 and t[1] > t[-2]:
        t[0], t[-1] = high, low
    if not (np.all(np.diff(t) > 0) or np.all(np.diff(t) < 0)):
        raise GeometryError(f"the curve named {curve.name} was meshed out of order", reason="lost_name")
    return nodes, t


def _compressed(points, cells, lines):
    used = np.zeros(len(points), bool)
    used[cells] = True
    number = np.cumsum(used) - 1
    return points[used], number[cells], {tag: (number[nodes], t) for tag, (nodes, t) in lines.items()}


def _value(gmsh, tag, t):
    return np.reshape(gmsh.model.getValue(1, tag, t), (-1, 3))[:, :2]


def _halfway(gmsh, tag, a, b, low, high):
    """Parameters of the points of a curve that are equally far from both ends of each edge (regula falsi)."""

    def excess(t):
        at = _value(gmsh, tag, t)
        return np.linalg.norm(at - a, axis=1) - np.linalg.norm(at - b, axis=1)

    t0, t1 = low.copy(), high.copy()
    f0, f1 = -np.linalg.norm(b - a, axis=1), np.linalg.norm(b - a, axis=1)
    t = 0.5 * (t0 + t1)
    for _ in range(6):
        f = excess(t)
        if np.abs(f).max() < 1e-12 * np.abs(f1).max():
            break
        left = f < 0
        t0, f0 = np.where(left, t, t0), np.where(left, f, f0)
        t1, f1 = np.where(left, t1, t), np.where(left, f1, f)
        t = t0 - f0 * (t1 - t0) / (f1 - f0)
    return t


def _snap_axis(cad, points, lines):
    """Nodes on the axis lie exactly on it; nothing else touches it."""
    if cad.kind != "axisymmetric":
        return
    for curve in cad.boundary:
        if curve.role == "axis":
            points[lines[curve.tag][0], 1] = 0.0
    if points[:, 1].min() < 0.0:
        worst = points[np.argmin(points[:, 1])]
        if worst[1] < -FLAT * cad.size:
            raise GeometryError(f"the mesh reaches below the axis at {cad.place(worst)}", reason="below_axis")
        points[:, 1] = np.maximum(points[:, 1], 0.0)


def _directed(edges, cells):
    """Turn boundary edges so that their cell, and so the fluid, lies on the left."""
    n = int(cells.max()) + 1
    keys = np.concatenate([cells[:, a] * n + cells[:, b] for a, b in ((0, 1), (1, 2), (2, 0))])
    forward = found_in(edges[:, 0] * n + edges[:, 1], keys)
    return np.where(forward[:, None], edges, edges[:, [1, 0, 2]])


def _check(cad, points, cells, edge_of_side, boundaries):
    """Names partition the boundary, the boundary closes, the mesh fills the drawing, nothing crosses the axis."""
    counts = np.bincount(edge_of_side.ravel())
    first = int(cells[:, 3:].min())
    outer = np.flatnonzero(counts == 1) + first
    named = np.concatenate([e[:, 2] for e in boundaries.values()])
    if len(named) != len(np.unique(named)) or not np.array_equal(np.sort(named), outer):
        raise GeometryError(
            f"the names do not partition the boundary of the mesh: {len(outer)} edges, {len(named)} of them named",
            reason="lost_name",
        )
    edges = np.concatenate(list(boundaries.values()))
    a, b, m = (points[edges[:, k]] for k in range(3))
    if np.abs((b - a).sum(axis=0)).max() > 1e-9 * cad.size:
        raise GeometryError("the boundary of the mesh does not close", reason="open_boundary")
    chord, bulge = b - a, m - 0.5 * (a + b)
    area = 0.5 * float(cross(a, b).sum()) - 2 / 3 * float(cross(chord, bulge).sum())
    if not np.isclose(area, cad.area, rtol=2e-3):
        raise GeometryError(
            f"the mesh covers {area:.6g} {cad.unit}^2 of the {cad.area:.6g} {cad.unit}^2 that were drawn",
            reason="wrong_area",
            details={"mesh": area, "drawing": cad.area},
        )
    if cad.kind == "axisymmetric" and points[:, 1].min() < 0.0:
        raise GeometryError("the mesh reaches below the axis", reason="below_axis")
