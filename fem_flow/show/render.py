"""The picture process: reads fields on stdin, writes PNGs, answers with their captions on stdout.

It runs apart from the main program because a graphics library that finds no display can end the whole process.
"""

from __future__ import annotations

import json
import pickle
import sys
from pathlib import Path

import numpy as np

from fem_flow.show.canvas import FAINT, INK, Canvas, colour_table, colours
from fem_flow.show.flowlines import SHADOW, draw_streamlines
from fem_flow.show.layout import Layout, axis_unit, length_text, tick_text, ticks
from fem_flow.show.scene import edge_lines, level_lines, outer_side, ribbon
from fem_flow.show.stage import Stage, draw_bar, draw_field, draw_head, draw_rim, draw_ruler, mask

FLUID = (0.925, 0.945, 0.960)
RIBBON = 17.0  # px


def speed_picture(stage: Stage, canvas: Canvas, path: Path) -> str:
    layout = stage.layout()
    top = float(stage.surface.values["speed"].max())
    factor, unit = axis_unit(top, "m/s")
    table = colour_table("viridis", 0.0, 0.96)
    root = bool(_typical_speed(stage) < 0.08 * top)  # a narrow passage in a wide part: show the slow flow too
    canvas.clear(layout.width, layout.height)
    draw_field(stage, canvas, layout, "speed", (0.0, top), table, root)
    n = draw_streamlines(stage, canvas, layout)
    draw_rim(stage, canvas, layout)
    mask(stage, canvas, layout)
    draw_head(canvas, layout, f"Speed{_near(stage)}, {unit}")
    draw_ruler(canvas, layout)
    draw_bar(canvas, layout, (0.0, top), table, factor, root=root)
    canvas.save(path, stage.scope)
    eddy = "" if n == 0 else f" {n} recirculating zone{'s' if n > 1 else ''} with closed lines of their own."
    eddy += " The colours follow a square-root scale." if root else ""
    return f"Speed with streamlines. The same flow passes between neighbouring lines.{eddy}{_strips(layout)}"


def pressure_picture(stage: Stage, canvas: Canvas, path: Path) -> str:
    layout = stage.layout()
    p = stage.surface.values["pressure"]
    low, high = float(p.min()), float(p.max())
    if high - low <= 1e-12 * max(abs(low), abs(high), 1e-300):
        high = low + 1.0
    factor, unit = axis_unit(max(abs(low), abs(high)), "Pa")
    table = colour_table("cividis")
    canvas.clear(layout.width, layout.height)
    draw_field(stage, canvas, layout, "pressure", (low, high), table)
    values = np.array(ticks(low * factor, high * factor, 12)) / factor
    lines = level_lines(stage.surface, "pressure", values[(values > low) & (values < high)])
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, np.stack([lines["start"], lines["end"]], axis=1))
        a, b = turn(lines["start"][inside]), turn(lines["end"][inside])
        canvas.segments(a, b, SHADOW, 4.6)
        canvas.segments(a, b, (1, 1, 1), 2.4)
    draw_rim(stage, canvas, layout)
    mask(stage, canvas, layout)
    draw_head(canvas, layout, f"Pressure, {unit}")
    draw_ruler(canvas, layout)
    draw_bar(canvas, layout, (low, high), table, factor)
    canvas.save(path, stage.scope)
    step = (
        f", a line every {tick_text((values[1] - values[0]) * factor, (values[1] - values[0]) * factor)} {unit}"
        if len(values) > 1
        else ""
    )
    return f"Static pressure counted from ambient{step}.{_strips(layout)}"


def shear_picture(stage: Stage, canvas: Canvas, path: Path) -> str:
    layout = stage.layout(pad=RIBBON + 6)
    sizes = np.concatenate([np.abs(w.shear) for w in stage.walls]) if stage.walls else np.zeros(1)
    known = sizes[np.isfinite(sizes)]
    top = float(known.max()) if len(known) else 0.0
    limit = float(np.quantile(known, 0.99)) if len(known) else 1.0
    over = top > 1.3 * limit
    high = (limit if over else top) or 1.0
    factor, unit = axis_unit(high, "shear")
    table = colour_table("magma", 0.06, 0.93, backwards=True)
    canvas.clear(layout.width, layout.height)
    surface = stage.plain
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, surface.points[surface.triangles])
        canvas.triangles(turn(surface.points), surface.triangles[inside], FLUID)
    withheld, peak = False, None
    for wall in stage.walls:
        if len(wall.points) < 2:
            continue
        size = np.abs(wall.shear)
        withheld |= bool(np.isnan(size).any())
        if np.isfinite(size).any() and np.nanmax(size) == top:
            peak = (wall, int(np.nanargmax(size)))
        rim = ribbon(wall.points, RIBBON / layout.scale, outer_side(wall.points, stage.rim_lines), wall.closed)
        n = len(rim)
        points = np.concatenate([wall.points, rim])
        k = np.arange(n - 1)
        faces = np.concatenate([np.column_stack([k, k + 1, k + n]), np.column_stack([k + 1, k + n + 1, k + n])])
        tint = colours(np.concatenate([size, size]), (0.0, high), table)
        for strip, turn in stage.each(layout):
            inside = stage.within(layout, strip, points[faces])
            canvas.triangles(turn(points), faces[inside], tint)
            canvas.lines([turn(rim)], FAINT, 1.5)
    draw_rim(stage, canvas, layout, 2.0)
    note = ""
    even = bool(len(known)) and np.mean(known > 0.999 * top) > 0.2
    if peak is not None and top > 0 and not even:
        wall, k = peak
        strip = next((s for s in layout.strips if stage.within(layout, s, wall.points[k : k + 1])[0]), layout.strips[0])
        x, y = layout.place(wall.points[k : k + 1], strip)[0]
        turn = np.linspace(0, 2 * np.pi, 41)
        ring = np.column_stack([x + 26 * np.cos(turn), y + 26 * np.sin(turn)])
        canvas.lines([ring], (1, 1, 1), 9.0)
        canvas.lines([ring], INK, 4.0)
        note = f"ring: {top * factor:.3g} {unit} on {wall.name}"
    mask(stage, canvas, layout)
    draw_head(canvas, layout, f"Wall shear stress{_near(stage)}, {unit}", "" if stage.zoom else note)
    draw_ruler(canvas, layout)
    draw_bar(canvas, layout, (0.0, high), table, factor, over)
    canvas.save(path, stage.scope)
    words = "Size of the wall shear stress, drawn as a band on the outside of each wall."
    if note:
        words += f" The ring marks the largest value {'given ' if withheld else ''}({top * factor:.3g} {unit} on {wall.name})."
    if over:
        words += f" The bar ends at the 99th percentile of the points, {high * factor:.3g} {unit}."
    if withheld:
        words += " Grey: withheld next to a sharp re-entrant corner, where shear has no limit."
    return words + _strips(layout)


def mesh_picture(stage: Stage, canvas: Canvas, path: Path) -> str:
    layout = stage.layout(bar=False)
    canvas.clear(layout.width, layout.height)
    lines = edge_lines(stage.fields.points, stage.inner, 4)
    bent = np.linalg.norm(lines[:, 2] - (lines[:, 0] + lines[:, -1]) / 2, axis=1) * layout.scale > 0.2
    width = float(np.clip(2.2 * (8000 / max(len(lines), 1)) ** 0.25, 1.0, 2.4))
    surface = stage.plain
    for strip, turn in stage.each(layout):
        inside = stage.within(layout, strip, surface.points[surface.triangles])
        canvas.triangles(turn(surface.points), surface.triangles[inside], FLUID)
        here = stage.within(layout, strip, lines)
        for part in (lines[here & ~bent][:, [0, -1]], lines[here & bent]):
            canvas.lines(turn(part.reshape(-1, 2)).reshape(part.shape), (0.36, 0.48, 0.60), width)
    draw_rim(stage, canvas, layout)
    mask(stage, canvas, layout)
    draw_head(canvas, layout, "Mesh", f"{len(stage.fields.cells)} curved triangles")
    draw_ruler(canvas, layout)
    canvas.save(path, stage.scope)
    half = " The lower half is the mirror image." if stage.round else ""
    return f"Mesh of {len(stage.fields.cells)} quadratic triangles with curved edges.{half}{_strips(layout)}"


def _strips(layout: Layout) -> str:
    n = len(layout.strips)
    if n == 1:
        return ""
    order = "top strip to bottom strip, along x" if layout.wide else "left column to right column, downwards"
    return f" The part is long and is shown in {n} pieces: {order}."


def _typical_speed(stage: Stage) -> float:
    """The speed that half of the drawn area exceeds, m/s."""
    surface = stage.surface
    a, b, c = (surface.points[surface.triangles[:, k]] for k in range(3))
    area = np.abs((b[:, 0] - a[:, 0]) * (c[:, 1] - a[:, 1]) - (b[:, 1] - a[:, 1]) * (c[:, 0] - a[:, 0]))
    speed = surface.values["speed"][surface.triangles].mean(axis=1)
    order = np.argsort(speed)
    return float(speed[order][np.searchsorted(np.cumsum(area[order]), area.sum() / 2)])


def _near(stage: Stage) -> str:
    return " at the narrowest gap" if stage.zoom else ""


PICTURES = {"speed": speed_picture, "pressure": pressure_picture, "wall_shear": shear_picture, "mesh": mesh_picture}


def main() -> None:
    fields, outline, wall_curves, folder, scope, names = pickle.load(sys.stdin.buffer)
    stage = Stage(fields, outline, wall_curves, scope)
    made = []
    with Canvas() as canvas:
        for name in names:
            path = Path(folder) / f"{name}.png"
            made.append([name, str(path), PICTURES[name](stage, canvas, path)])
        stage.zoom = stage.gap_box()
        for name in [n for n in ("speed", "wall_shear") if n in names and stage.zoom]:
            path = Path(folder) / f"{name}_gap.png"
            made.append(
                [
                    f"{name}_gap",
                    str(path),
                    f"The narrowest gap, {length_text(outline.narrowest_gap, 3)}, enlarged. "
                    + PICTURES[name](stage, canvas, path),
                ]
            )
    sys.stdout.write(json.dumps(made))


if __name__ == "__main__":
    main()
