"""Where things go on a picture, in px: the part at equal aspect, cut into strips when it is very long, the bars beside it."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

TEXT = 44  # px, so that labels stay legible when a picture is printed at half a page's width
MARGIN = 50


@dataclass(frozen=True)
class Strip:
    """One piece of the part: from ``low`` to ``high`` (m) along its long direction; ``origin`` (px) is where its start goes."""

    low: float
    high: float
    origin: tuple[float, float]


@dataclass(frozen=True)
class Layout:
    """Sizes in px, y upwards.

    Attributes
    ----------
    width, height : of the picture
    scale : px per m
    wide : whether the part's long direction is x
    box : (xmin, ymin, xmax, ymax), m, of the full section
    strips : from left to right and top to bottom
    bar : (x, y, width, height) of the colour bar
    ruler : (x, y) of the left end of the length scale, and the longest it may be
    """

    width: int
    height: int
    scale: float
    wide: bool
    box: tuple[float, float, float, float]
    strips: tuple[Strip, ...]
    bar: tuple[float, float, float, float]
    ruler: tuple[float, float, float]

    def place(self, points: np.ndarray, strip: Strip) -> np.ndarray:
        """Points in m to px in that strip."""
        origin = (strip.low, self.box[1]) if self.wide else (self.box[0], strip.low)
        return (np.asarray(points, dtype=float) - origin) * self.scale + strip.origin


def full_box(outline) -> tuple[float, float, float, float]:
    """The box of the full section: an axisymmetric part is mirrored at its axis."""
    x0, y0, x1, y1 = outline.box
    return (x0, -y1, x1, y1) if outline.kind == "axisymmetric" else (x0, y0, x1, y1)


def lay_out(box, *, bar: bool = True, pad: float = 0.0) -> Layout:
    """Choose window, scale and strips from the part's box (m); ``pad`` px around the part are for what is drawn outside it."""
    x0, y0, x1, y1 = box
    w, h = max(x1 - x0, 1e-12), max(y1 - y0, 1e-12)
    aspect = w / h
    wide = aspect >= 1.0
    ratio = max(aspect, 1.0 / aspect)
    n = 1 if ratio <= 14.0 else min(4, math.ceil(ratio / 10.0))
    between = 2 * pad + 64 if n > 1 else 0.0
    head = 2.1 * TEXT
    if aspect >= 1.6:  # the colour bar below
        foot = 3.9 * TEXT
        scale = (1800 - 2 * (MARGIN + pad)) / (w / n)
        rows = n * h * scale + (n - 1) * between
        width, height = 1800, round(head + foot + rows + 2 * pad + 0.6 * MARGIN)
        strips = []
        for k in range(n):
            top = height - head - pad - k * (h * scale + between)
            strips.append(Strip(x0 + k * w / n, x0 + (k + 1) * w / n, (MARGIN + pad, top - h * scale)))
        y = 1.75 * TEXT
        return Layout(
            width,
            height,
            scale,
            True,
            tuple(box),
            tuple(strips),
            (650, y, 1800 - 650 - 2.2 * MARGIN, 0.8 * TEXT),
            (MARGIN + pad, y, 430),
        )
    # the colour bar to the right
    side = 350 if bar else 60
    tall = 1250 if aspect > 0.6 else 1500
    foot = 3.2 * TEXT
    if wide:
        scale = min(tall / h, (1800 - 2 * MARGIN - side - 2 * pad) / w)
    else:
        scale = tall / (h / n)
        between += 20 if n > 1 else 0
    columns = w * scale * (1 if wide else n) + (0 if wide else (n - 1) * between)
    width = max(round(columns + 2 * (MARGIN + pad) + side), 900)
    high = h * scale / (1 if wide else n)
    height = round(head + foot + high + 2 * pad)
    left = (width - side - columns) / 2
    base = foot + pad
    strips = []
    if wide or n == 1:
        strips.append(Strip(x0 if wide else y0, x1 if wide else y1, (left, base)))
    else:
        for k in range(n):  # the first column is the top of the part
            low = y1 - (k + 1) * h / n
            strips.append(Strip(low, low + h / n, (left + k * (w * scale + between), base)))
    length = min(high * 0.8, 900)
    return Layout(
        width,
        height,
        scale,
        wide,
        tuple(box),
        tuple(strips),
        (width - side + 40, base + (high - length) / 2, 0.8 * TEXT, length),
        (MARGIN, 1.75 * TEXT, 0.35 * width),
    )


def round_length(longest: float) -> float:
    """The largest of 1, 2, 5 × 10^k that is not above ``longest``."""
    if not longest > 0:
        return 0.0
    power = 10.0 ** math.floor(math.log10(longest))
    return max(m * power for m in (1.0, 2.0, 5.0) if m * power <= longest * (1 + 1e-9))


def ticks(low: float, high: float, most: int = 6) -> list[float]:
    """Round values from ``low`` to ``high``, at most about ``most`` of them."""
    if not high > low:
        return [low]
    raw = (high - low) / most
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(m * power for m in (1.0, 2.0, 2.5, 5.0, 10.0) if m * power >= raw * (1 - 1e-9))
    first = math.ceil(low / step - 1e-9)
    return [k * step for k in range(first, math.floor(high / step + 1e-9) + 1)]


def root_ticks(high: float) -> list[float]:
    """0 and round values up to ``high``, far enough apart on a square-root scale."""
    chosen: list[float] = []
    power = 10.0 ** math.ceil(math.log10(high))
    for value in (m * power * 10.0**-k for k in range(5) for m in (10.0, 5.0, 2.0, 1.0)):
        place = math.sqrt(value / high)
        if 0.14 < place <= 1.0 + 1e-9 and (not chosen or math.sqrt(chosen[-1] / high) - place > 0.14):
            chosen.append(value)
    return [0.0, *reversed(chosen)]


def tick_text(value: float, step: float) -> str:
    """A tick's number with as many decimals as the step needs."""
    if step <= 0:
        return f"{value:.3g}"
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    if abs(step * 10**decimals - round(step * 10**decimals)) > 1e-6:
        decimals += 1
    text = f"{value:.{decimals}f}" if abs(value) < 1e6 else f"{value:.3g}"
    return "0" if float(text) == 0 else text.replace("-", "\N{MINUS SIGN}")


#: factor to the unit and its name, largest first; chosen by the largest value shown
SCALES = {
    "m/s": ((1.0, "m/s"), (1e3, "mm/s"), (1e6, "µm/s")),
    "shear": ((1e-3, "kPa"), (1.0, "Pa"), (1e3, "mPa")),
    "Pa": ((1e-5, "bar"), (1e-3, "kPa"), (1.0, "Pa"), (1e3, "mPa")),
    "m": ((1.0, "m"), (1e3, "mm"), (1e6, "µm")),
}


def axis_unit(largest: float, unit: str, least: float = 1.0) -> tuple[float, str]:
    """Factor and name of the unit in which the largest value of an axis reads as a number of at least ``least``."""
    choices = SCALES.get(unit, ((1.0, unit),))
    for factor, name in choices:
        if abs(largest) * factor >= least * (1 - 1e-9):
            return factor, name
    return choices[-1] if largest else next((c for c in choices if c[0] == 1.0), choices[0])


def length_text(metres: float, digits: int = 4) -> str:
    """A length as a drawing shows it: mm as a rule, µm below 0.1 mm, m from 1 m."""
    factor, unit = (1e6, "µm") if abs(metres) < 1e-4 else (1e3, "mm") if abs(metres) < 1.0 else (1.0, "m")
    return f"{metres * factor:.{digits}g} {unit}"
