"""Automatic mesh sizes: one smooth field over the part, so that the user names no size.

The field is the smallest of cones h = h0 + slope * distance that stand on the walls (gap across, bends, lengths of pieces), on
the ports and on the sharp corners: fine across narrow gaps, finer towards walls, graded geometrically into corners, and nowhere
growing faster than its slope. It is sampled once on a tree of squares, where gmsh asks for it; ``scale`` multiplies the whole
field.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from fem_flow.part.cad import Cad
from fem_flow.part.gap import Facing, Junction, WallSample
from fem_flow.part.polygon import windings

WALL_PER_GAP = 8.0
"""Elements that would fit a gap at the size of the walls."""
BULK_PER_GAP = 5.0
"""Elements that would fit a gap at the size of its middle."""
SLOPE = 0.3
"""Growth of the size per distance from walls and corners."""
GAP_SLOPE = 0.12
"""Growth of the bulk size per distance from a narrow place: a jet leaves a gap slowly."""
PER_TURN_OUTER, PER_TURN_INNER = 40.0, 14.0
"""Elements per full turn of a bend: around an edge of the solid, and along a wall that encloses the fluid."""
PER_PIECE = 3.0
"""Elements at least along every piece of wall."""
CORNER_SHARE = 5e-4
"""Size at a 270 degree corner, as a share of the gap there."""
TRIANGLE = 0.35
"""Mean area of a triangle, in squares of the size asked for (equilateral 0.433; graded meshes come out finer: measured)."""
MOST_LEAVES = 2_000_000
"""Squares beyond which the field is not built: the part needs more triangles than anyone can solve on."""
LEAF = 1.5
"""Squares of the tree are at most this many sizes wide."""


class TooFine(Exception):
    """The size field asks for a mesh beyond all bounds."""


@dataclass(frozen=True)
class SizeField:
    """A tree of squares with sizes at their corners.

    Attributes
    ----------
    low : (2,) lower left of the grid of roots; width : of a root; counts : roots along x and y, x outermost
    child : (n,) number of the first of a square's four children (anticlockwise from the lower left), -1 for a leaf
    corner : (n, 2) lower left; wide : (n,)
    values : (n, 4) sizes at the corners of the leaves, anticlockwise; NaN where a square has children
    """

    low: np.ndarray
    width: float
    counts: tuple[int, int]
    child: np.ndarray
    corner: np.ndarray
    wide: np.ndarray
    values: np.ndarray

    def lookup(self, scale: float) -> Callable[[float, float], float]:
        """The size at a place, times ``scale``: bilinear in the leaf there. Plain Python, some two microseconds a call."""
        child, values = self.child.tolist(), (scale * self.values).ravel().tolist()
        (x0, y0), per_width, (nx, ny) = self.low.tolist(), 1.0 / self.width, self.counts

        def at(x: float, y: float) -> float:
            u, v = (x - x0) * per_width, (y - y0) * per_width
            i, j = min(max(int(u), 0), nx - 1), min(max(int(v), 0), ny - 1)
            u, v, node = u - i, v - j, i * ny + j
            first = child[node]
            while first >= 0:
                u, v = 2.0 * u, 2.0 * v
                if v < 1.0:
                    node = first if u < 1.0 else first + 1
                else:
                    node, v = (first + 3 if u < 1.0 else first + 2), v - 1.0
                if u >= 1.0:
                    u -= 1.0
                first = child[node]
            k = 4 * node
            return (values[k] * (1.0 - u) + values[k + 1] * u) * (1.0 - v) + (values[k + 3] * (1.0 - u) + values[k + 2] * u) * v

        return at

    @cached_property
    def leaves(self) -> np.ndarray:
        """Numbers of the leaves."""
        return np.flatnonzero(self.child < 0)

    def triangles(self, inside: np.ndarray) -> float:
        """How many triangles of this size the fluid takes at scale 1; ``inside``: share of each leaf in the fluid."""
        sizes = self.values[self.leaves].mean(axis=1)
        return float((inside * self.wide[self.leaves] ** 2 / (TRIANGLE * sizes**2)).sum())

    @property
    def centres(self) -> np.ndarray:
        """Centres of the leaves."""
        return self.corner[self.leaves] + 0.5 * self.wide[self.leaves, None]


@dataclass(frozen=True)
class Cones:
    """Segments (n, 2) to (n, 2) with the size at their two ends, and the growth per distance (n,)."""

    start: np.ndarray
    end: np.ndarray
    size0: np.ndarray
    size1: np.ndarray
    slope: np.ndarray

    @staticmethod
    def join(parts: list[Cones]) -> Cones:
        return Cones(*(np.concatenate([getattr(p, k) for p in parts]) for k in ("start", "end", "size0", "size1", "slope")))

    def pairs(self, xy: np.ndarray, which: np.ndarray) -> np.ndarray:
        """Size of cone ``which[k]`` at point ``xy[k]``, (n,)."""
        start, span = self.start[which], (self.end - self.start)[which]
        square = np.maximum(np.einsum("nx,nx->n", span, span), 1e-300)
        d = xy - start
        t = np.clip(np.einsum("nx,nx->n", d, span) / square, 0.0, 1.0)
        distance = np.hypot(*(d - t[:, None] * span).T)
        return self.size0[which] + t * (self.size1 - self.size0)[which] + self.slope[which] * distance

    def steepness(self) -> np.ndarray:
        """The most that each grows per distance, along its segment included: (n,)."""
        length = np.linalg.norm(self.end - self.start, axis=1)
        change = np.abs(self.size1 - self.size0)
        return self.slope + np.divide(change, length, out=np.zeros_like(length), where=length > 0)

    def least_triangles(self) -> float:
        """What the walls alone take: two triangles on every edge along them."""
        length = np.linalg.norm(self.end - self.start, axis=1)
        return float(2 * (length / np.maximum(self.size0, self.size1))[self.slope == SLOPE].sum())

    def at(self, xy: np.ndarray) -> np.ndarray:
        """Smallest cone at points (n, 2), by brute force."""
        n = len(self.slope)
        values = self.pairs(np.repeat(xy, n, axis=0), np.tile(np.arange(n), len(xy)))
        return values.reshape(len(xy), n).min(axis=1)


def wall_cones(
    cad: Cad,
    facing: Facing,
    samples: list[WallSample],
    sharp: list[Junction],
    width: float,
    size: float | None = None,
    near_walls: float | None = None,
    grade_at: tuple[tuple[float, float], ...] = (),
) -> Cones:
    """All cones of a part; lengths in drawing units.

    Parameters
    ----------
    width : the narrowest gap, to judge corners by that nothing faces
    size : cap of the size anywhere; near_walls : size at the walls, instead of the automatic one
    grade_at : (x, y) of further corners to grade into
    """
    parts = []
    finite = [s.gap[np.isfinite(s.gap)].max(initial=width) for s in samples]
    wide = max(finite, default=width)
    for sample in samples:
        gap = np.where(np.isfinite(sample.gap), sample.gap, wide)
        limit = np.minimum(_bend_limit(sample), sample.curve.length / PER_PIECE)
        at_wall = gap / WALL_PER_GAP if near_walls is None else np.minimum(near_walls, gap / 2)
        parts.append(_along(sample.xy, np.minimum(at_wall, limit), SLOPE))
        parts.append(_along(sample.xy, gap / BULK_PER_GAP, GAP_SLOPE))
        seen = np.flatnonzero(np.isfinite(sample.gap) & ~sample.mirrored)
        parts.append(_points(sample.partner[seen], sample.gap[seen] / WALL_PER_GAP, SLOPE))
    for port in (c for c in cad.boundary if c.role == "port"):
        parts.append(_along(port.xy, np.full(len(port.xy), _port_width(cad, port) / BULK_PER_GAP), GAP_SLOPE))
    for junction in sharp:
        reach = corner_reach(facing, junction, width)
        parts.append(_points(junction.xy[None], np.array([reach * _corner_share(junction)]), SLOPE))
    for place in grade_at:
        parts.append(_points(np.array([place], float), np.array([CORNER_SHARE * width]), SLOPE))
    cones = Cones.join(parts)
    if size is not None:
        cones = Cones(cones.start, cones.end, np.minimum(cones.size0, size), np.minimum(cones.size1, size), cones.slope)
    return cones


def corner_reach(facing: Facing, junction: Junction, width: float) -> float:
    """The length that a sharp corner is judged by: the smallest of the gap and the two pieces that meet there."""
    gap = facing.at_corner(junction)[0] if junction.before.role == junction.after.role == "wall" else np.inf
    return min(gap if np.isfinite(gap) else width, junction.before.length, junction.after.length)


SQUARE = np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]])


def build(cad: Cad, cones: Cones, size: float | None = None) -> SizeField:
    """Sample the cones on a tree of squares that is as fine as the field asks.

    A square hands on to its children only those cones that can be the smallest somewhere in it.

    Raises
    ------
    TooFine : the field takes more than ``MOST_LEAVES`` squares
    """
    cap = np.inf if size is None else size
    low, width, counts, corner = _roots(cad)
    widths = np.full(len(corner), width)
    leaf = np.repeat(np.arange(len(corner)), len(cones.slope))
    which = np.tile(np.arange(len(cones.slope)), len(corner))
    steepness = cones.steepness()
    total, parts = 0, []
    while len(corner):
        values = cones.pairs(corner[leaf] + 0.5 * widths[leaf, None], which)
        reach = steepness[which] * np.sqrt(0.5) * widths[leaf]
        first = np.searchsorted(leaf, np.arange(len(corner)))
        centre = np.minimum(np.minimum.reduceat(values, first), cap)
        near = values - reach <= np.minimum.reduceat(values + reach, first)[leaf]
        leaf, which = leaf[near], which[near]
        smallest = np.maximum(centre - SLOPE * np.sqrt(0.5) * widths, 0.1 * centre)
        split = widths > LEAF * smallest
        total += len(corner)
        if total + 4 * split.sum() > MOST_LEAVES:
            raise TooFine
        child = np.where(split, total + 4 * (np.cumsum(split) - 1), -1)
        kept = ~split[leaf]
        parts.append((child, corner, widths, _leaf_values(cones, corner, widths, leaf[kept], which[kept], ~split, cap)))
        corner = (corner[split, None] + 0.5 * widths[split, None, None] * SQUARE).reshape(-1, 2)
        widths = np.repeat(0.5 * widths[split], 4)
        leaf, which = _handed_on(leaf, which, split)
    return SizeField(low, width, counts, *(np.concatenate(p) for p in zip(*parts, strict=True)))


def _roots(cad):
    points = np.concatenate([c.xy for c in cad.boundary])
    low, high = points.min(axis=0) - 0.03 * cad.size, points.max(axis=0) + 0.03 * cad.size
    width = float(max((high - low).min(), (high - low).max() / 64))
    counts = tuple(int(n) for n in np.ceil((high - low) / width - 1e-9))
    grid = np.stack(np.meshgrid(*(np.arange(n) for n in counts), indexing="ij"), axis=-1).reshape(-1, 2)
    return low, width, counts, low + width * grid


def _handed_on(leaf, which, split):
    """The cones of the squares that are split, given to each of their four children."""
    number = np.cumsum(split) - 1
    chosen = split[leaf]
    child = (4 * number[leaf[chosen]][:, None] + np.arange(4)).ravel()
    cones = np.repeat(which[chosen], 4)
    order = np.argsort(child, kind="stable")
    return child[order], cones[order]


def _leaf_values(cones, corner, widths, leaf, which, chosen, cap):
    """Sizes at the four corners of the chosen squares from their remaining cones, NaN for the others: (n, 4)."""
    values = np.full((len(corner), 4), np.nan)
    if chosen.any():
        number = np.cumsum(chosen) - 1
        first = np.searchsorted(number[leaf], np.arange(number[-1] + 1))
        for k, place in enumerate(SQUARE):
            sizes = cones.pairs(corner[leaf] + widths[leaf, None] * place, which)
            values[chosen, k] = np.minimum(np.minimum.reduceat(sizes, first), cap)
    return values


def inside_share(cad: Cad, field: SizeField) -> np.ndarray:
    """Share of each leaf that lies in the fluid (0 or 1, by its centre)."""
    return (windings(field.centres, *cad.pieces()) > 0).astype(float)


def _bend_limit(sample):
    bend = sample.curve.curvature if len(sample.xy) == len(sample.curve.xy) else np.zeros(len(sample.xy))
    per_turn = np.where(bend < 0, PER_TURN_OUTER, PER_TURN_INNER)
    return 2 * np.pi / (per_turn * np.maximum(np.abs(bend), 1e-300))


def _corner_share(junction):
    """Less grading into a blunt corner: its singularity is weak."""
    whole = junction.angle if junction.before.role == junction.after.role == "wall" else 2 * junction.angle
    blunt = np.clip((250.0 - whole) / 60.0, 0.0, 1.0)
    return CORNER_SHARE * 40.0**blunt


def _port_width(cad, curve):
    whole = any(c.role in ("axis", "symmetry") and set(c.ends) & set(curve.ends) for c in cad.boundary)
    return curve.length * (2 if whole else 1)


def _along(xy, sizes, slope):
    n = len(xy) - 1
    return Cones(xy[:-1], xy[1:], sizes[:-1], sizes[1:], np.full(n, slope))


def _points(xy, sizes, slope):
    return Cones(xy, xy, sizes, sizes, np.full(len(xy), slope))
