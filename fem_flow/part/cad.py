"""The drawn curves as gmsh knows them, with their names, roles and orientation. Lengths are in the script's unit."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.case.declaration import Declaration
from fem_flow.errors import GeometryError
from fem_flow.part.names import curve_names, regions
from fem_flow.part.polygon import first_crossing, windings

FLAT = 1e-7
"""Relative to the part's size: what counts as zero (the CAD kernel pads its boxes by about this)."""


def short(value: float, size: float) -> str:
    """A coordinate for a sentence: five figures, nothing where it is nothing against the part's size."""
    return f"{0.0 if abs(value) < 1e-6 * size else value:.5g}"


@dataclass(frozen=True)
class CadCurve:
    """One curve of the drawing, traversed with the fluid on its left.

    Attributes
    ----------
    tag : gmsh's number
    name : boundary or section name, None for an unnamed curve inside the fluid
    role : ``"port"``, ``"wall"``, ``"axis"``, ``"symmetry"``, ``"section"`` or ``"inside"``; ``""`` until ``roles.with_roles``
    sign : +1 where the traversal follows the curve's own parameter, else -1 (+1 for curves inside)
    ends : numbers of the first and last point in traversal order
    straight : whether it is a straight line
    xy : (n, 2) points along it, first and last exactly on the ends
    normal : (n, 2) unit normals into the fluid (to the left)
    curvature : (n,), positive where the fluid lies inside the bend, negative where the solid does (a re-entrant edge)
    length : float
    """

    tag: int
    name: str | None
    role: str
    sign: int
    ends: tuple[int, int]
    straight: bool
    xy: np.ndarray
    normal: np.ndarray
    curvature: np.ndarray
    length: float


@dataclass(frozen=True)
class Cad:
    """The drawn part.

    Attributes
    ----------
    kind, unit : as declared
    metres : length of one drawing unit, m
    boundary : tuple of CadCurve, loop after loop
    inside : tuple of CadCurve: sections and unnamed curves inside the fluid
    surfaces : surface numbers
    regions : name -> surface numbers
    area : of the fluid, unit^2
    size : diagonal of the part's box
    """

    kind: str
    unit: str
    metres: float
    boundary: tuple[CadCurve, ...]
    inside: tuple[CadCurve, ...]
    surfaces: tuple[int, ...]
    regions: dict[str, tuple[int, ...]]
    area: float
    size: float

    def pieces(self) -> tuple[np.ndarray, np.ndarray]:
        """Start and end points (n, 2) of the straight pieces that stand for the boundary, the fluid on their left."""
        return np.concatenate([c.xy[:-1] for c in self.boundary]), np.concatenate([c.xy[1:] for c in self.boundary])

    def place(self, xy) -> str:
        """A place in the user's unit, for sentences."""
        return f"({short(xy[0], self.size)}, {short(xy[1], self.size)}) {self.unit}"


def read_cad(gmsh, declared: Declaration, metres: float) -> Cad:
    """Take the current model apart: which curves bound the fluid, what they are called, how they run.

    Raises
    ------
    GeometryError : with a reason, for everything that is wrong with the drawing or its names
    """
    gmsh.model.occ.synchronize()
    surfaces = tuple(tag for _, tag in gmsh.model.getEntities(2))
    if not surfaces or gmsh.model.getEntities(3):
        what = "it drew no surface" if not surfaces else "it drew a solid; draw the fluid as a plane surface"
        raise GeometryError(f"the script drew no fluid region: {what}", reason="no_surface")
    signs = _signs(gmsh, surfaces)
    size = _size_in_plane(gmsh, surfaces, declared.unit)
    outer = {tag: s[0] for tag, s in signs.items() if len(s) == 1}
    inner = [tag for tag, s in signs.items() if len(s) > 1]
    for surface in surfaces:
        inner += [tag for dim, tag in gmsh.model.mesh.getEmbedded(2, surface) if dim == 1]
    names = curve_names(gmsh, set(outer) | set(inner))
    boundary = [_curve(gmsh, tag, names.get(tag), sign) for tag, sign in outer.items()]
    inside = [_curve(gmsh, tag, names.get(tag), 1) for tag in dict.fromkeys(inner)]
    area = sum(sign * _sweep(gmsh, tag) for tag, sign in outer.items())
    _check_area(gmsh, surfaces, area, declared.unit)
    cad = Cad(
        declared.kind,
        declared.unit,
        metres,
        tuple(_in_loops(boundary, size, declared.unit)),
        tuple(inside),
        surfaces,
        regions(gmsh, surfaces),
        area,
        size,
    )
    _check_layers(cad)
    return cad


def _signs(gmsh, surfaces):
    """curve -> signs it carries in the loops of the surfaces it bounds, each with the fluid on the left."""
    signs: dict[int, list[int]] = {}
    for surface in surfaces:
        loops = [tag for _, tag in gmsh.model.getBoundary([(2, surface)], combined=False, oriented=True)]
        turned = 1 if sum(_sweep(gmsh, abs(t)) * np.sign(t) for t in loops) > 0 else -1
        for tag in loops:
            signs.setdefault(abs(tag), []).append(int(np.sign(tag)) * turned)
    return signs


def _sweep(gmsh, tag):
    """1/2 int (x dy - y dx) along a curve in its own direction, by a Gauss rule on 32 pieces."""
    low, high = (float(v[0]) for v in gmsh.model.getParametrizationBounds(1, tag))
    nodes, weights = np.polynomial.legendre.leggauss(6)
    edges = np.linspace(low, high, 33)
    half = np.diff(edges)[:, None] / 2
    t = (edges[:-1, None] + half * (1 + nodes)).ravel()
    w = (half * weights).ravel()
    xy = np.reshape(gmsh.model.getValue(1, tag, t), (-1, 3))
    slope = np.reshape(gmsh.model.getDerivative(1, tag, t), (-1, 3))
    return 0.5 * float(w @ (xy[:, 0] * slope[:, 1] - xy[:, 1] * slope[:, 0]))


def _size_in_plane(gmsh, surfaces, unit):
    boxes = np.array([gmsh.model.getBoundingBox(2, s) for s in surfaces])
    low, high = boxes[:, :3].min(axis=0), boxes[:, 3:].max(axis=0)
    size = float(np.hypot(*(high - low)[:2]))
    if max(abs(low[2]), abs(high[2])) > 1e-6 * max(size, 1.0):
        raise GeometryError(f"the drawing leaves the plane z = 0 (it reaches z = {high[2]:.4g} {unit})", reason="not_plane")
    return size


def _curve(gmsh, tag, name, sign):
    straight = gmsh.model.getType(1, tag) == "Line"
    low, high = (float(v[0]) for v in gmsh.model.getParametrizationBounds(1, tag))
    t, bend = _parameters(gmsh, tag, low, high, straight)
    xy = np.reshape(gmsh.model.getValue(1, tag, t), (-1, 3))[:, :2]
    slope = np.reshape(gmsh.model.getDerivative(1, tag, t), (-1, 3))[:, :2]
    points = [int(p) for _, p in gmsh.model.getBoundary([(1, tag)], combined=False, oriented=False)]
    if len(points) == 2:
        places = [np.array(gmsh.model.getValue(0, p, [])[:2]) for p in points]
        if np.linalg.norm(places[0] - xy[0]) > np.linalg.norm(places[1] - xy[0]):
            points, places = points[::-1], places[::-1]
        xy[0], xy[-1] = places
    ends = (points[0], points[-1])
    length = float(np.linalg.norm(np.diff(xy, axis=0), axis=1).sum())
    tangent = slope / np.linalg.norm(slope, axis=1)[:, None]
    if sign < 0:
        xy, tangent, bend, ends = xy[::-1], -tangent[::-1], -bend[::-1], ends[::-1]
    normal = np.stack([-tangent[:, 1], tangent[:, 0]], axis=1)
    return CadCurve(tag, name, "", sign, ends, straight, xy, normal, bend, length)


def _parameters(gmsh, tag, low, high, straight):
    """Parameters at which a curve is sampled (3 degrees of turning a piece), and its signed curvature there."""
    if straight:
        return np.array([low, high]), np.zeros(2)
    fine = np.linspace(low, high, 257)
    xy = np.reshape(gmsh.model.getValue(1, tag, fine), (-1, 3))[:, :2]
    slope = np.reshape(gmsh.model.getDerivative(1, tag, fine), (-1, 3))[:, :2]
    angle = np.unwrap(np.arctan2(slope[:, 1], slope[:, 0]))
    turning = np.abs(np.diff(angle))
    step = np.linalg.norm(np.diff(xy, axis=0), axis=1)
    count = int(np.clip(np.ceil(np.degrees(turning.sum()) / 3), 6, 240))
    measure = np.concatenate([[0.0], np.cumsum(turning / max(turning.sum(), 1e-12) + step / step.sum())])
    t = np.interp(np.linspace(0, measure[-1], count + 1), measure, fine)
    bend = np.gradient(angle, np.concatenate([[0.0], np.cumsum(step)]))
    return t, np.interp(t, fine, bend)


def _check_area(gmsh, surfaces, outline, unit):
    """The kernel's own area against that inside the outline: a Boolean that went wrong shows here."""
    kernel = sum(gmsh.model.occ.getMass(2, s) for s in surfaces)
    if not np.isclose(kernel, outline, rtol=1e-4):
        raise GeometryError(
            f"the drawn surfaces have an area of {kernel:.6g} {unit}^2 but their outline encloses {outline:.6g} {unit}^2: parts"
            " of the drawing overlap or a Boolean went wrong",
            reason="wrong_area",
            details={"surfaces": kernel, "outline": outline},
        )


def _check_layers(cad):
    """The boundary does not cross itself, and no surface lies on another: just inside it everything is encircled once."""
    start, end = cad.pieces()
    count = np.cumsum([0] + [len(c.xy) - 1 for c in cad.boundary])
    heads = {c.ends[0]: first for c, first in zip(cad.boundary, count, strict=False)}
    after = np.arange(1, len(start) + 1)
    after[count[1:] - 1] = [heads[c.ends[1]] for c in cad.boundary]
    crossing = first_crossing(start, end, after)
    if crossing is None:
        middle = [len(c.xy) // 2 for c in cad.boundary]
        foot = np.array([0.5 * (c.xy[k - 1] + c.xy[k]) for c, k in zip(cad.boundary, middle, strict=True)])
        inward = np.array([c.normal[k] for c, k in zip(cad.boundary, middle, strict=True)])
        wrong = windings(foot + 1e-5 * cad.size * inward, start, end) > 1
        crossing = (0, 0, foot[np.argmax(wrong)]) if wrong.any() else None
    if crossing is not None:
        raise GeometryError(
            f"the drawn surfaces overlap, or the outline crosses itself, at {cad.place(crossing[2])}; fuse or fragment surfaces"
            " that meet",
            reason="overlap",
            details={"at": (crossing[2] * cad.metres).tolist()},
        )


def _in_loops(boundary, size, unit):
    """The curves head to tail, loop after loop.

    Raises
    ------
    GeometryError : reason ``"touching"`` where more than two pieces of boundary meet in a point
    """
    leaving: dict[int, CadCurve] = {}
    for curve in boundary:
        if curve.ends[0] in leaving:
            raise GeometryError(
                f"the outline touches itself at ({short(curve.xy[0, 0], size)}, {short(curve.xy[0, 1], size)}) {unit}",
                reason="touching",
            )
        leaving[curve.ends[0]] = curve
    ordered = []
    while leaving:
        curve = leaving.pop(min(leaving, key=lambda point: leaving[point].tag))
        while curve is not None:
            ordered.append(curve)
            curve = leaving.pop(curve.ends[1], None)
    return ordered
