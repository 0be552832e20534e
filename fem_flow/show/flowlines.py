"""Streamlines: level lines of the stream function, with a few small arrows."""

from __future__ import annotations

import numpy as np

from fem_flow.show.canvas import Canvas
from fem_flow.show.layout import Layout
from fem_flow.show.scene import level_lines
from fem_flow.show.stage import Stage
from fem_flow.show.streamlines import levels_of, levels_through

SHADOW = (0.10, 0.12, 0.22)


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
    apart = [np.ptp(through) / (len(through) - 1) if len(through) > 1 else reach]
    for eddy in stage.whirls:
        near = np.flatnonzero(np.isin(fields.cells, eddy.nodes).any(axis=1))
        size = np.ptp(fields.points[eddy.nodes], axis=0).min() * layout.scale
        if size < 8:
            continue
        levels = levels_of(eddy, int(np.clip(size / 30, 2, 5)))
        found.append(level_lines(surface, "stream", levels, near, carry))
        apart.append(abs(levels[1] - levels[0]))
    start, end, u, v = (np.concatenate([f[n] for f in found]) for n in ("start", "end", "u", "v"))
    step = np.repeat(apart, [len(f["start"]) for f in found])
    white, dark = widths(step, np.hypot(u, v), (start[:, 1] + end[:, 1]) / 2 if stage.round else None, layout.scale)
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, np.stack([start, end], axis=1))
        a, b = turn(start[inside]), turn(end[inside])
        canvas.segments(a, b, SHADOW, dark[inside])
        canvas.segments(a, b, (1, 1, 1), white[inside])
    draw_arrows(stage, canvas, layout, (start + end) / 2, np.column_stack([u, v]))
    return len(stage.whirls)


def widths(step: np.ndarray, speed: np.ndarray, radius: np.ndarray | None, scale: float) -> tuple[np.ndarray, np.ndarray]:
    """Widths (px) of a line and of its dark rim: thin where lines crowd, so that a narrow gap keeps its colour.

    ``step`` is the difference of the stream function to the next line; over the speed it is their distance (with the radius in
    an axisymmetric part: the whole turn over 2πr times the speed).
    """
    flux = speed if radius is None else 2 * np.pi * np.abs(radius) * speed
    distance = np.divide(step, flux, out=np.full(len(step), np.inf), where=flux > 0) * scale
    white = np.clip(0.3 * distance, 0.8, 2.4)
    return white, white + 2.2 * np.clip((distance - 3.0) / 6.0, 0.0, 1.0)


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
