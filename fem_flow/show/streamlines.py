"""Which levels of the stream function to draw, so that eddies of every size get lines of their own.

The flow that passes through lies between the values on the boundary; an eddy is a hill or a hollow of the stream function
that no path of rising (falling) values connects with the boundary. Hills are found with a merge tree over the nodes: walk
down from the highest node, join neighbours, and note where a hill first meets the boundary or a higher hill.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Eddy:
    """One recirculating zone: its extreme value, the value on its rim, and the nodes inside the rim."""

    extreme: float
    rim: float
    nodes: np.ndarray


def neighbours(cells: np.ndarray, n_nodes: int) -> tuple[np.ndarray, np.ndarray]:
    """Nodes joined by an edge of the four small triangles in each quadratic cell, as CSR (starts, others)."""
    pairs = np.array([(0, 3), (3, 1), (1, 4), (4, 2), (2, 5), (5, 0), (3, 4), (4, 5), (5, 3)])
    ends = np.asarray(cells)[:, pairs].reshape(-1, 2)
    both = np.unique(np.vstack([ends, ends[:, ::-1]]), axis=0)
    return np.searchsorted(both[:, 0], np.arange(n_nodes + 1)), both[:, 1]


def eddies(cells: np.ndarray, stream: np.ndarray, boundary: np.ndarray, least: float) -> list[Eddy]:
    """All hills and hollows whose height above the rim is at least ``least`` (in the unit of ``stream``), strongest first."""
    starts, others = neighbours(cells, len(stream))
    on_boundary = np.zeros(len(stream), dtype=bool)
    on_boundary[boundary] = True
    used = np.zeros(len(stream), dtype=bool)
    used[np.unique(cells)] = True
    found = []
    for sign in (1.0, -1.0):
        found += [
            Eddy(sign * top, sign * rim, nodes)
            for top, rim, nodes in _hills(starts, others, sign * stream, on_boundary, used, least)
        ]
    return sorted(found, key=lambda e: -abs(e.extreme - e.rim))


def _hills(starts, others, height, on_boundary, used, least):
    """(top, rim, nodes) of every hill; a hill ends where it meets the boundary or a higher hill."""
    # only nodes near some interior peak matter, yet the walk is one pass in any case
    order = np.argsort(-height, kind="stable")
    order = order[used[order]].tolist()
    h, edge = height.tolist(), on_boundary.tolist()
    starts, others = starts.tolist(), others.tolist()
    root = [-1] * len(h)
    members: dict[int, list | None] = {}  # None: the hill has met the boundary
    result = []

    def find(i):
        while root[i] != i:
            root[i] = root[root[i]]
            i = root[i]
        return i

    def close(peak, rim):
        if members[peak] is not None and h[peak] - rim >= least:
            result.append((h[peak], rim, np.array(members[peak])))

    for node in order:
        touching = {find(k) for k in others[starts[node] : starts[node + 1]] if root[k] >= 0}
        if not touching:
            root[node] = node
            members[node] = None if edge[node] else [node]
            continue
        highest = max(touching, key=lambda peak: h[peak])
        dead = edge[node] or any(members[peak] is None for peak in touching)
        for peak in touching:
            if dead or peak != highest:
                close(peak, h[node])
        if dead:
            joined = None
        else:
            joined = max((members[peak] for peak in touching), key=len)
            for peak in touching:
                if members[peak] is not joined:
                    joined.extend(members[peak])
            joined.append(node)
        for peak in touching:
            root[peak] = highest
            if peak != highest:
                members.pop(peak)
        members[highest] = joined
        root[node] = highest
    return result


def levels_through(stream: np.ndarray, boundary: np.ndarray, count: int) -> np.ndarray:
    """Levels of the flow that passes through: the same flow between neighbours, half of it next to the walls."""
    low, high = float(stream[boundary].min()), float(stream[boundary].max())
    reach = float(np.ptp(stream))
    if high - low <= 1e-6 * reach or reach == 0.0:
        return np.zeros(0)
    return low + (high - low) * (np.arange(count) + 0.5) / count


def levels_of(eddy: Eddy, count: int) -> np.ndarray:
    """Levels inside one eddy, from near its rim to near its centre."""
    return eddy.rim + (eddy.extreme - eddy.rim) * (np.arange(count) + 0.35) / count
