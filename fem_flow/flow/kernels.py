"""The weak forms, cell by cell: what each pair (or each) of shape functions contributes.

Symmetric-gradient form of the steady Navier-Stokes equations with test functions v, q:

    int 2 mu D(u):D(v) + rho (u.grad)u.v - p div v - q div u  =  int_boundary t.v

Axisymmetric flow (x axial, y radial) adds the hoop rate u_r/r to D and to div; all weights carry r.
Arrays are (E, 6, 6), (E, 6, 3) or (E, 6): rows are test functions.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.flow.space import CellGroup


@dataclass(frozen=True)
class States:
    """Velocity, its derivatives and pressure at the quadrature points of a group, each (E, q)."""

    ux: np.ndarray
    uy: np.ndarray
    ux_x: np.ndarray
    ux_y: np.ndarray
    uy_x: np.ndarray
    uy_y: np.ndarray
    p: np.ndarray


def states(g: CellGroup, u: np.ndarray, p: np.ndarray) -> States:
    """Evaluate velocity ``u`` (2, n_nodes) and pressure ``p`` (n_pressure,) at the quadrature points."""
    ex, ey = u[0][g.nodes], u[1][g.nodes]
    return States(
        ex @ g.phi.T, ey @ g.phi.T, _slope(g.gx, ex), _slope(g.gy, ex), _slope(g.gx, ey), _slope(g.gy, ey),
        p[g.corners] @ g.psi.T,
    )


def viscous(g: CellGroup, mu: float) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Blocks xx, xy, yx, yy of int 2 mu D(u):D(v); xy is test x against velocity y."""
    wgx = (mu * g.w)[:, :, None] * g.gx
    wgy = (mu * g.w)[:, :, None] * g.gy
    a = _outer(wgx, g.gx)
    b = _outer(wgy, g.gy)
    xy = _outer(wgy, g.gx)
    xx = 2 * a + b
    yy = a + 2 * b
    if g.r is not None:
        hoop = (2 * mu * g.w / g.r**2)[:, :, None] * g.phi
        yy = yy + _outer(hoop, g.phi)
    return xx, xy, np.ascontiguousarray(xy.transpose(0, 2, 1)), yy


def divergence(g: CellGroup) -> tuple[np.ndarray, np.ndarray]:
    """Blocks (E, 6, 3) of -int p div v for the x and the y test functions."""
    wpsi = g.w[:, :, None] * g.psi
    dy = g.gy if g.r is None else g.gy + g.phi / g.r[:, :, None]
    return -_outer(g.gx, wpsi), -_outer(dy, wpsi)


def convection(g: CellGroup, u: np.ndarray, rho: float) -> np.ndarray:
    """Block (E, 6, 6) of int rho (w.grad)u v, the same for both components; ``u`` (2, n_nodes) is the carrier w."""
    wx, wy = _at_points(g, u)
    along = (rho * g.w * wx)[:, :, None] * g.gx + (rho * g.w * wy)[:, :, None] * g.gy
    return np.matmul(g.phi.T, along)


def convection_newton(g: CellGroup, u: np.ndarray, rho: float) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Blocks xx, xy, yx, yy of int rho (du.grad)u v, the second half of the derivative of convection."""
    ex, ey = u[0][g.nodes], u[1][g.nodes]
    products = (g.phi[:, :, None] * g.phi[:, None, :]).reshape(len(g.phi), 36)
    blocks = []
    for e in (ex, ey):
        for d in (g.gx, g.gy):
            slope = np.matmul(d, e[:, :, None])[:, :, 0]
            blocks.append(((rho * g.w * slope) @ products).reshape(-1, 6, 6))
    return tuple(blocks)


def momentum_residual(g: CellGroup, s: States, mu: float, rho: float) -> tuple[np.ndarray, np.ndarray]:
    """Cell vectors (E, 6) of int 2 mu D(u):D(v) + rho (u.grad)u.v - p div v, for x and y test functions."""
    rx = mu * 2 * s.ux_x - s.p
    ry = mu * 2 * s.uy_y - s.p
    shear = mu * (s.ux_y + s.uy_x)
    cx = rho * (s.ux * s.ux_x + s.uy * s.ux_y)
    cy = rho * (s.ux * s.uy_x + s.uy * s.uy_y)
    if g.r is not None:
        cy = cy + (2 * mu * s.uy / g.r - s.p) / g.r
    fx = _test(g.gx, g.w * rx) + _test(g.gy, g.w * shear) + (g.w * cx) @ g.phi
    fy = _test(g.gx, g.w * shear) + _test(g.gy, g.w * ry) + (g.w * cy) @ g.phi
    return fx, fy


def divergence_at(g: CellGroup, s: States) -> np.ndarray:
    """div u at the quadrature points, (E, q)."""
    div = s.ux_x + s.uy_y
    return div if g.r is None else div + s.uy / g.r


def continuity_residual(g: CellGroup, s: States) -> tuple[np.ndarray, np.ndarray]:
    """Cell vectors (E, 3) of -int q div u, and of int q |grad u|, the size that it is judged against."""
    rates = np.sqrt(s.ux_x**2 + s.ux_y**2 + s.uy_x**2 + s.uy_y**2)
    return -(g.w * divergence_at(g, s)) @ g.psi, (g.w * rates) @ g.psi


def _slope(d, e):
    return np.matmul(d, e[:, :, None])[:, :, 0]


def _at_points(g, u):
    return u[0][g.nodes] @ g.phi.T, u[1][g.nodes] @ g.phi.T


def _outer(test, trial):
    """sum over points of test_i trial_j, (E, q, i), (E|1, q, j) -> (E, i, j)."""
    return np.matmul(np.swapaxes(test, 1, 2), trial)


def _test(shape, weighted):
    return np.matmul(np.swapaxes(shape, 1, 2), weighted[:, :, None])[:, :, 0]
