"""Pictures of a result: speed with streamlines, pressure, wall shear, mesh."""

from __future__ import annotations

import json
import os
import pickle
import subprocess
import sys
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


def pictures(fields, outline, wall_curves, folder: Path, *, names=NAMES, time_limit: float = 180.0) -> list[Picture]:
    """Render the pictures of a result as PNG files of some 1800 px width, in a process of their own.

    Where the narrowest gap cannot be seen in the whole part, ``speed_gap`` and ``wall_shear_gap`` show it enlarged.

    Parameters
    ----------
    fields : NodalFields
    outline : Outline
    wall_curves : list of WallCurve
    folder : made if it does not exist
    names : which pictures, a selection of ``NAMES``
    time_limit : s, after which the picture process is ended

    Raises
    ------
    PicturesUnavailable
        the picture process could not render; the caller says so in the result and goes on
    """
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    scope = scope_statement(fields.kind)
    message = pickle.dumps((fields, outline, list(wall_curves), str(folder), scope, list(names)))
    try:
        done = subprocess.run(
            [sys.executable, "-m", "fem_flow.show.render"],
            input=message,
            capture_output=True,
            timeout=time_limit,
            env=_environment(),
        )
    except subprocess.TimeoutExpired:
        raise PicturesUnavailable(f"Rendering took longer than {time_limit:.0f} s and was ended.") from None
    except OSError as error:
        raise PicturesUnavailable(f"The picture process could not be started ({error}).") from None
    if done.returncode != 0:
        raise PicturesUnavailable(_why(done.returncode, done.stderr))
    short = f"Steady laminar 2-D {'axisymmetric' if fields.kind == 'axisymmetric' else 'planar'} computation."
    return [Picture(name, Path(path), f"{caption} {short}") for name, path, caption in json.loads(done.stdout)]


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
