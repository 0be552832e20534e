"""Figures of the wall shear: mean, least, largest, 99th percentile, and where the flow attaches and detaches."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Number, number
from fem_flow.measure.shear import WallShear, wall_shear
from fem_flow.measure.singular import flaw_of, rests

FLAT = 1e-3
"""A change of sign of the shear counts where it exceeds this share of the wall's 99th percentile on both sides."""
ROUND_OFF = 1e-10
"""Stresses below this share of the pressure scale of the flow are none."""
LEVEL = 1e-6
"""Values within this share of the largest one are as large."""


def measure(solution: Solution) -> Iterator[Number]:
    """Mean, least, largest and 99th percentile of the magnitude on each wall; where the shear changes sign on resting walls."""
    walls: dict[str, list[WallShear]] = {}
    for wall in wall_shear(solution):
        walls.setdefault(wall.name, []).append(wall)
    for name, pieces in walls.items():
        yield from _statistics(solution, name, pieces)
        if rests(solution, name):
            floor = max(FLAT * _percentile(pieces, 0.99), ROUND_OFF * solution.scales.pressure)
            for wall in pieces:
                yield from _sign_changes(wall, floor)


def _gather(pieces: list[WallShear]):
    parts = [(k, st) for k, wall in enumerate(pieces) for st in wall.stretches]
    value = np.abs(np.concatenate([st.at_points.ravel() for _, st in parts]))
    weight = np.concatenate([st.weight.ravel() for _, st in parts])
    good = np.isfinite(value)
    return value[good], weight[good]


def _candidates(pieces: list[WallShear]):
    """Magnitude, arc length and piece of all nodes and integration points that are given, in order of arc length."""
    rows = []
    for k, wall in enumerate(pieces):
        for st in wall.stretches:
            value = np.abs(np.concatenate([st.shear, st.at_points.ravel()]))
            arc = np.concatenate([st.arc, st.point_arc.ravel()])
            rows.append(np.stack([value, arc, np.full(len(arc), k)]))
    value, arc, owner = np.concatenate(rows, axis=1)
    order = np.lexsort((arc, owner))
    order = order[np.isfinite(value[order])]
    return value[order], arc[order], owner[order].astype(int)


def _percentile(pieces, share):
    value, weight = _gather(pieces)
    if not len(value):
        return np.nan
    order = np.argsort(value)
    return float(np.interp(share, (np.cumsum(weight[order]) - 0.5 * weight[order]) / weight.sum(), value[order]))


def _least(pieces, values):
    """Smallest magnitude; 0 where the shear changes sign along a stretch."""
    for wall in pieces:
        for st in wall.stretches:
            if (st.shear[:-1] * st.shear[1:] < 0).any():
                return 0.0
    return float(values.min())


def _statistics(solution, name, pieces):
    value, weight = _gather(pieces)
    of = (name,)
    if not len(value):
        short = "the whole wall lies within two elements of a sharp corner"
        for quantity in ("mean", "min", "p99", "max", "max_at"):
            yield number(f"wall_shear_{quantity}", of, np.nan, short)
        return
    flaw = flaw_of(solution, name)
    note = "without the two elements next to a sharp corner" if flaw else None
    if flaw is not None and flaw.jump:
        note = "without the two elements next to the place where walls move differently"
        yield number("wall_shear_mean", of, np.nan, f"the mean has no limit: {flaw.says}")
    else:
        yield number("wall_shear_mean", of, float((value * weight).sum() / weight.sum()), note)
    everywhere, arc, owner = _candidates(pieces)
    yield number("wall_shear_min", of, _least(pieces, everywhere), note)
    yield number("wall_shear_p99", of, _percentile(pieces, 0.99), note)
    if flaw is not None:
        why = f"the peak has no limit, for {flaw.says}; or use the 99th percentile"
        yield number("wall_shear_max", of, np.nan, why)
        yield number("wall_shear_max_at", of, np.nan, why)
        return
    largest = float(everywhere.max())
    level = everywhere >= (1 - LEVEL) * largest
    peak = int(np.argmax(level))
    place = of if len(pieces) == 1 else (name, str(pieces[owner[peak]].piece))
    even = "the shear is as large all along the wall; this is where it begins" if level.mean() > 0.5 else None
    yield number("wall_shear_max", of, largest)
    yield number("wall_shear_max_at", place, float(arc[peak]), even)


def _sign_changes(wall: WallShear, floor: float) -> Iterator[Number]:
    """Attachment (the shear points away on both sides) and detachment points of one piece, by arc length.

    Signs are those of the means over edges, so that a wiggle between two nodes is no eddy.
    """
    of = (wall.name,) if wall.pieces == 1 else (wall.name, str(wall.piece))
    arc, mean = _edge_means(wall)
    marked = np.abs(mean) > floor
    arc, mean = arc[marked], mean[marked]
    nodes = np.concatenate([st.arc for st in wall.stretches]), np.concatenate([st.shear for st in wall.stretches])
    corners = np.array([st.arc[0] for st in wall.stretches])
    if wall.closed and len(arc):
        arc, mean = np.append(arc, arc[0] + wall.length), np.append(mean, mean[0])
        nodes = np.concatenate([nodes[0], nodes[0] + wall.length]), np.tile(nodes[1], 2)
        corners = np.concatenate([corners, corners + wall.length])
    found = []
    for k in np.flatnonzero(mean[:-1] * mean[1:] < 0):
        where = _crossing(*nodes, corners, arc[k : k + 2], mean[k : k + 2])
        found.append((where % wall.length if wall.closed else where, mean[k] < 0))
    for where, attaches in sorted(found):
        yield number("attachment_point" if attaches else "detachment_point", of, where)


def _edge_means(wall: WallShear):
    """Arc length of the middle of each edge that has a shear, and its mean there, in order."""
    at_points = np.concatenate([st.at_points for st in wall.stretches])
    weight = np.concatenate([st.weight for st in wall.stretches])
    middle = np.concatenate([st.point_arc[:, st.point_arc.shape[1] // 2] for st in wall.stretches])
    mean = (at_points * weight).sum(axis=1) / weight.sum(axis=1)
    order = np.argsort(middle)
    order = order[np.isfinite(mean[order])]
    return middle[order], mean[order]


def _crossing(arc, shear, corners, between, means):
    """Where the shear passes zero between two edge middles: between two nodes, or else at the corner where it jumps."""
    near = (arc >= between[0] * (1 - 1e-9)) & (arc <= between[1] * (1 + 1e-9))
    arc, shear = arc[near], shear[near]
    with np.errstate(invalid="ignore"):
        turns = (shear[:-1] * shear[1:] <= 0) & (shear[:-1] != shear[1:])
        steps = np.flatnonzero(turns & (arc[1:] > arc[:-1]))
    if len(steps):
        k = int(steps[len(steps) // 2])
        return float(arc[k] + shear[k] / (shear[k] - shear[k + 1]) * (arc[k + 1] - arc[k]))
    inside = corners[(corners > between[0]) & (corners < between[1])]
    if len(inside):
        return float(inside[0])
    return float(between[0] + means[0] / (means[0] - means[1]) * (between[1] - between[0]))
