"""Traces, gradients and tractions along boundaries."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import turned
from meshes import box_mesh

from fem_flow.flow.boundary import Boundary, connected_runs
from fem_flow.flow.space import Space

GRADIENT = np.array([[0.7, -1.1], [0.4, 2.3]])


def bend(x, y):
    return x + 0.1 * np.sin(2 * y), y * (1 + 0.2 * np.sin(2 * x)) + 1


def made(mesh, kind="planar"):
    space = Space(mesh, kind, 1.0)
    return space, {name: Boundary(space, name, edges) for name, edges in mesh.boundaries.items()}


def test_linear_velocity_has_its_gradient_on_curved_edges():
    space, boundaries = made(box_mesh(3, 3, bend=bend))
    u = GRADIENT @ space.points.T
    for piece in boundaries.values():
        np.testing.assert_allclose(piece.velocity_gradient(u), np.broadcast_to(GRADIENT, (*piece.w.shape, 2, 2)), atol=1e-12)
        expected = np.einsum("xy,mqy->mqx", GRADIENT, piece.x)
        np.testing.assert_allclose(np.stack([piece.at_points(u[k]) for k in (0, 1)], axis=-1), expected, atol=1e-13)


def test_quadratic_velocity_linear_pressure_and_their_traction_on_straight_edges():
    space, boundaries = made(box_mesh(3, 3, bend=turned(20.0)))
    (x, y), mu = space.points.T, 0.6
    u = np.stack([x**2 + 3 * x * y, y**2 - x])
    p = (2.0 + x - 4 * y)[space.corner_nodes]
    for piece in boundaries.values():
        x, y = np.moveaxis(piece.x, -1, 0)
        np.testing.assert_allclose(piece.pressure(p), 2 + x - 4 * y, atol=1e-13)
        xx, xy, yx, yy = 2 * x + 3 * y, 3 * x, -np.ones_like(x), 2 * y
        n = piece.normal
        expected = np.stack([
            2 * mu * xx * n[..., 0] + mu * (xy + yx) * n[..., 1] - (2 + x - 4 * y) * n[..., 0],
            mu * (xy + yx) * n[..., 0] + 2 * mu * yy * n[..., 1] - (2 + x - 4 * y) * n[..., 1],
        ], axis=-1)
        np.testing.assert_allclose(piece.traction(u, p, mu), expected, atol=1e-12)


@pytest.mark.parametrize("kind", ["planar", "axisymmetric"])
def test_load_of_a_density_sums_to_its_integral(kind):
    space, boundaries = made(box_mesh(3, 3, bend=bend), kind)
    density = {name: np.cos(piece.x[..., 0]) for name, piece in boundaries.items()}
    for name, piece in boundaries.items():
        load = piece.load(density[name])
        assert load.sum() == pytest.approx(float((piece.w * density[name]).sum()), rel=1e-13)
        inside = np.setdiff1d(np.arange(space.n_velocity), piece.nodes)
        np.testing.assert_array_equal(load[inside], 0.0)
        np.testing.assert_allclose(load @ space.points[:, 0], (piece.w * density[name] * piece.x[..., 0]).sum(), rtol=1e-12)


def test_connected_runs_follow_the_edges_whatever_their_order():
    names = {"left": ("a", "wall"), "bottom": ("a", "wall"), "right": ("b", "wall"), "top": ("c", "wall")}
    mesh = box_mesh(4, 4, names=names)
    edges = np.random.default_rng(0).permutation(np.concatenate([mesh.boundaries["a"], mesh.boundaries["b"]]))
    (run,) = connected_runs(edges)
    assert sorted(run) == list(range(12))
    np.testing.assert_array_equal(edges[run[1:], 0], edges[run[:-1], 1])
    apart = np.concatenate([mesh.boundaries["b"], np.random.default_rng(1).permutation(box_side(mesh))])
    assert sorted(len(r) for r in connected_runs(apart)) == [4, 4]


def box_side(mesh):
    """The edges of the left side."""
    edges = mesh.boundaries["a"]
    return edges[np.abs(mesh.points[edges, 0]).max(axis=1) < 1e-12]


def test_a_closed_run_is_found_whole():
    mesh = box_mesh(5, 5)
    edges = np.concatenate(list(mesh.boundaries.values()))
    (run,) = connected_runs(edges)
    assert len(run) == 20
    assert edges[run[-1], 1] == edges[run[0], 0]
