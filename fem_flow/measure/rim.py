"""The boundary of the fluid as a chain of edges: reactions split between neighbours, smooth stretches, pieces of walls.

The nodal reaction at a node shared by two boundaries is the sum of both tractions. It is split by the stresses of the computed
fields on the two adjacent edges, half of what these leave over to each; so that sums over names never change, a constant
pressure is split exactly, and a wall that meets a port does not feel the port.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.solution import Solution

SMOOTH = 10.0
"""Edges that turn by less than this many degrees belong to one smooth stretch; meshes are graded into sharper corners."""


@dataclass(frozen=True)
class Stretch:
    """A smooth run of edges of one boundary, in the direction that has the fluid on its left.

    Attributes
    ----------
    name : boundary
    edges : (m,) numbers in the rim, in order
    nodes : (2m+1,) node numbers along it (2m where ``closed``)
    start_angle, end_angle : fluid angle in degrees at its ends; 180 where closed
    before, after : boundary names of the neighbours at its ends (its own name where the wall only turns)
    """

    name: str
    edges: np.ndarray
    nodes: np.ndarray
    start_angle: float
    end_angle: float
    before: str
    after: str
    closed: bool


class Rim:
    """All boundary edges of a solution with their neighbours and traction loads."""

    def __init__(self, solution: Solution):
        self.solution = solution
        self.names = list(solution.boundaries)
        edges = [solution.boundaries[n].edges for n in self.names]
        self.edges = np.concatenate(edges)
        self.owner = np.repeat(np.arange(len(edges)), [len(e) for e in edges])
        self.boundary = Boundary(solution.space, "rim", self.edges)
        starts = np.full(solution.space.n_velocity, -1)
        starts[self.edges[:, 0]] = np.arange(len(self.edges))
        self.next = starts[self.edges[:, 1]]
        if (self.next < 0).any() or len(np.unique(self.next)) < len(self.next):
            raise ValueError("the boundary edges do not form closed loops")
        self.previous = np.empty_like(self.next)
        self.previous[self.next] = np.arange(len(self.edges))
        self.turn = self._turns()

    def _turns(self):
        """Left turn in degrees from each edge to the next."""
        p = self.solution.space.points[self.edges]
        leaving = p[:, 0] + 3 * p[:, 1] - 4 * p[:, 2]
        entering = -3 * p[:, 0] - p[:, 1] + 4 * p[:, 2]
        after = entering[self.next]
        cross = leaving[:, 0] * after[:, 1] - leaving[:, 1] * after[:, 0]
        return np.degrees(np.arctan2(cross, (leaving * after).sum(axis=1)))

    @cached_property
    def edge_load(self) -> np.ndarray:
        """(m, 3, 2) scaled: int t phi over each edge from the stress of the computed fields."""
        s = self.solution
        traction = self.boundary.traction(s.state.u, s.state.p, s.scales.mu)
        return np.einsum("eq,qi,eqc->eic", self.boundary.w, self.boundary.shapes, traction)

    @cached_property
    def reaction(self) -> np.ndarray:
        return self.solution.reaction()

    def share(self, edges: np.ndarray) -> np.ndarray:
        """Nodal reaction of a set of rim edges, (2, n_nodes) scaled, split at nodes shared with other edges."""
        inside = np.zeros(len(self.edges), dtype=bool)
        inside[edges] = True
        total = np.zeros((2, self.solution.space.n_velocity))
        nodes = np.unique(self.edges[edges])
        total[:, nodes] = self.reaction[:, nodes]
        for neighbour, end in ((self.next, 1), (self.previous, 0)):
            last = edges[~inside[neighbour[edges]]]
            node, own, other = self.edges[last, end], self.edge_load[last, end], self.edge_load[neighbour[last], 1 - end]
            total[:, node] = own.T + 0.5 * (self.reaction[:, node] - own.T - other.T)
        return total

    def of(self, name: str) -> np.ndarray:
        """Rim edges of a boundary."""
        return np.flatnonzero(self.owner == self.names.index(name))

    def pieces(self, name: str) -> list[np.ndarray]:
        """Connected runs of a boundary's edges, each in order along it."""
        left = set(self.of(name).tolist())
        runs = []
        while left:
            first = next((e for e in sorted(left) if self.previous[e] not in left), min(left))
            run = [first]
            left.discard(first)
            while self.next[run[-1]] in left:
                run.append(int(self.next[run[-1]]))
                left.discard(run[-1])
            runs.append(np.array(run))
        return runs

    def stretches(self, piece: np.ndarray) -> list[Stretch]:
        """Cut a piece at its corners into smooth stretches, in order."""
        closed = self.next[piece[-1]] == piece[0]
        corner = np.abs(self.turn[piece]) > SMOOTH
        if closed and corner.any():
            piece = np.roll(piece, -(int(np.flatnonzero(corner)[0]) + 1))
            corner = np.abs(self.turn[piece]) > SMOOTH
        cuts = np.flatnonzero(corner[:-1]) + 1
        return [self._stretch(run, closed and not corner.any()) for run in np.split(piece, cuts)]

    def _stretch(self, run, closed):
        along = self.edges[run][:, [0, 2]].ravel()
        nodes = along if closed else np.append(along, self.edges[run[-1], 1])
        before, after = self.previous[run[0]], self.next[run[-1]]
        angles = (180.0, 180.0) if closed else (180.0 - self.turn[before], 180.0 - self.turn[run[-1]])
        names = [self.names[self.owner[e]] for e in (run[0], before, after)]
        return Stretch(names[0], run, nodes, *angles, names[1], names[2], closed)


def rim_of(solution: Solution) -> Rim:
    """The rim of a solution, made once."""
    if "_rim" not in solution.__dict__:
        solution.__dict__["_rim"] = Rim(solution)
    return solution.__dict__["_rim"]
