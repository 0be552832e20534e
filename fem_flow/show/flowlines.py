"""Streamlines: level lines of the stream function, with a few small arrows."""

from __future__ import annotations

import numpy as np

from fem_flow.show.canvas import Canvas
from fem_flow.show.layout import Layout
from fem_flow.show.scene import level_lines
from fem_flow.show.stage import Stage
from fem_flow.show.streamlines import eddies, levels_of, levels_through

SHADOW = (0.10, 0.12, 0.22)
LEAST_EDDY = 5e-4  # of the whole range of the stream function; weaker ones are left out


def draw_streamlines(stage: Stage, canvas: Canvas, layout: Layout) -> int:
    """Lines of equal stream function with small arrows; returns how many eddies got lines of their own."""
    fields, surface = stage.fields, stage.surface
    on_rim = np.unique(stage.rim)
    reach = float(np.ptp(fields.stream))
    if reach == 0.0:
        return 0
    box = layout.box
    tall = (box[3] - box[1] if layout.wide else box[2] - box[0]) * layout.scale / len(stage.halves)
    through = levels_through(fields.stream, on_rim, int(np.clip(tall / 26, 3, 12)))
    carry = ("u", "v")
    found = [level_lines(surface, "stream", through, carry=carry)]
    whirls = eddies(fields.cells, fields.stream, on_rim, LEAST_EDDY * reach)
    for eddy in whirls:
        near = np.flatnonzero(np.isin(fields.cells, eddy.nodes).any(axis=1))
        size = np.ptp(fields.points[eddy.nodes], axis=0).min() * layout.scale
        if size < 8:
            continue
        found.append(level_lines(surface, "stream", levels_of(eddy, int(np.clip(size / 30, 2, 5))), near, carry))
    start, end, u, v = (np.concatenate([f[n] for f in found]) for n in ("start", "end", "u", "v"))
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, np.stack([start, end], axis=1))
        a, b = turn(start[inside]), turn(end[inside])
        canvas.segments(a, b, SHADOW, 4.6)
        canvas.segments(a, b, (1, 1, 1), 2.4)
    draw_arrows(stage, canvas, layout, (start + end) / 2, np.column_stack([u, v]))
    return len(whirls)


def draw_arrows(stage: Stage, canvas: Canvas, layout: Layout, at: np.ndarray, velocity: np.ndarray) -> None:
    """Small heads along the lines, a few, far apart from one another."""
    speed = np.linalg.norm(velocity, axis=1)
    good = np.flatnonzero(speed > 1e-9 * (speed.max() if len(speed) else 1.0))
    if not len(good):
        return
    order = np.random.default_rng(1).permutation(good)[:1500]
    spot, rim = at[order] * layout.scale, stage.rim_lines[:, ::3].reshape(-1, 2) * layout.scale
    near = np.array([((rim - k) ** 2).sum(axis=1).min() for k in spot])
    order, spot = order[near > 16.0**2], spot[near > 16.0**2]
    chosen = []
    while len(order):
        chosen.append(order[0])
        far = ((spot - spot[0]) ** 2).sum(axis=1) > 150.0**2
        order, spot = order[far], spot[far]
    if not chosen:
        return
    chosen = np.array(chosen)
    along = velocity[chosen] / speed[chosen, None]
    across = np.column_stack([-along[:, 1], along[:, 0]])
    step = 1.0 / layout.scale
    head = np.stack(
        [
            at[chosen] + 11 * step * along,
            at[chosen] - 9 * step * along + 8.5 * step * across,
            at[chosen] - 9 * step * along - 8.5 * step * across,
        ],
        axis=1,
    )
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, at[chosen])
        points = turn(head[inside].reshape(-1, 2))
        canvas.triangles(points, np.arange(len(points)).reshape(-1, 3), (1, 1, 1))
