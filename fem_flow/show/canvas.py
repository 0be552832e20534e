"""A drawing surface on pyvista whose world is the picture itself: one unit is one pixel, y upwards.

Because everything is placed in pixels, micrometre and metre parts look alike and text never collides by chance.
"""

from __future__ import annotations

import numpy as np

INK = (0.13, 0.16, 0.20)
FAINT = (0.45, 0.49, 0.54)
METAL = (0.87, 0.88, 0.90)


def colour_table(name: str, low: float = 0.0, high: float = 1.0, backwards: bool = False) -> np.ndarray:
    """A perceptually even, colour-blind-safe map as (256, 3) bytes, cut to a share of its range."""
    from matplotlib import colormaps

    table = colormaps[name](np.linspace(low, high, 256))[:, :3]
    return np.round(255 * (table[::-1] if backwards else table)).astype(np.uint8)


def colours(values: np.ndarray, limits: tuple[float, float], table: np.ndarray, missing=(170, 174, 180)) -> np.ndarray:
    """Values to (n, 3) bytes; NaN takes the colour ``missing``."""
    low, high = limits
    share = (np.asarray(values, dtype=float) - low) / ((high - low) or 1.0)
    known = np.isfinite(share)
    place = np.clip(np.where(known, share, 0.0), 0.0, 1.0) * 255
    result = table[np.round(place).astype(int)].copy()
    result[~known] = missing
    return result


class Canvas:
    """One off-screen window, reused for several pictures; use it in a ``with`` block."""

    def __init__(self):
        import matplotlib
        import pyvista

        fonts = matplotlib.get_data_path() + "/fonts/ttf/DejaVuSans"
        self._font = {False: fonts + ".ttf", True: fonts + "-Bold.ttf"}
        self._plotter = pyvista.Plotter(off_screen=True, window_size=(64, 64), lighting="none")
        self._plotter.ren_win.SetMultiSamples(4)
        self._plotter.set_background("white")
        self._depth = 0.0

    def __enter__(self):
        return self

    def __exit__(self, *exception):
        self._plotter.close()

    def clear(self, width: int, height: int) -> None:
        """Start an empty picture of that size in px."""
        self._plotter.clear_actors()
        self._plotter.window_size = (width, height)
        self._size = (width, height)
        self._depth = 0.0

    def _lift(self, points: np.ndarray) -> np.ndarray:
        """Each thing drawn lies above what was drawn before it."""
        self._depth += 0.01
        return np.column_stack([points, np.full(len(points), self._depth)]).astype(np.float32)

    def triangles(self, points: np.ndarray, triangles: np.ndarray, colour, opacity: float = 1.0) -> None:
        """Filled triangles; ``colour`` is one RGB triple (0 to 1) or (n, 3) bytes, one colour a point."""
        import pyvista

        if not len(triangles):
            return
        faces = np.column_stack([np.full(len(triangles), 3), triangles]).ravel()
        self._add(pyvista.PolyData(self._lift(points), faces=faces), colour, opacity)

    def polygon(self, points, colour, opacity: float = 1.0) -> None:
        """One convex filled polygon."""
        points = np.asarray(points, dtype=float)
        fan = np.array([(0, k, k + 1) for k in range(1, len(points) - 1)])
        self.triangles(points, fan, colour, opacity)

    def lines(self, lines, colour, width: float) -> None:
        """Polylines: a list of (n, 2) arrays or one (m, n, 2) array."""
        if isinstance(lines, np.ndarray):
            start, end = lines[:, :-1].reshape(-1, 2), lines[:, 1:].reshape(-1, 2)
        else:
            lines = [np.asarray(k, dtype=float) for k in lines if len(k) > 1]
            if not lines:
                return
            start, end = np.concatenate([k[:-1] for k in lines]), np.concatenate([k[1:] for k in lines])
        self.segments(start, end, colour, width)

    def segments(self, start: np.ndarray, end: np.ndarray, colour, width) -> None:
        """Many straight lines from (n, 2) to (n, 2), as quadrilaterals that overlap at their ends: chains have no gaps.

        ``width`` in px is one for all, or (n,).
        """
        step = end - start
        length = np.linalg.norm(step, axis=1)
        keep = length > 0
        half = np.broadcast_to(np.asarray(width, dtype=float) / 2, length.shape)[keep, None]
        along = step[keep] / length[keep, None] * half
        across = np.column_stack([-along[:, 1], along[:, 0]])
        a, b = start[keep] - along, end[keep] + along
        points = np.stack([a - across, b - across, b + across, a + across], axis=1).reshape(-1, 2)
        first = 4 * np.arange(len(a))[:, None]
        self.triangles(points, np.concatenate([first + [0, 1, 2], first + [0, 2, 3]]), colour)

    def dashed(self, start, end, colour, width: float, pattern=(34.0, 10.0, 6.0, 10.0)) -> None:
        """A chain line: long dash, gap, short dash, gap, in px."""
        start, end = np.asarray(start, dtype=float), np.asarray(end, dtype=float)
        length = float(np.linalg.norm(end - start))
        if length == 0:
            return
        along, at, k, pieces = (end - start) / length, 0.0, 0, []
        while at < length:
            stop = min(at + pattern[k % len(pattern)], length)
            if k % 2 == 0:
                pieces.append(np.array([start + at * along, start + stop * along]))
            at, k = stop, k + 1
        self.lines(pieces, colour, width)

    def text(
        self,
        x: float,
        y: float,
        words: str,
        size: int,
        *,
        across: str = "left",
        up: str = "bottom",
        bold=False,
        colour=INK,
        box: bool = False,
    ) -> None:
        """Words at a place; ``across`` is left, centre or right of the words, ``up`` their bottom, middle or top."""
        from vtkmodules.vtkRenderingCore import vtkTextActor

        actor = vtkTextActor()
        actor.SetInput(words)
        style = actor.GetTextProperty()
        style.SetFontFamily(4)  # from a file
        style.SetFontFile(self._font[bool(bold)])
        style.SetFontSize(int(size))
        style.SetBold(bold)
        style.SetColor(*colour)
        {
            "left": style.SetJustificationToLeft,
            "centre": style.SetJustificationToCentered,
            "right": style.SetJustificationToRight,
        }[across]()
        {
            "bottom": style.SetVerticalJustificationToBottom,
            "middle": style.SetVerticalJustificationToCentered,
            "top": style.SetVerticalJustificationToTop,
        }[up]()
        if box:
            style.SetBackgroundColor(1, 1, 1)
            style.SetBackgroundOpacity(0.85)
        actor.SetPosition(float(x), float(y))
        self._plotter.add_actor(actor, reset_camera=False, render=False)

    def _add(self, mesh, colour, opacity: float) -> None:
        options = {}
        if isinstance(colour, np.ndarray) and colour.ndim == 2:
            mesh.point_data["colour"] = colour
            options |= {"scalars": "colour", "rgb": True}
        else:
            options |= {"color": tuple(float(c) for c in colour)}  # whole numbers would be read as 0 to 255
        self._plotter.add_mesh(
            mesh,
            lighting=False,
            opacity=opacity,
            show_scalar_bar=False,
            copy_mesh=False,
            reset_camera=False,
            render=False,
            **options,
        )

    def image(self) -> np.ndarray:
        """Render; (height, width, 3) bytes."""
        from vtkmodules.util.numpy_support import vtk_to_numpy
        from vtkmodules.vtkRenderingCore import vtkWindowToImageFilter

        width, height = self._size
        camera = self._plotter.camera
        camera.parallel_projection = True
        camera.position = (width / 2, height / 2, 100.0)
        camera.focal_point = (width / 2, height / 2, 0.0)
        camera.up = (0, 1, 0)
        camera.parallel_scale = height / 2
        camera.clipping_range = (1.0, 200.0)
        self._plotter.camera_set = True
        window = self._plotter.ren_win
        window.Render()
        reader = vtkWindowToImageFilter()
        reader.SetInput(window)
        reader.ReadFrontBufferOff()
        reader.ShouldRerenderOff()
        reader.Update()
        pixels = vtk_to_numpy(reader.GetOutput().GetPointData().GetScalars())
        return pixels.reshape(height, width, -1)[::-1, :, :3].copy()

    def save(self, path, words: str) -> None:
        """Render and write a PNG that carries ``words`` as its description."""
        from PIL import Image, PngImagePlugin

        note = PngImagePlugin.PngInfo()
        note.add_itxt("Description", words)
        Image.fromarray(self.image()).save(path, pnginfo=note, compress_level=4)
