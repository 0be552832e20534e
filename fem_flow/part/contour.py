"""A closed contour of straight walls with rounded edges, for part scripts: drawn, cut by sections and named in one call.

Roundings are true arcs, and sections are curves shared by two surfaces: no Boolean operation is needed, so no name is ever
lost.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from fem_flow.errors import GeometryError
from fem_flow.part.polygon import first_crossing

TIGHT = 1e-9
"""Relative to the contour's size: lengths below this are no lengths."""
SNAP = 0.02
"""A section that ends within this share of its length from an existing point of the contour ends there."""


@dataclass(frozen=True)
class Edge:
    """A corner of the contour, and the wall from it to the next.

    Attributes
    ----------
    x, y : place, in the script's unit; the corners go anticlockwise
    wall : name of the straight piece from here to the next corner
    radius : of the rounding here; 0 is sharp
    round : name that the rounding belongs to; by default that of the wall behind it
    """

    x: float
    y: float
    wall: str
    radius: float = 0.0
    round: str | None = None


@dataclass(frozen=True)
class Piece:
    """A straight line, or an arc of less than half a turn where ``centre`` is given."""

    name: str
    a: np.ndarray
    b: np.ndarray
    centre: np.ndarray | None = None

    def at(self, t: np.ndarray) -> np.ndarray:
        """Points (n, 2) at shares t (n,) of its length."""
        t = np.asarray(t, float)[:, None]
        if self.centre is None:
            return self.a + t * (self.b - self.a)
        u, v = self.a - self.centre, self.b - self.centre
        turn = np.arctan2(u[0] * v[1] - u[1] * v[0], u @ v) * t
        return self.centre + np.concatenate(
            [u[0] * np.cos(turn) - u[1] * np.sin(turn), u[0] * np.sin(turn) + u[1] * np.cos(turn)], axis=1
        )

    def split(self, t: float) -> list[Piece]:
        """The two parts on either side of a share t."""
        at = self.at(np.array([t]))[0]
        return [replace(self, b=at), replace(self, a=at)]


def contour(edges: Sequence[Edge], unit: str) -> list[Piece]:
    """Lines and arcs of a contour.

    Raises
    ------
    GeometryError : a rounding does not fit (reason ``"radius_too_large"``), or two walls cross (``"walls_cross"``)
    """
    corners = np.array([(e.x, e.y) for e in edges], float)
    size = float(np.ptp(corners, axis=0).max())
    kept = np.linalg.norm(np.roll(corners, -1, axis=0) - corners, axis=1) > TIGHT * size
    edges, corners = [e for e, k in zip(edges, kept, strict=True) if k], corners[kept]
    n = len(edges)
    ahead = np.roll(corners, -1, axis=0) - corners
    length = np.linalg.norm(ahead, axis=1)
    ahead = ahead / length[:, None]
    behind = np.roll(ahead, 1, axis=0)
    turn = np.arctan2(behind[:, 0] * ahead[:, 1] - behind[:, 1] * ahead[:, 0], np.einsum("nx,nx->n", behind, ahead))
    radius = np.array([e.radius for e in edges]) * (np.abs(turn) > 1e-6)
    cut = radius * np.tan(np.abs(turn) / 2)
    for k in range(n):
        used, there = cut[k] + cut[(k + 1) % n], length[k]
        if used > there * (1 + 1e-9):
            raise GeometryError(
                f"the edge radius {max(radius[k], radius[(k + 1) % n]):.4g} {unit} does not fit on the wall {edges[k].wall}:"
                f" its roundings take {used:.4g} {unit} of the {there:.4g} {unit} there; make the radius smaller or that wall"
                " longer",
                reason="radius_too_large",
                details={"wall": edges[k].wall, "needs": float(used), "has": float(there)},
            )
    pieces = []
    for k in range(n):
        a, b = corners[k] + cut[k] * ahead[k], corners[(k + 1) % n] - cut[(k + 1) % n] * ahead[k]
        if radius[k] > TIGHT * size:
            side = np.sign(turn[k]) * radius[k] * np.array([-ahead[k][1], ahead[k][0]])
            pieces.append(Piece(edges[k].round or edges[k].wall, corners[k] - cut[k] * behind[k], a, a + side))
        if np.linalg.norm(b - a) > 1e-6 * size:
            pieces.append(Piece(edges[k].wall, a, b))
        elif pieces:
            pieces[-1] = replace(pieces[-1], b=b)
    pieces = [replace(p, b=q.a) for p, q in zip(pieces, [*pieces[1:], pieces[0]], strict=True)]
    _check_simple(pieces, unit)
    return pieces


def shortest(first: Sequence[Piece], second: Sequence[Piece]) -> tuple[np.ndarray, np.ndarray]:
    """The two points where two walls are nearest to each other; of several equal pairs the one with the smallest y."""
    best = None
    shares = np.linspace(0, 1, 17)
    sampled = [[(p, p.at(shares)) for p in wall] for wall in (first, second)]
    for p, at_p in sampled[0]:
        for q, at_q in sampled[1]:
            off = sum(np.linalg.norm(x[1] - x[0]) for x in (at_p, at_q)) / 2
            if best and np.linalg.norm(at_p[:, None] - at_q, axis=2).min() - 1.1 * off > best[0][0]:
                continue
            a, b = _nearest(p, q)
            key = (np.linalg.norm(b - a), a[1] + b[1])
            if best is None or key[0] < best[0][0] * (1 - 1e-9) or (key[0] < best[0][0] * (1 + 1e-9) and key[1] < best[0][1]):
                best = (key, a, b)
    return best[1], best[2]


def draw_contour(edges: Sequence[Edge], unit: str, cuts: Mapping[str, object] | None = None) -> None:
    """Draw the fluid inside a contour in the current gmsh model, and name every piece of it.

    Parameters
    ----------
    unit : the script's unit, for sentences
    cuts : section name -> two points ((x, y), (x, y)) on the contour, or two wall names: the shortest line between them

    Raises
    ------
    GeometryError : as ``contour``; or a section does not end on the contour
    """
    import gmsh

    pieces = contour(edges, unit)
    chords = []
    for name, ends in (cuts or {}).items():
        if isinstance(ends[0], str):
            ends = shortest(*([p for p in pieces if p.name == wall] for wall in ends))
        ends = [np.asarray(e, float) for e in ends]
        snap = SNAP * np.linalg.norm(ends[1] - ends[0])
        for end in ends:
            pieces = _with_point(pieces, end, snap, name)
        chords.append((name, *(_nearest_start(pieces, end) for end in ends)))
    points = [gmsh.model.occ.addPoint(*p.a, 0.0) for p in pieces]
    named: dict[str, list[int]] = {}
    tags = []
    for k, piece in enumerate(pieces):
        start, end = points[k], points[(k + 1) % len(points)]
        if piece.centre is None:
            tags.append(gmsh.model.occ.addLine(start, end))
        else:
            tags.append(gmsh.model.occ.addCircleArc(start, gmsh.model.occ.addPoint(*piece.centre, 0.0), end))
        named.setdefault(piece.name, []).append(tags[-1])
    loops = [[(k, tags[k]) for k in range(len(pieces))]]
    for name, first, last in chords:
        i, j = (next(k for k, p in enumerate(pieces) if p.a is at) for at in (first, last))
        chord = gmsh.model.occ.addLine(points[i], points[j])
        named.setdefault(name, []).append(chord)
        loops = [part for loop in loops for part in _cut_loop(loop, i, j, chord)]
    for loop in loops:
        gmsh.model.occ.addPlaneSurface([gmsh.model.occ.addCurveLoop([tag for _, tag in loop])])
    gmsh.model.occ.synchronize()
    for name, members in named.items():
        gmsh.model.addPhysicalGroup(1, members, name=name)


def _cut_loop(loop, i, j, chord):
    """A loop of (start point, curve) cut along a chord from point i to point j; unchanged if it lacks one of them."""
    starts = [s for s, _ in loop]
    if i not in starts or j not in starts:
        return [loop]
    loop = loop[starts.index(i) :] + loop[: starts.index(i)]
    at = [s for s, _ in loop].index(j)
    return [[*loop[:at], (j, -chord)], [*loop[at:], (i, chord)]]


def _with_point(pieces, at, snap, name):
    """The contour with a point at a place on it, unless one of its points is within ``snap``."""
    if min(np.linalg.norm(p.a - at) for p in pieces) <= snap:
        return pieces
    found = [(np.linalg.norm(p.at([t])[0] - at), k, t) for k, p in enumerate(pieces) for t in [_share(p, at)]]
    distance, k, t = min(found)
    if distance > max(snap, 1e-6):
        raise GeometryError(f"the section {name} does not end on a wall", reason="loose_section", details={"name": name})
    return [*pieces[:k], *pieces[k].split(t), *pieces[k + 1 :]]


def _nearest_start(pieces, at):
    return min((p.a for p in pieces), key=lambda a: np.linalg.norm(a - at))


def _share(piece, at):
    low, high = 0.0, 1.0
    for _ in range(12):
        t = np.linspace(low, high, 33)
        best = t[np.argmin(np.linalg.norm(piece.at(t) - at, axis=1))]
        half = (high - low) / 16
        low, high = max(0.0, best - half), min(1.0, best + half)
    return float(best)


def _nearest(p, q):
    """Nearest points of two pieces; of equally near ones those with the smallest y.

    Of two straight lines the nearest pair has an end of one of them; with arcs a grid is narrowed down.
    """
    if p.centre is None and q.centre is None:
        pairs = [(e, _foot(q, e)) for e in (p.a, p.b)] + [(_foot(p, e), e) for e in (q.a, q.b)]
        least = min(np.linalg.norm(b - a) for a, b in pairs) * (1 + 1e-9)
        return min((pair for pair in pairs if np.linalg.norm(pair[1] - pair[0]) <= least), key=lambda e: e[0][1] + e[1][1])
    box = np.array([[0.0, 1.0], [0.0, 1.0]])
    for _ in range(14):
        s, t = (np.linspace(*b, 33) for b in box)
        a, b = p.at(s), q.at(t)
        distance = np.linalg.norm(b[None] - a[:, None], axis=2)
        i, j = np.unravel_index(np.argmin(distance), distance.shape)
        half = np.diff(box, axis=1)[:, 0] / 10
        middle = np.array([s[i], t[j]])
        box = np.clip(np.stack([middle - half, middle + half], axis=1), 0.0, 1.0)
    return a[i], b[j]


def _foot(line, at):
    span = line.b - line.a
    return line.a + np.clip((at - line.a) @ span / (span @ span), 0.0, 1.0) * span


def _check_simple(pieces, unit):
    """No two walls cross or touch."""
    shares = np.linspace(0, 1, 9)
    lines = [p.at(shares if p.centre is not None else [0.0, 1.0]) for p in pieces]
    start, end = np.concatenate([x[:-1] for x in lines]), np.concatenate([x[1:] for x in lines])
    owner = np.concatenate([np.full(len(x) - 1, k) for k, x in enumerate(lines)])
    crossing = first_crossing(start, end, np.roll(np.arange(len(start)), -1))
    if crossing is not None:
        i, j, (x, y) = crossing
        names = [pieces[owner[k]].name for k in (i, j)]
        raise GeometryError(
            f"with these dimensions the walls {names[0]} and {names[1]} cross at ({x:.4g}, {y:.4g}) {unit}; change the"
            " dimensions that place them",
            reason="walls_cross",
            details={"walls": names},
        )
