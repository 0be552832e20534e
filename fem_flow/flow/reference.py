"""The quadratic reference triangle, from scikit-fem: shape functions, their gradients and quadrature orders."""

from __future__ import annotations

import numpy as np
from skfem import ElementTriP1, ElementTriP2

LOCAL_EDGES = ((0, 1, 3), (1, 2, 4), (2, 0, 5))
"""Start, end and middle node of each edge of a cell, in the node order of ``MeshData.cells``."""

REFERENCE_CORNERS = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]])


def quadrature_order(kind: str, curved: bool) -> int:
    """Order of the cell quadrature for P2 velocities with convection.

    Convection u.grad(u).v of P2 on straight planar cells has degree 5; the weight r of axisymmetric flow adds one; on
    curved cells the integrand is rational and two more are taken.
    """
    return (5 if kind == "planar" else 6) + (2 if curved else 0)


def p2_values(at: np.ndarray) -> np.ndarray:
    """Shape functions at reference points ``at`` (n, 2) -> (n, 6)."""
    return _table(ElementTriP2(), at, 6, 0)


def p2_gradients(at: np.ndarray) -> np.ndarray:
    """Reference gradients at ``at`` (n, 2) -> (n, 6, 2)."""
    return _table(ElementTriP2(), at, 6, 1)


def p1_values(at: np.ndarray) -> np.ndarray:
    """Linear shape functions at ``at`` (n, 2) -> (n, 3)."""
    return _table(ElementTriP1(), at, 3, 0)


def _table(element, at, count, which):
    at = np.ascontiguousarray(np.asarray(at, float).T)
    columns = [np.broadcast_to(element.lbasis(at, i)[which], (2,) * which + (at.shape[1],)) for i in range(count)]
    return np.stack([np.moveaxis(np.asarray(c, float), -1, 0) for c in columns], axis=1)


def line_shapes(points: int = 5) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Gauss rule on the unit interval with quadratic shapes for nodes (start, end, middle).

    Returns
    -------
    s (q,), weights (q,), values (q, 3), derivatives (q, 3). ``points`` Gauss points are exact to degree 2*points - 1.
    """
    x, w = np.polynomial.legendre.leggauss(points)
    s = 0.5 * (x + 1.0)
    values = np.stack([(1 - s) * (1 - 2 * s), s * (2 * s - 1), 4 * s * (1 - s)], axis=1)
    slopes = np.stack([4 * s - 3, 4 * s - 1, 4 - 8 * s], axis=1)
    return s, 0.5 * w, values, slopes
