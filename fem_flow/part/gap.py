"""How wide the passage is: at every point of a wall the distance across the fluid to the facing wall.

A symmetry line or the axis counts as a mirror: the gap seen across it is twice the distance to it. Two places face each
other when the line between them leaves both walls within 37 degrees of their normals (cosine 0.8).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.part.cad import Cad, CadCurve

FACING = 0.8
ACUTE = 100.0
"""Walls that meet at a fluid angle below this many degrees are one corner, not a gap."""


@dataclass(frozen=True)
class Junction:
    """Where two pieces of the boundary meet: their order, the place and the fluid angle in degrees."""

    before: CadCurve
    after: CadCurve
    xy: np.ndarray
    angle: float


@dataclass(frozen=True)
class WallSample:
    """Points along one wall curve and the gap across the fluid there (inf where nothing faces it).

    Attributes
    ----------
    curve : CadCurve
    xy : (n, 2); gap : (n,); partner : (n, 2) the facing points; mirrored : (n,) whether across axis or symmetry
    """

    curve: CadCurve
    xy: np.ndarray
    gap: np.ndarray
    partner: np.ndarray
    mirrored: np.ndarray


class Facing:
    """Measures gaps between the walls of a part."""

    def __init__(self, cad: Cad):
        self.cad = cad
        self.junctions = junctions(cad)
        curves = [c for c in cad.boundary if c.role != "port"]
        self.start = np.concatenate([c.xy[:-1] for c in curves])
        self.span = np.concatenate([np.diff(c.xy, axis=0) for c in curves])
        self.square = np.einsum("nx,nx->n", self.span, self.span)
        self.normal = np.stack([-self.span[:, 1], self.span[:, 0]], axis=1) / np.sqrt(self.square)[:, None]
        self.owner = np.concatenate([np.full(len(c.xy) - 1, c.tag) for c in curves])
        self.mirror = np.concatenate([np.full(len(c.xy) - 1, c.role != "wall") for c in curves])
        self._neighbours = {}
        for j in self.junctions:
            if j.angle < ACUTE:
                self._neighbours.setdefault(j.before.tag, set()).add(j.after.tag)
                self._neighbours.setdefault(j.after.tag, set()).add(j.before.tag)

    def across(self, xy: np.ndarray, normal: np.ndarray, tag: int | tuple[int, ...]):
        """Gap, facing point and whether it is across a mirror, for points (n, 2) with inward normals on the curves ``tag``."""
        tags = (tag,) if isinstance(tag, int) else tag
        kept = ~np.isin(self.owner, [other for t in tags for other in self._neighbours.get(t, ())])
        start, span, square = self.start[kept], self.span[kept], self.square[kept]
        facing, mirror = self.normal[kept], self.mirror[kept]
        gap, partner = np.full(len(xy), np.inf), np.full((len(xy), 2), np.nan)
        mirrored = np.zeros(len(xy), bool)
        block = max(1, 2_000_000 // max(len(start), 1))
        for first in range(0, len(xy), block):
            p, n = xy[first : first + block, None], normal[first : first + block]
            t = np.clip(np.einsum("pmx,mx->pm", p - start, span) / square, 0.0, 1.0)
            d = start + t[..., None] * span - p
            distance = np.sqrt(np.einsum("pmx,pmx->pm", d, d))
            least = FACING * distance
            good = (np.einsum("pmx,px->pm", d, n) > least) & (-np.einsum("pmx,mx->pm", d, facing) > least)
            seen = np.where(good & (distance > 1e-9 * self.cad.size), distance * np.where(mirror, 2.0, 1.0), np.inf)
            best = np.argmin(seen, axis=1) if len(start) else np.zeros(0, int)
            rows = np.arange(len(best))
            gap[first : first + block] = seen[rows, best]
            partner[first : first + block] = p[:, 0] + d[rows, best]
            mirrored[first : first + block] = mirror[best]
        return gap, partner, mirrored

    def sample(self, curve: CadCurve) -> WallSample:
        """Points along a wall, denser where the gap changes quickly."""
        xy, normal = curve.xy, curve.normal
        if curve.straight:
            s = np.linspace(0.0, 1.0, 17)[:, None]
            xy, normal = xy[0] + s * (xy[-1] - xy[0]), np.repeat(normal[:1], 17, axis=0)
        gap, partner, mirrored = self.across(xy, normal, curve.tag)
        for _ in range(7 if curve.straight else 0):
            finite = np.minimum(gap, self.cad.size)
            step = np.linalg.norm(np.diff(xy, axis=0), axis=1)
            least = np.minimum(finite[:-1], finite[1:])
            jump = np.maximum(finite[:-1], finite[1:]) > 1.25 * least
            split = np.flatnonzero(jump & (step > 0.1 * least))
            if not len(split) or len(xy) > 600:
                break
            middle = 0.5 * (xy[split] + xy[split + 1])
            found = self.across(middle, np.repeat(normal[:1], len(split), axis=0), curve.tag)
            xy = np.insert(xy, split + 1, middle, axis=0)
            normal = np.repeat(normal[:1], len(xy), axis=0)
            gap, mirrored = np.insert(gap, split + 1, found[0]), np.insert(mirrored, split + 1, found[2])
            partner = np.insert(partner, split + 1, found[1], axis=0)
        return WallSample(curve, xy, gap, partner, mirrored)

    def at_corner(self, junction: Junction):
        """Gap and facing point at a re-entrant corner: the nearest that any direction between its two walls' normals sees."""
        a = junction.before.normal[-1]
        first, turn = np.arctan2(a[1], a[0]), np.radians(junction.angle - 180.0)
        angles = first - np.linspace(0.0, turn, 9)
        normals = np.stack([np.cos(angles), np.sin(angles)], axis=1)
        tags = (junction.before.tag, junction.after.tag)
        gap, partner, mirrored = self.across(np.repeat(junction.xy[None], 9, axis=0), normals, tags)
        best = int(np.argmin(gap))
        return float(gap[best]), partner[best], bool(mirrored[best])

    def sees(self, p: np.ndarray, q: np.ndarray) -> bool:
        """Whether the straight line from p to q stays in the fluid between its ends."""
        d = q - p
        cross = d[0] * self.span[:, 1] - d[1] * self.span[:, 0]
        safe = np.where(np.abs(cross) < 1e-300, np.nan, cross)
        w = self.start - p
        along = (w[:, 0] * self.span[:, 1] - w[:, 1] * self.span[:, 0]) / safe
        other = (w[:, 0] * d[1] - w[:, 1] * d[0]) / safe
        return not bool(((along > 1e-6) & (along < 1 - 1e-6) & (other > 1e-9) & (other < 1 - 1e-9)).any())


def junctions(cad: Cad) -> tuple[Junction, ...]:
    """Every point where a piece of the boundary ends and the next begins."""
    leaving = {c.ends[0]: c for c in cad.boundary}
    found = []
    for curve in cad.boundary:
        after = leaving[curve.ends[1]]
        a, b = curve.normal[-1], after.normal[0]
        turn = np.degrees(np.arctan2(a[0] * b[1] - a[1] * b[0], a @ b))
        found.append(Junction(curve, after, curve.xy[-1], float(180.0 - turn)))
    return tuple(found)


def narrowest(facing: Facing, samples: list[WallSample], corners: list[Junction]) -> tuple[float, np.ndarray, np.ndarray]:
    """The smallest gap of the part and its two facing points; a gap across a mirror is returned with the mirrored point.

    Returns infinity and NaN where no two walls face each other.
    """
    candidates = [(g, p, q, m) for s in samples for g, p, q, m in zip(s.gap, s.xy, s.partner, s.mirrored, strict=True)]
    candidates += [(g, j.xy, q, m) for j in corners for g, q, m in [facing.at_corner(j)]]
    candidates = [c for c in candidates if np.isfinite(c[0])]
    for gap, p, q, mirrored in sorted(candidates, key=lambda c: (c[0], tuple(c[1])))[:200]:
        if facing.sees(p, q):
            return float(gap), p, 2 * q - p if mirrored else q
    return np.inf, np.full(2, np.nan), np.full(2, np.nan)
