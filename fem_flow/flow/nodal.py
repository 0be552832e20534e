"""The solved fields as plain nodal arrays in SI: what pictures, files and probes are made from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class NodalFields:
    """Fields on the nodes of the curved quadratic mesh.

    Attributes
    ----------
    kind : ``"planar"`` or ``"axisymmetric"`` (x axial, y radial)
    points : (n, 2), m
    cells : (n_cells, 6), as in ``MeshData``
    velocity : (2, n), m/s
    pressure : (n,), Pa, counted from ambient (mid-edge values are the means of the corners: P1)
    shear_rate : (n,), 1/s, sqrt(2 D:D), averaged over the elements at a node
    viscosity : (n,), Pa s
    stream : (n,), stream function; m^2/s (planar, per depth) or m^3/s (axisymmetric, whole turn), u = d psi/dy
    """

    kind: str
    points: np.ndarray
    cells: np.ndarray
    velocity: np.ndarray
    pressure: np.ndarray
    shear_rate: np.ndarray
    viscosity: np.ndarray
    stream: np.ndarray


@dataclass(frozen=True)
class WallCurve:
    """Shear and pressure along one piece of a wall.

    Attributes
    ----------
    name : wall name
    piece : 1, 2, ... in the order of the smallest x (then y)
    pieces : how many pieces the wall has
    arc : (n,), m, arc length from the end with the smaller x (then y)
    points : (n, 2), m
    shear : (n,), Pa, signed: positive where the fluid pulls towards increasing arc length; NaN where withheld
    pressure : (n,), Pa
    closed : whether the piece is a closed curve
    """

    name: str
    piece: int
    pieces: int
    arc: np.ndarray
    points: np.ndarray
    shear: np.ndarray
    pressure: np.ndarray
    closed: bool = False
