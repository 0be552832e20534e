"""The outline of a drawn part in metres: its curves for drawing, its sharp corners, its narrowest gap."""

from __future__ import annotations

import numpy as np

from fem_flow.part.cad import Cad
from fem_flow.part.gap import Facing, Junction, narrowest
from fem_flow.part.mesh import Corner, Curve, Outline

SHARP = 190.0
"""Fluid angle in degrees beyond which a corner between two walls is a sharp re-entrant one."""


def sharp_corners(facing: Facing) -> list[Junction]:
    """The sharp re-entrant corners; a wall that meets a symmetry line or the axis counts with its mirror image."""
    found = []
    for j in facing.junctions:
        roles = {j.before.role, j.after.role}
        if roles == {"wall"} and j.angle > SHARP:
            found.append(j)
        elif "wall" in roles and roles & {"axis", "symmetry"} and 2 * j.angle > SHARP:
            found.append(j)
    return found


def corner_list(cad: Cad, sharp: list[Junction]) -> tuple[Corner, ...]:
    """Sharp corners in metres; the angle of one on a symmetry line or the axis is that of the whole, mirrored part."""
    corners = []
    for j in sharp:
        walls = tuple(dict.fromkeys(c.name for c in (j.before, j.after) if c.role == "wall"))
        whole = j.before.role == j.after.role == "wall"
        x, y = (j.xy * cad.metres).tolist()
        corners.append(Corner(x, y, j.angle if whole else 2 * j.angle, walls))
    return tuple(corners)


def narrowest_gap(gmsh, cad: Cad, facing: Facing, samples, sharp) -> tuple[float, np.ndarray, np.ndarray]:
    """Narrowest gap and its two facing points, in drawing units; a sampled minimum between bends is sharpened by going to and
    fro between the true curves.

    A part in which no walls face each other gets 4 area / perimeter, and NaN for the points.
    """
    gap, p, q = narrowest(facing, samples, sharp)
    if not np.isfinite(gap):
        return 4 * cad.area / sum(c.length for c in cad.boundary), p, q
    walls = [c for c in cad.boundary if c.role == "wall"]
    pair = [_nearest_curve(walls, p), _nearest_curve(walls, q)]
    on_walls = all(distance < 1e-3 * gap for distance, _ in pair)
    if on_walls and not all(curve.straight for _, curve in pair):
        a, b = p, q
        for _ in range(60):
            b_new = _closest(gmsh, pair[1][1].tag, a)
            a_new = _closest(gmsh, pair[0][1].tag, b_new)
            moved = np.linalg.norm(a_new - a) + np.linalg.norm(b_new - b)
            a, b = a_new, b_new
            if moved < 1e-10 * gap:
                break
        sharper = float(np.linalg.norm(a - b))
        if 0.9 * gap < sharper < 1.1 * gap:
            gap, p, q = sharper, a, b
    return gap, p, q


def outline_of(cad: Cad, corners: tuple[Corner, ...], gap) -> Outline:
    """The outline in metres; successive curves of one name are joined."""
    joined: list[tuple[str, str, list[np.ndarray], int, int]] = []
    for curve in cad.boundary + tuple(c for c in cad.inside if c.role == "section"):
        if joined and joined[-1][0] == curve.name and joined[-1][4] == curve.ends[0] != joined[-1][3]:
            name, role, pieces, first, _ = joined[-1]
            joined[-1] = (name, role, [*pieces, curve.xy[1:]], first, curve.ends[1])
        else:
            joined.append((curve.name, curve.role, [curve.xy], *curve.ends))
    curves = tuple(Curve(name, role, np.concatenate(pieces) * cad.metres) for name, role, pieces, _, _ in joined)
    points = np.concatenate([c.points for c in curves])
    box = (*points.min(axis=0).tolist(), *points.max(axis=0).tolist())
    size, p, q = gap
    at = (tuple((p * cad.metres).tolist()), tuple((q * cad.metres).tolist()))
    return Outline(cad.kind, cad.unit, curves, corners, cad.area * cad.metres**2, box, size * cad.metres, at)


def _nearest_curve(curves, at):
    found = []
    for curve in curves:
        start, span = curve.xy[:-1], np.diff(curve.xy, axis=0)
        t = np.clip(np.einsum("nx,nx->n", at - start, span) / np.einsum("nx,nx->n", span, span), 0, 1)
        found.append((float(np.linalg.norm(start + t[:, None] * span - at, axis=1).min()), curve))
    return min(found, key=lambda f: f[0])


def _closest(gmsh, tag, at):
    return np.array(gmsh.model.getClosestPoint(1, tag, [at[0], at[1], 0.0])[0][:2])
