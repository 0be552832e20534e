"""What all pictures of a result share: the subdivided mesh, the outline, the axis, the bars and scales around the part."""

from __future__ import annotations

from functools import cached_property

import numpy as np

from fem_flow.show.canvas import FAINT, INK, Canvas, colours
from fem_flow.show.layout import (
    TEXT,
    Layout,
    Strip,
    full_box,
    lay_out,
    length_text,
    root_ticks,
    round_length,
    tick_text,
    ticks,
)
from fem_flow.show.scene import edge_lines, edges, mirrored, subdivide
from fem_flow.show.streamlines import Eddy, eddies

LEAST_EDDY = 5e-4  # of the whole range of the stream function; weaker ones are left out


class Stage:
    """What all pictures of one result share: the subdivided mesh, the boundary, the layout."""

    def __init__(self, fields, outline, wall_curves, scope: str):
        self.fields, self.outline, self.walls, self.scope = fields, outline, wall_curves, scope
        self.round = fields.kind == "axisymmetric"
        self.box = full_box(outline)
        self.surface = subdivide(fields)
        self.plain = self.surface if len(fields.cells) < 500 else subdivide(fields, 2)  # for one flat colour
        self.inner, self.rim = edges(fields.cells)
        self.rim_lines = edge_lines(fields.points, self.rim)
        self.halves = (False, True) if self.round else (False,)
        self.zoom: tuple[float, float, float, float] | None = None

    @cached_property
    def whirls(self) -> list[Eddy]:
        """The eddies worth lines of their own."""
        stream = self.fields.stream
        return eddies(self.fields.cells, stream, np.unique(self.rim), LEAST_EDDY * float(np.ptp(stream)))

    def layout(self, **options) -> Layout:
        """The whole part, or the neighbourhood of the narrowest gap while ``zoom`` is set."""
        return lay_out(self.zoom or self.box, **options)

    def gap_box(self) -> tuple[float, float, float, float] | None:
        """A window around the narrowest gap, where that gap is too small to be seen in the whole part; else None."""
        gap = self.outline.narrowest_gap
        if not gap * lay_out(self.box).scale < 45.0:
            return None
        (xa, ya), (xb, yb) = self.outline.narrowest_at
        x, y, high = (xa + xb) / 2, (ya + yb) / 2, 12.0 * gap
        return x - 0.8 * high, y - 0.5 * high, x + 0.8 * high, y + 0.5 * high

    def each(self, layout: Layout):
        """(strip, turn) for every strip and half: ``turn`` maps points in m to px there."""
        for strip in layout.strips:
            for half in self.halves:
                yield strip, (lambda p, s=strip, m=half: layout.place(mirrored(p) if m else p, s))

    def within(self, layout: Layout, strip: Strip, points: np.ndarray) -> np.ndarray:
        """Which of the points lie in that strip; points may be (n, 2), or (n, k, 2) for any of k points."""
        if len(layout.strips) == 1:
            return np.ones(len(points), dtype=bool)
        along = points[..., 0 if layout.wide else 1]
        if self.round and not layout.wide:
            return np.ones(len(points), dtype=bool)
        if along.ndim > 1:
            return (along.max(axis=1) >= strip.low) & (along.min(axis=1) <= strip.high)
        return (along >= strip.low) & (along <= strip.high)


def draw_field(stage: Stage, canvas: Canvas, layout: Layout, name: str, limits, table, root: bool = False) -> None:
    surface = stage.surface
    values = surface.values[name]
    tint = colours(np.sqrt(values), tuple(np.sqrt(limits)), table) if root else colours(values, limits, table)
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, surface.points[surface.triangles])
        canvas.triangles(turn(surface.points), surface.triangles[inside], tint)


def draw_rim(stage: Stage, canvas: Canvas, layout: Layout, width: float = 5.0, colour=INK) -> None:
    """The outline, ports thin and walls thick, and the axis as a chain line."""
    for _, turn in stage.each(layout):
        for curve in stage.outline.curves:
            if curve.role == "axis" or curve.role == "section":
                continue
            thin = curve.role != "wall"
            canvas.lines([turn(curve.points)], FAINT if thin else colour, 2.0 if thin else width)
    draw_axis(stage, canvas, layout)


def draw_axis(stage: Stage, canvas: Canvas, layout: Layout) -> None:
    if not stage.round:
        return
    x0, _, x1, _ = stage.zoom or stage.box
    for k, strip in enumerate(layout.strips):
        low, high = (strip.low, strip.high) if layout.wide else (x0, x1)
        start, end = layout.place(np.array([[low, 0.0], [high, 0.0]]), strip)
        first, last = k == 0 or not layout.wide, k == len(layout.strips) - 1 or not layout.wide
        canvas.dashed(start - (28 if first else 0, 0), end + (28 if last else 0, 0), INK, 2.0)


def mask(stage: Stage, canvas: Canvas, layout: Layout) -> None:
    """Cover what sticks out of the window or of a strip, and mark where the part goes on."""
    if stage.zoom:
        (x, y), (far_x, far_y) = layout.place(np.array(stage.zoom).reshape(2, 2), layout.strips[0])
        w, h = layout.width + 9.0, layout.height + 9.0
        for a, b in (((-9, -9), (x, h)), ((far_x, -9), (w, h)), ((-9, -9), (w, y)), ((-9, far_y), (w, h))):
            canvas.polygon([a, (b[0], a[1]), b, (a[0], b[1])], (1, 1, 1))
        canvas.lines([np.array([(x, y), (far_x, y), (far_x, far_y), (x, far_y), (x, y)])], FAINT, 3.0)
        return
    if len(layout.strips) == 1:
        return
    box = layout.box
    cross = (box[3] - box[1] if layout.wide else box[2] - box[0]) * layout.scale
    for k, strip in enumerate(layout.strips):
        x, y = strip.origin
        length = (strip.high - strip.low) * layout.scale
        for end, at in ((0, 0.0), (1, length)):
            if layout.wide:
                outer = (x + at - 4000, x + at) if end == 0 else (x + at, x + at + 4000)
                a, b = (outer[0], y - 24), (outer[1], y + cross + 24)
            else:
                outer = (y + at - 4000, y + at) if end == 0 else (y + at, y + at + 4000)
                a, b = (x - 24, outer[0]), (x + cross + 24, outer[1])
            canvas.polygon([a, (b[0], a[1]), b, (a[0], b[1])], (1, 1, 1))
        cuts = ([0.0] if (k > 0 if layout.wide else k < len(layout.strips) - 1) else []) + (
            [length] if (k < len(layout.strips) - 1 if layout.wide else k > 0) else []
        )
        for at in cuts:
            if layout.wide:
                canvas.dashed((x + at, y - 22), (x + at, y + cross + 22), FAINT, 2.0, (8, 8))
            else:
                canvas.dashed((x - 22, y + at), (x + cross + 22, y + at), FAINT, 2.0, (8, 8))
    if layout.wide:  # its ends stick out of the strips
        draw_axis(stage, canvas, layout)


def draw_head(canvas: Canvas, layout: Layout, title: str, right: str = "") -> None:
    y = layout.height - 0.55 * TEXT
    canvas.text(50, y, title, round(1.1 * TEXT), up="top", bold=True)
    if right:
        canvas.text(layout.width - 50, y, right, round(0.9 * TEXT), across="right", up="top", colour=INK)


def draw_ruler(canvas: Canvas, layout: Layout) -> None:
    x, y, longest = layout.ruler
    length = round_length(longest / layout.scale)
    px = length * layout.scale
    canvas.polygon([(x, y), (x + px, y), (x + px, y + 10), (x, y + 10)], INK)
    for end in (x, x + px):
        canvas.lines([np.array([(end, y - 9), (end, y + 19)])], INK, 3.0)
    canvas.text(x, y - 16, length_text(length), TEXT, up="top")


def draw_bar(canvas: Canvas, layout: Layout, limits, table, factor: float, over: bool = False, root: bool = False) -> None:
    """The colour bar with round ticks; ``over`` adds a tip for values above its end, ``root`` is a square-root scale from 0."""
    x, y, w, h = layout.bar
    flat = w > h
    steps = np.linspace(0.0, 1.0, 257)
    points, faces = [], []
    for t in steps:
        points += [(x + t * w, y), (x + t * w, y + h)] if flat else [(x + w, y + t * h), (x, y + t * h)]
    for k in range(256):
        faces += [(2 * k, 2 * k + 2, 2 * k + 1), (2 * k + 1, 2 * k + 2, 2 * k + 3)]
    shade = colours(np.repeat(steps, 2), (0, 1), table)
    canvas.triangles(np.array(points), np.array(faces), shade)
    rim = [(x, y), (x + w, y), (x + w, y + h), (x, y + h), (x, y)]
    canvas.lines([np.array(rim)], INK, 2.0)
    if over:
        tip = (
            [(x + w + 5, y), (x + w + 5 + 0.8 * h, y + h / 2), (x + w + 5, y + h)]
            if flat
            else [(x, y + h + 5), (x + w, y + h + 5), (x + w / 2, y + h + 5 + 0.8 * w)]
        )
        canvas.polygon(tip, tuple(table[-1] / 255.0))
    low, high = limits[0] * factor, limits[1] * factor
    values = root_ticks(high) if root else ticks(low, high, 5 if flat else 6)
    step = values[1] - values[0] if len(values) > 1 else 0.0
    for value in values:
        t = (value - low) / ((high - low) or 1.0)
        if root:
            t, step = np.sqrt(t), value
        if flat:
            canvas.lines([np.array([(x + t * w, y - 12), (x + t * w, y)])], INK, 3.0)
            canvas.text(x + t * w, y - 16, tick_text(value, step), TEXT, across="centre", up="top")
        else:
            canvas.lines([np.array([(x + w, y + t * h), (x + w + 12, y + t * h)])], INK, 3.0)
            canvas.text(x + w + 22, y + t * h, tick_text(value, step), TEXT, up="middle")
