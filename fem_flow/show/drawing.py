"""The preview drawing: the part with its ports, walls, sections and main dimensions named, as an engineer would sketch it."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from fem_flow.show.layout import full_box, length_text, round_length
from fem_flow.show.pictures import Picture
from fem_flow.show.plots import figure

INK = "#21293a"
THIN = "#5b6675"
FLUID = "#e4eef5"
PORT = "#0b5a83"
SECTION = "#3d7f5f"
WARN = "#b3261e"
WIDTH = 1800.0  # px
SIZE = 40.0  # px, height of a text line's letters and gap


def preview_picture(outline, path: Path, labels: dict[str, str], title: str) -> Picture:
    """Draw an ``Outline`` to a PNG, 1800 px wide, at equal aspect; axisymmetric parts as a full section with their axis.

    Parameters
    ----------
    outline : Outline
    path : the PNG to write
    labels : boundary or section name -> text to print at it (may have line breaks); names left out print themselves
    title : first line of the drawing

    Returns the picture with a caption that states what is marked.
    """
    paper = _Paper(outline, title)
    names = {c.name: c.role for c in outline.curves if c.role in ("port", "wall", "section")}
    notes = [_Note(name, labels.get(name, name), names[name], outline) for name in names]
    notes.append(_Note("", f"narrowest gap {length_text(outline.narrowest_gap)}", "gap", outline))
    paper.arrange(notes)
    paper.fill()
    paper.outline_and_axis()
    paper.dimensions()
    paper.gap_and_corners()
    paper.notes(notes)
    paper.ruler_and_title()
    paper.save(path)
    corners = len(outline.corners)
    words = f"{title}: the fluid is tinted, walls are thick, ports are blue and dashed."
    if outline.kind == "axisymmetric":
        words += " Full section of the axisymmetric part; the chain line is its axis."
    words += f" Narrowest gap {length_text(outline.narrowest_gap)}."
    if corners:
        words += f" {corners} sharp re-entrant corner{'s are' if corners > 1 else ' is'} marked: wall shear has no limit there."
    return Picture("preview", Path(path), words)


class _Note:
    """A name with the place it points at; ``side`` and ``at`` are set when the drawing is arranged."""

    def __init__(self, name: str, text: str, role: str, outline):
        self.text, self.role = str(text).replace("$", r"\$").replace("^2", "²"), role
        pieces = [c.points for c in outline.curves if c.name == name] if role != "gap" else [np.array(outline.narrowest_at)]
        longest = max(pieces, key=lambda p: np.linalg.norm(np.diff(p, axis=0), axis=1).sum())
        self.place = _half_way(longest)
        self.side, self.at = "top", (0.0, 0.0)

    @property
    def lines(self) -> int:
        return self.text.count("\n") + 1

    @property
    def length(self) -> float:
        return 0.60 * SIZE * max(len(line) for line in self.text.split("\n"))


def _half_way(points: np.ndarray) -> np.ndarray:
    step = np.linalg.norm(np.diff(points, axis=0), axis=1)
    arc = np.concatenate([[0.0], np.cumsum(step)])
    return np.array([np.interp(arc[-1] / 2, arc, points[:, k]) for k in (0, 1)])


class _Paper:
    """The sheet in px, y upwards, and where the part lies on it."""

    def __init__(self, outline, title: str):
        self.outline, self.title = outline, title
        self.round = outline.kind == "axisymmetric"
        self.box = full_box(outline)
        self.w, self.h = self.box[2] - self.box[0], self.box[3] - self.box[1]

    # -- arranging ------------------------------------------------------------------------------------------------------
    def arrange(self, notes: list[_Note]) -> None:
        """Give every note a side of the part, then rows without overlaps; from that follow the scale and the height."""
        x0, y0, x1, y1 = self.box
        upright = self.h > 2.0 * self.w
        for note in notes:
            x, y = note.place
            if upright and not (note.role == "port" and min(y - y0, y1 - y) < 0.02 * self.h):
                note.side = "left" if x < (x0 + x1) / 2 else "right"
            elif note.role in ("port", "wall") and self.w < 1.5 * self.h and min(x - x0, x1 - x) < 0.02 * self.w:
                note.side = "left" if x - x0 < x1 - x else "right"
            else:
                note.side = "top" if y > (y0 + y1) / 2 or self.round else "bottom"
        top = [n for n in notes if n.side == "top"]
        if self.round and len(top) > 3:  # every second name at the mirrored half, which is the same boundary
            for note in sorted(top, key=lambda n: n.place[0])[1::2]:
                note.side, note.place = "bottom", note.place * (1, -1)
        by_side = {s: [n for n in notes if n.side == s] for s in ("left", "right", "top", "bottom")}
        self.left = 70 + max([n.length for n in by_side["left"]] + [0]) + (110 if by_side["left"] else 0)
        self.right = 90 + max([n.length for n in by_side["right"]] + [0]) + (130 if by_side["right"] else 0)
        across = ("⌀ " if self.round else "") + length_text(self.h)
        if self.h * (WIDTH - self.left - self.right) / self.w < 150:  # its dimension is written beside the part
            self.right = max(self.right, 100 + 0.6 * SIZE * len(across))
        room = WIDTH - self.left - self.right
        least = {s: sum((n.lines + 0.8) * SIZE * 1.25 for n in by_side[s]) for s in ("left", "right")}
        self.scale = min(room / self.w, max(1150.0, *least.values()) / self.h)
        part_w, part_h = self.w * self.scale, self.h * self.scale
        self.left += (room - part_w) / 2
        high = max(part_h, *least.values())
        rows = {s: self._rows(by_side[s]) for s in ("top", "bottom")}
        deep = {s: sum(max(n.lines for n in row) * SIZE * 1.25 + 34 for row in rows[s]) + (70 if rows[s] else 10) for s in rows}
        self.dim = 120.0  # room for the dimension below the part
        foot = 150.0
        self.bottom = foot + self.dim + deep["bottom"] + (high - part_h) / 2
        self.height = self.bottom + part_h + (high - part_h) / 2 + deep["top"] + 130
        for side, sign in (("top", 1), ("bottom", -1)):
            y = self.bottom + (part_h + 70 if sign > 0 else -70)
            for row in rows[side]:
                tall = max(n.lines for n in row) * SIZE * 1.25
                for note, x in zip(row, self._spread(row), strict=True):
                    note.at = (x, y)
                y += sign * (tall + 34)
        for side in ("left", "right"):
            self._stack(by_side[side], side, part_w)

    def px(self, points) -> np.ndarray:
        return (np.asarray(points, dtype=float) - self.box[:2]) * self.scale + (self.left, self.bottom)

    def _x(self, note: _Note) -> float:
        return (note.place[0] - self.box[0]) * self.scale + self.left

    def _rows(self, notes: list[_Note]) -> list[list[_Note]]:
        """As few rows as hold the notes; neighbours go to different rows. The row next to the part comes first."""
        notes = sorted(notes, key=lambda n: n.place[0])
        need = sum(n.length + 50 for n in notes)
        count = max(1, int(np.ceil(need / (WIDTH - 60))))
        rows = [notes[k::count] for k in range(count)]
        return [row for row in rows if row]

    def _spread(self, row: list[_Note]) -> list[float]:
        """Centres of the notes of a row: near what they point at, in order, without overlaps, on the sheet."""
        x = [min(max(self._x(n), 30 + n.length / 2), WIDTH - 30 - n.length / 2) for n in row]
        for _ in range(60):
            moved = False
            for a in range(len(row) - 1):
                short = (row[a].length + row[a + 1].length) / 2 + 40 - (x[a + 1] - x[a])
                if short > 0.5:
                    moved = True
                    x[a] -= short / 2
                    x[a + 1] += short / 2
            x = [min(max(v, 30 + n.length / 2), WIDTH - 30 - n.length / 2) for v, n in zip(x, row, strict=True)]
            if not moved:
                break
        return x

    def _stack(self, notes: list[_Note], side: str, part_w: float) -> None:
        notes.sort(key=lambda n: n.place[1])
        tall = [(n.lines + 0.5) * SIZE * 1.25 for n in notes]
        y = [float(self.px(n.place)[1]) for n in notes]
        for _ in range(80):
            for a in range(len(y) - 1):
                short = (tall[a] + tall[a + 1]) / 2 - (y[a + 1] - y[a])
                if short > 0.5:
                    y[a] -= short / 2
                    y[a + 1] += short / 2
        for note, v in zip(notes, y, strict=True):
            note.at = (self.left - 95, v) if side == "left" else (self.left + part_w + 140, v)

    # -- drawing --------------------------------------------------------------------------------------------------------
    def fill(self) -> None:
        self.made = figure(WIDTH / 150, self.height / 150)
        self.axes = self.made.add_axes((0, 0, 1, 1))
        self.axes.set_xlim(0, WIDTH)
        self.axes.set_ylim(0, self.height)
        self.axes.axis("off")
        from matplotlib.patches import PathPatch
        from matplotlib.path import Path as Shape

        rings = closed_rings([c.points for c in self.outline.curves if c.role != "section"])
        for half in (False, True) if self.round else (False,):
            points, codes = [], []
            for ring in rings:
                points += list(self.px(ring * (1, -1) if half else ring))
                codes += [Shape.MOVETO] + [Shape.LINETO] * (len(ring) - 2) + [Shape.CLOSEPOLY]
            if points:
                self.axes.add_patch(PathPatch(Shape(points, codes), facecolor=FLUID, edgecolor="none", zorder=1))

    def line(self, points, colour=INK, width=1.2, style="-", order=3) -> None:
        points = np.asarray(points)
        self.axes.plot(
            points[:, 0],
            points[:, 1],
            color=colour,
            linewidth=width,
            linestyle=style,
            zorder=order,
            solid_capstyle="round",
            solid_joinstyle="round",
        )

    def text(self, x, y, words, size=1.0, across="center", up="center", colour=INK, bold=False, box=True) -> None:
        # 150 dots an inch: 72/150 points a px
        behind = {"facecolor": "white", "edgecolor": "none", "pad": 2.0, "alpha": 0.9} if box else None
        self.axes.text(
            x,
            y,
            words,
            fontsize=size * SIZE * 0.92 * 72 / 150,
            ha=across,
            va=up,
            color=colour,
            zorder=9,
            bbox=behind,
            fontweight="bold" if bold else "normal",
            linespacing=1.1,
        )

    def arrow(self, start, end, colour=THIN, width=1.2, heads="<|-|>", size=16) -> None:
        from matplotlib.patches import FancyArrowPatch

        self.axes.add_patch(
            FancyArrowPatch(
                start, end, arrowstyle=heads, mutation_scale=size, color=colour, linewidth=width, shrinkA=0, shrinkB=0, zorder=6
            )
        )

    def outline_and_axis(self) -> None:
        look = {
            "wall": (INK, 3.4, "-"),
            "port": (PORT, 2.2, (0, (5, 2.5))),
            "symmetry": (THIN, 1.2, (0, (8, 4))),
            "section": (SECTION, 2.0, (0, (2, 1.5))),
        }
        for half in (False, True) if self.round else (False,):
            for curve in self.outline.curves:
                if curve.role in look:
                    colour, width, style = look[curve.role]
                    self.line(
                        self.px(curve.points * (1, -1) if half else curve.points),
                        colour,
                        width,
                        style,
                        4 if curve.role == "wall" else 3,
                    )
        if self.round:
            ends = self.px([(self.box[0], 0.0), (self.box[2], 0.0)]) + [(-34, 0), (34, 0)]
            self.line(ends, THIN, 1.3, (0, (14, 3.5, 2.5, 3.5)), 5)

    def dimensions(self) -> None:
        """Overall length below the part, overall height (or diameter) beside it where there is room, else in the same line."""
        x0, y0, x1, y1 = self.box
        (left, low), (right, high) = self.px([(x0, y0), (x1, y1)])
        y = 150 + 0.5 * self.dim
        for x in (left, right):
            self.line([(x, y - 18), (x, low - 8)], THIN, 0.8, order=2)
        self.arrow((left, y), (right, y))
        self.text((left + right) / 2, y, length_text(x1 - x0))
        across = ("⌀ " if self.round else "") + length_text(y1 - y0)
        x = right + 46
        for v in (low, high):
            self.line([(right + 8, v), (x + 16, v)], THIN, 0.8, order=2)
        if high - low > 130:
            self.arrow((x, low), (x, high))
            self.axes.text(
                x,
                (low + high) / 2 - 0.24 * (high - low),
                across,
                rotation=90,
                ha="center",
                va="center",
                zorder=9,
                fontsize=SIZE * 0.92 * 72 / 150,
                color=INK,
                bbox={"facecolor": "white", "edgecolor": "none", "pad": 2.0},
            )
        else:
            self.arrow((x, high + 60), (x, high), heads="-|>")
            self.arrow((x, low - 60), (x, low), heads="-|>")
            self.text(x + 22, (low + high) / 2, across, across="left")

    def gap_and_corners(self) -> None:
        gap = self.px(self.outline.narrowest_at)
        along = gap[1] - gap[0]
        size = float(np.linalg.norm(along))
        along = along / size if size else np.array([0.0, 1.0])
        if size > 90:
            self.arrow(gap[0], gap[1], WARN, 1.6)
        else:
            for end, sign in ((gap[0], -1), (gap[1], 1)):
                self.arrow(end + sign * 58 * along, end, WARN, 1.6, "-|>", 14)
        for corner in self.outline.corners:
            for half in (1, -1) if self.round else (1,):
                x, y = self.px((corner.x, half * corner.y))
                self.axes.plot(
                    [x],
                    [y],
                    marker="D",
                    markersize=9,
                    markerfacecolor="white",
                    markeredgecolor=WARN,
                    markeredgewidth=2,
                    zorder=8,
                )

    def notes(self, notes: list[_Note]) -> None:
        for note in notes:
            target = self.px(note.place)
            colour = {"port": PORT, "section": SECTION, "gap": WARN}.get(note.role, INK)
            x, y = note.at
            where = {
                "top": ("center", "bottom"),
                "bottom": ("center", "top"),
                "left": ("right", "center"),
                "right": ("left", "center"),
            }[note.side]
            shift = {"top": (0, -8), "bottom": (0, 8), "left": (8, 0), "right": (-8, 0)}[note.side]
            self.line([(x + shift[0], y + shift[1]), target], THIN, 1.0, order=7)
            self.axes.plot(*target[:, None], marker="o", markersize=4.5, color=colour, zorder=8)
            self.text(x, y, note.text, 1.0, *where, colour=colour, bold=note.role == "port")

    def ruler_and_title(self) -> None:
        self.text(30, self.height - 30, self.title.replace("$", r"\$"), 1.12, "left", "top", bold=True, box=False)
        length = round_length(330 / self.scale)
        x, y = 40.0, 92.0
        for k in range(4):
            part = [(x + k * length * self.scale / 4, y), (x + (k + 1) * length * self.scale / 4, y + 13)]
            from matplotlib.patches import Rectangle

            self.axes.add_patch(
                Rectangle(
                    part[0],
                    length * self.scale / 4,
                    13,
                    facecolor=INK if k % 2 == 0 else "white",
                    edgecolor=INK,
                    linewidth=1.2,
                    zorder=5,
                )
            )
        self.text(x, y - 10, length_text(length), 0.95, "left", "top", box=False)
        if self.outline.corners:
            n = len(self.outline.corners)
            self.axes.plot(
                [640], [62], marker="D", markersize=9, markerfacecolor="white", markeredgecolor=WARN, markeredgewidth=2
            )
            self.text(665, 62, f"sharp re-entrant corner{'s' if n > 1 else ''} ({n})", 0.95, "left", box=False, colour=WARN)

    def save(self, path: Path) -> None:
        path = Path(path)
        path.parent.mkdir(parents=True, exist_ok=True)
        self.made.savefig(path, dpi=150)


def closed_rings(pieces: list[np.ndarray]) -> list[np.ndarray]:
    """Join polylines end to end into closed rings, each with its first point repeated at its end; what stays open is closed."""
    pieces = [np.asarray(p, dtype=float) for p in pieces if len(p) > 1]
    if not pieces:
        return []
    every = np.concatenate(pieces)
    near = 1e-6 * float(np.ptp(every, axis=0).max())
    rings = []
    while pieces:
        ring = pieces.pop(0)
        while np.abs(ring[-1] - ring[0]).max() > near and pieces:
            gaps = [min(np.abs(p[0] - ring[-1]).max(), np.abs(p[-1] - ring[-1]).max()) for p in pieces]
            k = int(np.argmin(gaps))
            if gaps[k] > near:
                break
            piece = pieces.pop(k)
            turned = np.abs(piece[0] - ring[-1]).max() > np.abs(piece[-1] - ring[-1]).max()
            ring = np.vstack([ring, (piece[::-1] if turned else piece)[1:]])
        rings.append(np.vstack([ring, ring[:1]]))
    return rings
