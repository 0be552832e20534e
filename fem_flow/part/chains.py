"""Edges put head to tail."""

from __future__ import annotations

import numpy as np


def ordered(edges: np.ndarray) -> np.ndarray:
    """Directed edges (m, 3) head to tail, chain after chain; a closed chain starts anywhere."""
    after = {int(e[0]): k for k, e in enumerate(edges)}
    ends = {int(e[1]) for e in edges}
    starts = [k for k, e in enumerate(edges) if int(e[0]) not in ends]
    taken = np.zeros(len(edges), bool)
    order: list[int] = []
    for first in [*starts, *range(len(edges))]:
        k = first
        while k is not None and not taken[k]:
            taken[k] = True
            order.append(k)
            k = after.get(int(edges[k, 1]))
    return edges[order]


def oriented_section(edges: np.ndarray, points: np.ndarray) -> np.ndarray:
    """Edges of an interior curve, in any direction, turned chain by chain so that the normal to their right points to +x.

    A chain at constant y gets its normal to +y, a closed one its normal outward (it runs anticlockwise).
    """
    chains = []
    left = list(range(len(edges)))
    while left:
        chain = _walk(edges, left)
        a, b = points[chain[0, 0]], points[chain[-1, 1]]
        dx, dy = b - a
        if chain[0, 0] == chain[-1, 1]:
            x, y = points[chain[:, 0]].T
            backwards = float(x @ np.roll(y, -1) - y @ np.roll(x, -1)) < 0
        elif abs(dy) > 1e-7 * np.hypot(dx, dy):
            backwards = dy < 0
        else:
            backwards = dx > 0
        chains.append(chain[::-1][:, [1, 0, 2]] if backwards else chain)
    return np.concatenate(chains)


def _walk(edges, left):
    """One chain of undirected edges, starting at a loose end where there is one; its members are taken off ``left``."""
    at: dict[int, list[int]] = {}
    for k in left:
        at.setdefault(int(edges[k, 0]), []).append(k)
        at.setdefault(int(edges[k, 1]), []).append(k)
    node = next((n for n, members in at.items() if len(members) == 1), int(edges[left[0], 0]))
    chain, todo = [], set(left)
    while True:
        k = next((k for k in at[node] if k in todo), None)
        if k is None:
            break
        todo.remove(k)
        edge = edges[k] if edges[k, 0] == node else edges[k, [1, 0, 2]]
        chain.append(edge)
        node = int(edge[1])
    left[:] = sorted(todo)
    return np.array(chain)
