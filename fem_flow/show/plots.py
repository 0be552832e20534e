"""Line plots along the walls: shear stress and pressure against arc length."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from fem_flow.show.layout import axis_unit
from fem_flow.show.pictures import Picture

INK = "#21293a"
FAINT = "#8a93a0"
TONES = ("#0b5a83", "#c4611a", "#3d7f5f", "#8a4f8f", "#6b6b6b")  # told apart by colour-blind readers, and by dashes
DASHES = ("-", "--", "-.", ":", (0, (6, 1, 1, 1, 1, 1)))


def figure(width: float, height: float):
    """An empty matplotlib figure of that size in inches, without touching any global state."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    made = Figure(figsize=(width, height), dpi=150, facecolor="white")
    FigureCanvasAgg(made)
    return made


def plain_axes(axes, size: float = 17.5) -> None:
    """The look of all our plots: two thin spines, a light grid, large labels."""
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(FAINT)
    axes.grid(True, color="#e3e7ec", linewidth=0.9)
    axes.set_axisbelow(True)
    axes.tick_params(labelsize=size, colors=INK, length=4, color=FAINT)


def wall_plots(wall_curves, folder: Path, most: int = 12) -> list[Picture]:
    """One PNG a wall, ``along_WALL.png``: signed wall shear stress, and pressure, against arc length; pieces as separate lines.

    Gaps are where shear is withheld (NaN); the largest finite shear is marked, and the word "withheld" stands at each gap.
    Units follow the largest value shown. Of many walls the ``most`` with the largest shear are drawn, in the order given.
    """
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    by_name: dict[str, list] = {}
    for curve in wall_curves:
        by_name.setdefault(curve.name, []).append(curve)
    if len(by_name) > most:
        size = {name: _largest([p.shear for p in pieces]) for name, pieces in by_name.items()}
        kept = sorted(by_name, key=lambda name: -size[name])[:most]
        by_name = {name: pieces for name, pieces in by_name.items() if name in kept}
    return [_one_wall(name, sorted(pieces, key=lambda c: c.piece), folder) for name, pieces in by_name.items()]


def file_name(name: str) -> str:
    """A wall's name as part of a file name."""
    return "".join(c if c.isalnum() or c in "-_." else "_" for c in name)


def _largest(arrays) -> float:
    values = np.abs(np.concatenate([np.asarray(a, dtype=float) for a in arrays]))
    values = values[np.isfinite(values)]
    return float(values.max()) if len(values) else 0.0


def _one_wall(name: str, pieces, folder: Path) -> Picture:
    by_arc, arc_unit = axis_unit(_largest([p.arc for p in pieces]), "m")
    by_shear, shear_unit = axis_unit(_largest([p.shear for p in pieces]), "shear")
    by_pressure, pressure_unit = axis_unit(_largest([p.pressure for p in pieces]), "Pa")
    made = figure(12.0, 4.8)
    left, right = made.subplots(1, 2)
    withheld = any(np.isnan(p.shear).any() for p in pieces)
    for k, piece in enumerate(pieces):
        look = {"color": TONES[k % 5], "linestyle": DASHES[k % 5], "linewidth": 2.4, "label": f"piece {piece.piece}"}
        left.plot(piece.arc * by_arc, piece.shear * by_shear, **look)
        right.plot(piece.arc * by_arc, piece.pressure * by_pressure, **look)
        for low, high in gaps(piece.arc, piece.shear):
            left.axvspan(low * by_arc, high * by_arc, color="#c9ced6", alpha=0.6, linewidth=0)
    left.axhline(0.0, color=FAINT, linewidth=1.0)
    left.set_ylabel(f"wall shear stress, {shear_unit}", fontsize=18.5, color=INK)
    right.set_ylabel(f"pressure, {pressure_unit}", fontsize=18.5, color=INK)
    for axes in (left, right):
        plain_axes(axes)
        axes.set_xlabel(f"arc length, {arc_unit}", fontsize=18.5, color=INK)
        axes.margins(x=0.01)
        axes.ticklabel_format(axis="both", style="plain", useOffset=False)
        axes.locator_params(nbins=5)
        _give_flat_lines_room(axes)
    words = _mark_peak(left, pieces, by_arc, by_shear, shear_unit)
    if withheld:
        left.plot([], [], color="#c9ced6", linewidth=9, label="withheld at a sharp corner")
    if withheld or len(pieces) > 1:
        handles = [h for h in zip(*left.get_legend_handles_labels(), strict=True) if len(pieces) > 1 or "piece" not in h[1]]
        left.legend(
            [h[0] for h in handles],
            [h[1] for h in handles],
            fontsize=16,
            frameon=False,
            loc="lower right",
            bbox_to_anchor=(1.02, 0.99),
            ncols=min(len(handles), 4),
            borderpad=0.0,
        )
    made.suptitle(f"Along the wall {name}", x=0.012, ha="left", fontsize=20.5, fontweight="bold", color=INK)
    made.tight_layout(pad=0.8)
    path = folder / f"along_{file_name(name)}.png"
    made.savefig(path, dpi=150, pil_kwargs={"compress_level": 3})
    caption = (
        f"Wall shear stress (positive where the fluid pulls towards increasing arc length) and pressure along {name}.{words}"
    )
    if withheld:
        caption += " Grey: withheld next to a sharp re-entrant corner, where shear has no limit."
    return Picture(f"along_{name}", path, caption)


def gaps(arc: np.ndarray, values: np.ndarray) -> list[tuple[float, float]]:
    """Stretches of arc length on which the values are NaN, each reaching to the finite neighbours."""
    missing = np.isnan(values)
    edge = np.flatnonzero(np.diff(np.concatenate([[False], missing, [False]]).astype(int)))
    last = len(arc) - 1
    return [(float(arc[max(a - 1, 0)]), float(arc[min(b, last)])) for a, b in zip(edge[::2], edge[1::2], strict=True)]


def _mark_peak(axes, pieces, by_arc: float, by_shear: float, unit: str) -> str:
    """Ring the largest finite shear, unless it is the same nearly everywhere; returns a sentence for the caption."""
    known = np.concatenate([np.abs(p.shear[np.isfinite(p.shear)]) for p in pieces])
    if not len(known) or known.max() == 0.0 or np.mean(known > 0.999 * known.max()) > 0.2:
        return ""
    best = max(pieces, key=lambda p: np.nanmax(np.abs(p.shear)) if np.isfinite(p.shear).any() else -1.0)
    k = int(np.nanargmax(np.abs(best.shear)))
    x, y = best.arc[k] * by_arc, best.shear[k] * by_shear
    axes.plot([x], [y], marker="o", markersize=11, markerfacecolor="none", markeredgecolor=INK, markeredgewidth=2)
    on_right = k > 0.5 * len(best.arc)
    axes.annotate(
        f"{y:.3g} {unit}",
        (x, y),
        xytext=(-14 if on_right else 14, -4 if y > 0 else 4),
        textcoords="offset points",
        ha="right" if on_right else "left",
        va="top" if y > 0 else "bottom",
        fontsize=17,
        color=INK,
    )
    return f" The ring marks the largest value given, {y:.3g} {unit}."


def _give_flat_lines_room(axes) -> None:
    """A constant gets an axis from zero, so that round-off does not fill the picture."""
    low, high = axes.get_ylim()
    data = np.concatenate([np.asarray(line.get_ydata(), dtype=float) for line in axes.lines] or [np.zeros(1)])
    data = data[np.isfinite(data)]
    if len(data) and np.ptp(data) < 1e-3 * np.abs(data).max():
        top = float(np.abs(data).max()) * 1.25
        axes.set_ylim((0.0, top) if data.max() > 0 else (-top, 0.0))
    elif len(data) and not np.any(data):
        axes.set_ylim(-1.0, 1.0)
    else:
        axes.set_ylim(low, high)
