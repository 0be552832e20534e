"""Boundary points where the stress of the exact flow has no limit: sharp re-entrant corners, walls that move differently.

At a sharp re-entrant corner the stress grows like r^-0.46 (fluid angle 270 degrees; Dean & Montagnon 1949, Moffatt 1964): a
peak has no limit, while forces and powers have. Where two walls touch that move differently it grows like 1/r (Taylor 1962):
then the force on both, the mean shear and the dissipated power have no limit either. Sources quoted from memory.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.flow.sliding import wall_direction
from fem_flow.flow.solution import Solution
from fem_flow.measure.rim import SMOOTH, Rim, rim_of

RINGS = 2
"""Rings of cells around a singular point whose pressure is not trusted."""


@dataclass(frozen=True)
class Flaw:
    """A singular point of the boundary.

    Attributes
    ----------
    node : its node number
    place : (x, y), m
    walls : the walls that end there
    jump : whether walls that move differently touch there; otherwise a sharp re-entrant corner
    """

    node: int
    place: tuple[float, float]
    walls: tuple[str, ...]
    jump: bool

    @property
    def says(self) -> str:
        """Why a peak there is withheld, and what to do."""
        x, y = (1e3 * c for c in self.place)
        if self.jump:
            who = " and ".join(self.walls) if len(self.walls) > 1 else f"{self.walls[0]} and its neighbour"
            return f"{who} move differently where they touch at x = {x:.4g} mm, y = {y:.4g} mm: model the gap between them"
        return f"there is a sharp re-entrant corner at x = {x:.4g} mm, y = {y:.4g} mm: give the edge a radius"


def flaws(solution: Solution) -> tuple[Flaw, ...]:
    """All singular points of the boundary; found once."""
    if "_flaws" not in solution.__dict__:
        rim = rim_of(solution)
        kinds = np.array([_kind(solution, name) for name in rim.names])
        owner, ahead = rim.owner, rim.owner[rim.next]
        ends = np.flatnonzero((np.abs(rim.turn) > SMOOTH) | (owner != ahead))
        found = (_judge(rim, int(edge), kinds) for edge in ends)
        solution.__dict__["_flaws"] = tuple(f for f in found if f is not None)
    return solution.__dict__["_flaws"]


def flaw_of(solution: Solution, wall: str) -> Flaw | None:
    """The worst singular point of a wall, walls that move differently before sharp corners; or None."""
    mine = [f for f in flaws(solution) if wall in f.walls]
    return max(mine, key=lambda f: f.jump, default=None)


def first_jump(solution: Solution) -> Flaw | None:
    """A point where walls that move differently touch, or None."""
    return next((f for f in flaws(solution) if f.jump), None)


def near_flaws(solution: Solution) -> np.ndarray:
    """(n_nodes,) whether a node lies within two rings of cells of a singular point."""
    space = solution.space
    near = np.zeros(space.n_velocity, dtype=bool)
    near[[f.node for f in flaws(solution)]] = True
    for _ in range(RINGS):
        near[space.cells[near[space.cells].any(axis=1)]] = True
    return near


def rests(solution: Solution, name: str) -> bool:
    """Whether a boundary is a wall at rest (or a closed port)."""
    return _kind(solution, name) == "solid" and _speed(solution, name) == 0.0


def _kind(solution, name):
    """``solid`` (no slip), ``guide`` (only the normal velocity is fixed) or ``port``."""
    role = solution.mesh.roles[name]
    if role == "port":
        return "solid" if solution.case.ports[name].what == "closed" else "port"
    if role != "wall":
        return "guide"
    condition = solution.case.walls.get(name)
    return "guide" if condition is not None and condition.what == "slip" else "solid"


def _speed(solution, name):
    condition = solution.case.walls.get(name)
    return condition.value if condition is not None and condition.what == "sliding" else 0.0


def _judge(rim: Rim, edge: int, kinds):
    """The singular point between an edge and the next, or None."""
    solution, after = rim.solution, int(rim.next[edge])
    names = [rim.names[rim.owner[e]] for e in (edge, after)]
    kind = [kinds[rim.owner[e]] for e in (edge, after)]
    if "port" in kind:
        return None
    angle = 180.0 - rim.turn[edge]
    fastest = max((abs(_speed(solution, n)) for n in rim.names), default=0.0)
    tangents = [_tangent(rim, edge, 1), _tangent(rim, after, 0)]
    speeds = [_velocity(rim, e, t) if k == "solid" else None for e, t, k in zip((edge, after), tangents, kind, strict=True)]
    if kind == ["solid", "solid"]:
        jump = np.linalg.norm(speeds[0] - speeds[1]) > 1e-6 * fastest
        sharp = angle > 180.0 + SMOOTH
    elif "solid" in kind:
        moving, guide = (speeds[0], tangents[1]) if kind[0] == "solid" else (speeds[1], tangents[0])
        jump = abs(moving[0] * guide[1] - moving[1] * guide[0]) > 1e-6 * fastest
        sharp = 2 * angle > 180.0 + SMOOTH
    else:
        jump, sharp = False, angle > 180.0 + SMOOTH
    walls = tuple(dict.fromkeys(n for n in names if solution.mesh.roles[n] == "wall"))
    if not walls or not (jump or sharp):
        return None
    node = int(rim.edges[edge, 1])
    x, y = solution.space.points[node] * solution.scales.length
    return Flaw(node, (float(x), float(y)), walls, bool(jump))


def _tangent(rim, edge, at):
    """Unit tangent at the start (0) or end (1) of an edge, along the edge."""
    start, end, middle = rim.solution.space.points[rim.edges[edge]]
    slope = start + 3 * end - 4 * middle if at else 4 * middle - 3 * start - end
    return slope / np.linalg.norm(slope)


def _velocity(rim, edge, tangent):
    """Velocity of a wall at the end of one of its edges, m/s."""
    name = rim.names[rim.owner[edge]]
    speed = _speed(rim.solution, name)
    if speed == 0.0:
        return np.zeros(2)
    along = wall_direction(rim.solution.boundaries[name])[:, rim.edges[edge, 2]]
    return speed * tangent * (1.0 if along @ tangent >= 0 else -1.0)
