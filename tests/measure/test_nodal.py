"""Nodal fields: shear rate, stream function with its signs."""

import math

import numpy as np
import pytest
from meshes import box_mesh
from solved import PIPE, SLOT, flow, round_body, sliding, solved, static

from fem_flow.measure.nodal import nodal_fields

PORTS = {"inlet": flow(2.0), "outlet": static(5.0)}


def test_poiseuille_fields():
    solution = solved(box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), SLOT), ports=PORTS, viscosity=0.1, depth=1.0)
    f = nodal_fields(solution)
    y = f.points[:, 1]
    exact = 12 * (y**2 / 2 - y**3 / 3)
    assert f.stream == pytest.approx(exact, abs=5e-3)  # a cubic, by P2
    ports = np.unique(np.concatenate([solution.boundaries[p].nodes for p in PORTS]))
    assert f.stream[ports] == pytest.approx(exact[ports], abs=1e-12)
    assert f.shear_rate == pytest.approx(12 * np.abs(1 - 2 * y), abs=1e-9)
    assert f.pressure == pytest.approx(5.0 + 2.4 * (3 - f.points[:, 0]), rel=1e-11)
    assert f.velocity[0] == pytest.approx(12 * y * (1 - y), abs=1e-11)
    assert (f.viscosity == 0.1).all()


def test_stream_function_of_a_pipe_is_the_whole_flow():
    f = nodal_fields(
        solved(box_mesh(6, 6, (0.0, 3.0, 0.0, 0.5), PIPE), "axisymmetric", ports={"inlet": flow(0.3), "outlet": static(0.0)})
    )
    y = f.points[:, 1]
    assert np.abs(f.stream[y == 0.0]).max() < 1e-12
    assert f.stream[y == 0.5] == pytest.approx(np.full((y == 0.5).sum(), 0.3), abs=1e-12)
    assert f.stream == pytest.approx(0.3 * (2 * (2 * y) ** 2 - (2 * y) ** 4), abs=1e-3)


def test_shear_rate_on_the_axis_is_finite_and_includes_the_hoop_rate():
    """A narrowing pipe: on the axis 2 D:D = 3 (du/dx)^2, for the radial and the hoop rate are -du/dx / 2 each."""
    mesh = box_mesh(24, 8, (0.0, 3.0, 0.0, 0.5), PIPE, lambda x, y: (x, y * (1 - 0.4 * np.sin(np.pi * x / 6) ** 2)))
    solution = solved(mesh, "axisymmetric", ports={"inlet": flow(0.3), "outlet": static(0.0)}, inertia=False)
    f = nodal_fields(solution)
    axis = (f.points[:, 1] == 0.0) & (np.abs(f.points[:, 0] - 1.5) < 0.3)
    x = f.points[axis, 0]
    h = 1e-3
    ahead, behind = (solution.velocity(np.stack([x + d, np.zeros_like(x)], axis=1))[0] for d in (h, -h))
    assert f.shear_rate[axis] == pytest.approx(math.sqrt(3) * np.abs(ahead - behind) / (2 * h), rel=0.03)


def test_stream_function_is_constant_along_walls():
    """Signs by u = d psi/dy: the difference between the walls of a channel is the flow between them; a body has one value."""
    solution = solved(round_body(6, 8), ports={"inlet": flow(2.0), "outlet": static(0.0)}, inertia=False)
    f = nodal_fields(solution)
    on = {name: f.stream[piece.nodes] for name, piece in solution.boundaries.items()}
    for name in ("low", "high", "body"):
        assert np.ptp(on[name]) < 1e-12, name
    assert on["high"].mean() - on["low"].mean() == pytest.approx(2.0, rel=1e-12)
    assert on["body"].mean() - on["low"].mean() == pytest.approx(1.0, rel=1e-3)


def test_stream_function_gives_back_the_velocity():
    mesh = box_mesh(16, 16, names={s: (s, "wall") for s in ("left", "right", "bottom", "top")})
    solution = solved(mesh, walls={"top": sliding(1.0)}, inertia=False)
    f = nodal_fields(solution)
    at = {(round(x, 9), round(y, 9)): i for i, (x, y) in enumerate(f.points)}
    h = 1 / 16
    for x, y in ((0.5, 0.5), (0.25, 0.75), (0.75, 0.25)):
        slope_y = (f.stream[at[x, y + h]] - f.stream[at[x, y - h]]) / (2 * h)
        slope_x = (f.stream[at[x + h, y]] - f.stream[at[x - h, y]]) / (2 * h)
        i = at[x, y]
        assert [slope_y, -slope_x] == pytest.approx(f.velocity[:, i].tolist(), abs=0.01)
