"""Points on curved meshes: every one is found, and only those inside."""

from __future__ import annotations

import time

import numpy as np
import pytest
from flow_tools import CHANNEL, flow_case
from meshes import box_mesh

from fem_flow.flow.finder import Finder
from fem_flow.flow.problem import solve
from fem_flow.flow.reference import p1_values, p2_values


def ring_part(angle, depth):
    return (1 - depth) * np.cos(angle), (1 - depth) * np.sin(angle)


def arc(n=6, thickness=0.5):
    return box_mesh(4 * n, n, box=(0.0, 2.5, 0.0, thickness), bend=ring_part)


def thin(aspect):
    """Cells that are ``aspect`` times as long as they are thick at the lower wall, bent, and growing from there."""
    first = np.expm1(3 / 20) / np.expm1(3.0)

    def bend(x, y):
        return x, 0.2 * np.sin(2 * x) + (np.expm1(3 * y) / np.expm1(3.0)) * (0.2 / aspect) / first

    return box_mesh(10, 20, box=(0, 2, 0, 1), bend=bend)


def graded(x, y):
    return x * 1e-4 ** (1 - x), y * 1e-4 ** (1 - y)


MESHES = {
    "arc": arc(), "thin": thin(50.0), "very thin": thin(2e3), "graded": box_mesh(20, 20, bend=graded),
    "two cells": box_mesh(1, 1),
}


@pytest.fixture(params=list(MESHES))
def mesh(request):
    return MESHES[request.param]


def places(mesh, finder, at):
    cell, shapes, inside = finder.locate(at)
    return np.einsum("nk,nkx->nx", shapes, mesh.points[mesh.cells[cell]]), cell, inside


def test_all_nodes_are_found_and_interpolated(mesh):
    found, _, inside = places(mesh, Finder(mesh.points, mesh.cells), mesh.points)
    assert inside.all()
    size = np.ptp(mesh.points, axis=0).max()
    np.testing.assert_allclose(found, mesh.points, atol=1e-9 * size)


def test_points_within_cells_are_found_in_them(mesh):
    """Random points of every cell: the cell is found again, with the same reference coordinates."""
    rng = np.random.default_rng(1)
    local = rng.dirichlet([1, 1, 1], size=len(mesh.cells))[:, 1:] * 0.98 + 0.005
    at = np.einsum("nk,nkx->nx", p2_values(local), mesh.points[mesh.cells])
    cell, shapes, inside, linear = Finder(mesh.points, mesh.cells).locate(at, with_linear=True)
    assert inside.all()
    np.testing.assert_array_equal(cell, np.arange(len(mesh.cells)))
    np.testing.assert_allclose(shapes, p2_values(local), atol=1e-6)
    np.testing.assert_allclose(linear, p1_values(local), atol=1e-6)


def test_points_on_the_true_curved_boundary_and_a_little_outside():
    """On the circle (the chord of an edge is far from it), a thousandth of an element outside, and far more than that."""
    mesh = arc()
    finder = Finder(mesh.points, mesh.cells)
    angles = np.linspace(0.05, 2.45, 211)
    ring = np.stack([np.cos(angles), np.sin(angles)], axis=1)
    thickness = 0.5 / 6
    assert finder.locate(ring)[2].all()
    assert finder.locate(ring * (1 + 0.5e-3 * thickness))[2].all()
    assert not finder.locate(ring * (1 + 5e-3 * thickness))[2].any()
    assert not finder.locate(0.5 * ring * (1 - 5e-3 * 2 * thickness))[2].any()


def test_margin_is_a_thousandth_of_the_local_element():
    mesh = box_mesh(4, 4)
    finder = Finder(mesh.points, mesh.cells)
    inside = finder.locate([(-0.9e-3 / 4, 0.1), (-1.1e-3 / 4, 0.1), (0.1, 1 + 0.9e-3 / 4), (0.1, 1 + 1.1e-3 / 4)])[2]
    np.testing.assert_array_equal(inside, [True, False, True, False])


@pytest.mark.parametrize("at", [(0.0, 0.0), (5.0, 5.0), (-1e300, 3.0), (1e300, -1e300), (np.nan, 0.5), (np.inf, 0.5)])
def test_points_outside(at):
    """The hollow of the arc, far away, absurdly far away, and no point at all; the shapes still add up to one."""
    _, shapes, inside = Finder(MESHES["arc"].points, MESHES["arc"].cells).locate([at])
    assert not inside[0]
    assert shapes.sum() == pytest.approx(1.0)


def test_near_outside_points_get_the_nearest_value():
    mesh = box_mesh(5, 5)
    found, _, inside = places(mesh, Finder(mesh.points, mesh.cells), [(0.5, 1.02), (-0.03, 0.21)])
    assert not inside.any()
    np.testing.assert_allclose(found, [(0.5, 1.0), (0.0, 0.21)], atol=0.05)


def test_no_points():
    cell, shapes, inside = Finder(MESHES["arc"].points, MESHES["arc"].cells).locate(np.zeros((0, 2)))
    assert len(cell) == len(shapes) == len(inside) == 0


def test_input_is_not_changed():
    at = np.array([(0.5, 0.5), (40.0, 2.0)])
    before = at.copy()
    Finder(MESHES["arc"].points, MESHES["arc"].cells).locate(at)
    np.testing.assert_array_equal(at, before)


def test_a_hundred_thousand_points_take_few_seconds():
    mesh = arc(30)
    rng = np.random.default_rng(2)
    at = rng.uniform([-1, 0], [1, 1], size=(100_000, 2))
    clock = time.process_time()
    finder = Finder(mesh.points, mesh.cells)
    inside = finder.locate(at)[2]
    seconds = time.process_time() - clock
    radius, angle = np.hypot(*at.T), np.arctan2(at[:, 1], at[:, 0])
    expected = (radius > 0.5) & (radius < 1) & (angle < 2.5)
    assert (inside != expected).mean() < 1e-3
    assert seconds < 5.0


def test_solution_gives_nan_outside_and_values_on_the_walls():
    case = flow_case({"inlet": ("velocity", 1.0), "outlet": ("static_pressure", 2.0)}, mu=0.1, rho=1.0)
    solution = solve(box_mesh(4, 4, box=(0, 2e-3, 0, 1e-3), names=CHANNEL), case)
    at = np.array([(1e-3, 0.5e-3), (1e-3, 0.0), (1e-3, 1e-3), (2e-3, 0.5e-3), (1e-3, 1.1e-3), (-1.0, 0.0)])
    velocity, pressure = solution.velocity(at), solution.pressure(at)
    assert velocity.shape == (2, 6)
    assert pressure.shape == (6,)
    np.testing.assert_allclose(velocity[0], [1.5, 0, 0, 1.5, np.nan, np.nan], atol=1e-11)
    np.testing.assert_allclose(pressure[3], 2.0, rtol=1e-10)
    np.testing.assert_array_equal(np.isnan(pressure), [False] * 4 + [True] * 2)
