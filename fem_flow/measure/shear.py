"""Wall shear from the reaction, one smooth stretch of wall at a time, laid out by arc length."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import scipy.sparse as sparse
from scipy.sparse.linalg import spsolve

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.nodal import WallCurve
from fem_flow.flow.reference import line_shapes
from fem_flow.flow.solution import Solution
from fem_flow.measure.rim import SMOOTH, Rim, Stretch, rim_of
from fem_flow.measure.singular import flaws, rests

WITHHELD_EDGES = 2
TIE = 1e-9
"""Places whose x differs by less than this share of the part's size have the same x."""


@dataclass(frozen=True)
class StretchShear:
    """Signed shear on one stretch, positive where the fluid pulls along increasing arc length.

    Attributes
    ----------
    number : which smooth stretch of the piece it belongs to
    arc, points, shear, pressure : nodal, (n,), (n, 2), (n,), (n,), in the direction of increasing arc length; SI
    at_points : (m, q) shear at the integration points; NaN on withheld edges
    weight : (m, q) area of the whole part at the integration points, m^2
    point_arc : (m, q) arc length of the integration points
    """

    number: int
    arc: np.ndarray
    points: np.ndarray
    shear: np.ndarray
    pressure: np.ndarray
    at_points: np.ndarray
    weight: np.ndarray
    point_arc: np.ndarray


NODAL = ("arc", "points", "shear", "pressure")


@dataclass(frozen=True)
class WallShear:
    """All stretches of one piece of a wall, in order of arc length."""

    name: str
    piece: int
    pieces: int
    closed: bool
    length: float
    stretches: tuple[StretchShear, ...]


def wall_shear(solution: Solution) -> list[WallShear]:
    """Shear along every piece of every wall; made once."""
    if "_shear" not in solution.__dict__:
        rim = rim_of(solution)
        solution.__dict__["_shear"] = [
            _wall(rim, name, k + 1, pieces, run)
            for name in solution.mesh.names("wall")
            for pieces in [sorted(rim.pieces(name), key=lambda run: _leftmost(rim, run)[2:])]
            for k, run in enumerate(pieces)
        ]
    return solution.__dict__["_shear"]


def wall_curves(solution: Solution) -> list[WallCurve]:
    """The same as plain curves for files and pictures; at a corner two points share one arc length, one a side."""
    curves = []
    for wall in wall_shear(solution):
        joined = [np.concatenate([getattr(st, f) for st in wall.stretches]) for f in NODAL]
        curves.append(WallCurve(wall.name, wall.piece, wall.pieces, *joined, wall.closed))
    return curves


def _wall(rim, name, piece, pieces, run):
    closed = bool(rim.next[run[-1]] == run[0])
    length = float(rim.boundary.ds[run].sum()) * rim.solution.scales.length
    return WallShear(name, piece, len(pieces), closed, length, tuple(_piece(rim, run, closed)))


def _leftmost(rim, run) -> tuple[int, float, int, int]:
    """Where a run is farthest left (then lowest): position of the edge in it, place on that edge (0 to 1), x and y in ties."""
    points = rim.solution.space.points
    p = points[rim.edges[run]]
    bend = p[:, 0, 0] + p[:, 1, 0] - 2 * p[:, 2, 0]
    tie = TIE * np.ptp(points, axis=0).max()
    lowest = np.divide(3 * p[:, 0, 0] + p[:, 1, 0] - 4 * p[:, 2, 0], 4 * bend, out=np.zeros(len(run)), where=bend > tie)
    at = np.concatenate([np.zeros(len(run)), np.ones(len(run)), np.where((lowest < 1e-3) | (lowest > 1 - 1e-3), 0.0, lowest)])
    edge = np.tile(np.arange(len(run)), 3)
    x, y = np.round(np.einsum("ni,nix->xn", _shapes(at), p[edge]) / tie).astype(np.int64)
    best = int(np.lexsort((y, x))[0])
    return int(edge[best]), float(at[best]), int(x[best]), int(y[best])


def _piece(rim: Rim, run: np.ndarray, closed: bool) -> list[StretchShear]:
    """Project every smooth stretch of a piece, then lay the edges out by arc length."""
    backwards, ordered, begins_at = _by_arc(rim, run, closed)
    traction = np.zeros((len(rim.edges), 3, 2))
    withheld = np.zeros(len(rim.edges), dtype=bool)
    stretch_of = np.zeros(len(rim.edges), dtype=int)
    for k, stretch in enumerate(rim.stretches(run)):
        traction[stretch.edges], withheld[stretch.edges] = _project(rim, stretch)
        stretch_of[stretch.edges] = k
    lengths = rim.boundary.ds.sum(axis=1)[ordered]
    begin = np.cumsum(lengths) - lengths
    cuts = np.flatnonzero(np.diff(stretch_of[ordered])) + 1
    out = []
    for edges, starts in zip(np.split(ordered, cuts), np.split(begin, cuts), strict=True):
        out.append(_lay_out(rim, int(stretch_of[edges[0]]), edges, starts, traction[edges], withheld[edges], backwards))
    if begins_at == 0.0:
        return out
    corners = rim.solution.space.points[rim.edges[ordered[:1]]]
    along = float(_length_to(corners, 1.0 - begins_at if backwards else begins_at)[0])
    along = float(lengths[0]) - along if backwards else along
    scale = rim.solution.scales.length
    return _opened(out, begins_at, along * scale, float(lengths.sum()) * scale)


def _by_arc(rim, run, closed) -> tuple[bool, np.ndarray, float]:
    """Whether increasing arc length runs against the edges, the edges in its order, and where on the first edge it begins.

    The last is the share of that edge, in the direction of arc length; 0 unless a closed wall is farthest left inside an edge.
    """
    p = rim.solution.space.points
    if not closed:
        backwards = _later(p[rim.edges[run[0], 0]], p[rim.edges[run[-1], 1]], rim)
        return backwards, run[::-1] if backwards else run, 0.0
    around = p[rim.edges[run][:, [0, 2]]].reshape(-1, 2)
    ahead = np.roll(around, -1, axis=0)
    backwards = float((around[:, 0] * ahead[:, 1] - around[:, 1] * ahead[:, 0]).sum()) < 0
    first, at = _leftmost(rim, run)[:2]
    if at == 1.0:
        first, at = (first + 1) % len(run), 0.0
    if backwards:
        return True, np.roll(run, -first if at == 0.0 else -(first + 1))[::-1], 0.0 if at == 0.0 else 1.0 - at
    return False, np.roll(run, -first), at


def _later(a, b, rim):
    size = TIE * np.ptp(rim.solution.space.points, axis=0).max()
    return bool(a[0] > b[0] + size or (abs(a[0] - b[0]) <= size and a[1] > b[1]))


def _lay_out(rim, number, edges, starts, traction, withheld, backwards):
    """One stretch in the order of arc length; nodes of an edge are turned round where the edge runs against it."""
    solution, scale = rim.solution, rim.solution.scales
    piece = Boundary(solution.space, "stretch", rim.edges[edges])
    along = -piece.tangent if backwards else piece.tangent
    at_points = -(np.einsum("ekc,qk->eqc", traction, piece.shapes) * along).sum(axis=2) * scale.pressure
    at_points[withheld] = np.nan
    corners = solution.space.points[piece.edges]
    nodal = -(traction * _edge_tangents(corners)).sum(axis=2) * scale.pressure * (-1.0 if backwards else 1.0)
    nodal[withheld] = np.nan
    whole = piece.ds.sum(axis=1)
    node_arc = np.stack([np.zeros_like(whole), whole, _length_to(corners, 0.5)], axis=1)
    travelled = np.stack([_length_to(corners, s) for s in piece.s], axis=1)
    if backwards:
        travelled, node_arc = whole[:, None] - travelled, whole[:, None] - node_arc
    node_arc, travelled = starts[:, None] + node_arc, starts[:, None] + travelled
    first, last = (1, 0) if backwards else (0, 1)
    m = len(edges)
    edge_of = np.append(np.repeat(np.arange(m), 2), m - 1)
    node_of = np.append(np.tile([first, 2], m), last)
    shear = nodal[edge_of, node_of]
    shear[2:-1:2] = 0.5 * (shear[2:-1:2] + nodal[:-1, last])
    nodes = piece.edges[edge_of, node_of]
    pressure = solution.nodal_pressure()[nodes] * scale.pressure + scale.level
    return StretchShear(
        number,
        node_arc[edge_of, node_of] * scale.length,
        corners[edge_of, node_of] * scale.length,
        shear,
        pressure,
        at_points,
        piece.w * scale.area,
        travelled * scale.length,
    )


def _opened(stretches, share, begin, total):
    """A closed wall whose arc length begins inside its first edge, at a share of it and ``begin`` along it: cut there."""
    head = stretches[0]
    weights = _shapes(np.array([share]))[0][[0, 2, 1]]
    point = {f: np.tensordot(weights, getattr(head, f)[:3], 1)[None] for f in NODAL[1:]}
    before = head.arc < begin
    tail = {f: np.concatenate([getattr(head, f)[before], point[f]]) for f in NODAL[1:]}
    tail["arc"] = np.append(head.arc[before] + total - begin, total)
    kept = {f: np.concatenate([point[f], getattr(head, f)[~before]]) for f in NODAL[1:]}
    kept["arc"] = np.append(0.0, head.arc[~before] - begin)
    out = [replace(head, **kept, point_arc=(head.point_arc - begin) % total)]
    out += [replace(st, arc=st.arc - begin, point_arc=st.point_arc - begin) for st in stretches[1:]]
    if out[-1].number == head.number:  # the wall is smooth there: the tail goes on from the last stretch
        joined = {f: np.concatenate([getattr(out[-1], f), tail[f][1:]]) for f in NODAL}
        return [*out[:-1], replace(out[-1], **joined)]
    none = np.zeros((0, head.weight.shape[1]))
    return [*out, StretchShear(head.number, *(tail[f] for f in NODAL), none, none, none)]


def _shapes(at):
    """Quadratic shape functions (n, 3) of nodes (start, end, middle) at places (n,) on the unit interval."""
    return np.stack([(1 - at) * (1 - 2 * at), at * (2 * at - 1), 4 * at * (1 - at)], axis=1)


def _length_to(corners, share):
    """Arc length (m,) of quadratic edges (m, 3, 2) from their start to a share of their parameter."""
    s, gauss, _, _ = line_shapes()
    s = share * s
    slopes = np.stack([4 * s - 3, 4 * s - 1, 4 - 8 * s], axis=1)
    return share * np.linalg.norm(np.einsum("qi,eix->eqx", slopes, corners), axis=2) @ gauss


def _edge_tangents(corners):
    """Unit tangents at the three nodes of quadratic edges: (m, 3, 2) -> (m, 3, 2)."""
    s = np.array([0.0, 1.0, 0.5])
    slopes = np.stack([4 * s - 3, 4 * s - 1, 4 - 8 * s], axis=1)
    tangents = np.einsum("qi,eix->eqx", slopes, corners)
    return tangents / np.linalg.norm(tangents, axis=2, keepdims=True)


def _project(rim: Rim, stretch: Stretch):
    """Viscous traction (m, 3, 2) at the nodes of each edge, scaled, and a mask of withheld edges.

    The reaction is tested with hat functions (a hat is a corner's quadratic shape and half of the middle's) and the traction is
    continuous and linear along the wall: on quadratic shapes it would alternate between corners and middles.
    """
    solution = rim.solution
    edges = rim.edges[stretch.edges]
    piece = Boundary(solution.space, stretch.name, edges)
    p = piece.pressure(solution.state.p)
    load = rim.share(stretch.edges)
    load = load + np.stack([piece.load(p * piece.normal[..., k]) for k in (0, 1)])
    nodes = np.unique(edges[:, :2])
    number_of = np.full(solution.space.n_velocity, -1)
    number_of[nodes] = np.arange(len(nodes))
    local = number_of[edges[:, :2]]
    hats = piece.shapes[:, :2] + 0.5 * piece.shapes[:, 2:]
    mass = np.einsum("eq,qi,qj->eij", piece.w, hats, hats)
    rows, columns = np.broadcast_arrays(local[:, :, None], local[:, None, :])
    matrix = sparse.csr_matrix((mass.ravel(), (rows.ravel(), columns.ravel())), shape=(len(nodes),) * 2)
    tested = load[:, nodes]
    for end in (0, 1):
        np.add.at(tested, (slice(None), local[:, end]), 0.5 * load[:, edges[:, 2]])
    free = np.ones(len(nodes), dtype=bool)
    withheld = np.zeros(len(edges), dtype=bool)
    if not stretch.closed:
        bad = [f.node for f in flaws(solution)]
        ends = (
            (edges[0, 0], stretch.start_angle, stretch.before, slice(None, WITHHELD_EDGES)),
            (edges[-1, 1], stretch.end_angle, stretch.after, slice(-WITHHELD_EDGES, None)),
        )
        for node, angle, other, near in ends:
            free[number_of[node]] = not _still(solution, stretch.name, other, angle)
            withheld[near] |= node in bad
    values = np.zeros((len(nodes), 2))
    inner = matrix[free][:, free].tocsc()
    values[free] = spsolve(inner, tested[:, free].T).reshape(-1, 2)
    ends = values[local]
    return np.concatenate([ends, ends.mean(axis=1, keepdims=True)], axis=1), withheld


def _still(solution, name, other, angle):
    """Whether the viscous stress vanishes at the end of a wall: resting walls meet below 180 degrees, or a mirror below 90."""
    if not rests(solution, name):
        return False
    if solution.mesh.roles[other] in ("axis", "symmetry"):
        return angle < 90.0 + 1.0
    return rests(solution, other) and angle < 180.0 - SMOOTH
