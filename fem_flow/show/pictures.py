"""Pictures of a result: speed with streamlines, pressure, wall shear, mesh."""

from __future__ import annotations

import json
import os
import pickle
import queue
import subprocess
import sys
import threading
from dataclasses import dataclass
from pathlib import Path

from fem_flow.show.words import scope_statement

NAMES = ("speed", "pressure", "wall_shear", "mesh")


@dataclass(frozen=True)
class Picture:
    """One picture file.

    Attributes
    ----------
    name : ``"speed"``, ``"pressure"``, ``"wall_shear"``, ``"mesh"``, or ``"along_WALL"`` for a line plot
    path : the PNG
    caption : one or two sentences, plain text
    """

    name: str
    path: Path
    caption: str


class PicturesUnavailable(RuntimeError):
    """No picture could be rendered on this machine; the sentence says why. All numbers and files are unaffected."""


class Rendering:
    """Pictures being rendered in a process of their own, so that other work can go on beside it.

    Where the narrowest gap cannot be seen in the whole part, ``speed_gap`` and ``wall_shear_gap`` show it enlarged.

    Parameters
    ----------
    fields : NodalFields
    outline : Outline
    wall_curves : list of WallCurve
    folder : made if it does not exist
    names : which pictures, a selection of ``NAMES``
    time_limit : s, after which the picture process is ended
    """

    def __init__(self, fields, outline, wall_curves, folder: Path, names=NAMES, time_limit: float = 180.0):
        folder = Path(folder)
        folder.mkdir(parents=True, exist_ok=True)
        self._kind, self._limit = fields.kind, time_limit
        scope = scope_statement(fields.kind)
        self._message = pickle.dumps((fields, outline, list(wall_curves), str(folder), scope, list(names)))
        self._process, self._fault = None, None
        try:
            self._process = subprocess.Popen(
                [sys.executable, "-m", "fem_flow.show.render"],
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=subprocess.PIPE,
                env=_environment(),
            )
        except OSError as error:
            self._fault = f"The picture process could not be started ({error})."
            return
        self._answer: queue.SimpleQueue = queue.SimpleQueue()
        threading.Thread(target=self._talk, daemon=True).start()

    def _talk(self):
        try:
            self._answer.put(self._process.communicate(self._message, timeout=self._limit))
        except subprocess.TimeoutExpired:
            self.stop()
            self._process.communicate()
            self._answer.put(None)

    def stop(self) -> None:
        """End the process; harmless where it has ended."""
        if self._process is not None:
            self._process.kill()

    def pictures(self) -> list[Picture]:
        """Wait for the pictures: PNG files of some 1800 px width.

        Raises
        ------
        PicturesUnavailable
            the picture process could not render; the caller says so in the result and goes on
        """
        if self._fault is not None:
            raise PicturesUnavailable(self._fault)
        try:
            answer = self._answer.get()
        except BaseException:
            self.stop()
            raise
        if answer is None:
            raise PicturesUnavailable(f"Rendering took longer than {self._limit:.0f} s and was ended.")
        out, err = answer
        if self._process.returncode != 0:
            raise PicturesUnavailable(_why(self._process.returncode, err))
        short = f"Steady laminar 2-D {'axisymmetric' if self._kind == 'axisymmetric' else 'planar'} computation."
        return [Picture(name, Path(path), f"{caption} {short}") for name, path, caption in json.loads(out)]


def pictures(fields, outline, wall_curves, folder: Path, *, names=NAMES, time_limit: float = 180.0) -> list[Picture]:
    """Render the pictures of a result and wait for them; see `Rendering` for what is taken and raised."""
    return Rendering(fields, outline, wall_curves, folder, names, time_limit).pictures()


def _environment() -> dict:
    """The child finds the same packages as this process, however it was started."""
    here = str(Path(__file__).resolve().parents[2])
    others = [p for p in sys.path if p and p != here]
    return {**os.environ, "PYTHONPATH": os.pathsep.join([here, *others])}


def _why(code: int, stderr: bytes) -> str:
    lines = [line.strip() for line in stderr.decode(errors="replace").splitlines() if line.strip()]
    if code < 0:
        return (
            "The graphics library found neither a display nor an off-screen renderer on this machine. "
            "Install Mesa (on Debian and Ubuntu: apt install libegl1 libgl1-mesa-dri) and run again; the numbers are "
            "unaffected."
        )
    last = lines[-1] if lines else f"exit code {code}"
    return f"Rendering failed ({last}). The numbers are unaffected."
