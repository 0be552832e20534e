"""Orders of convergence by manufactured solutions and Kovasznay's flow, on curved meshes."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import assert_order, errors, forced_flow, reference, values
from meshes import box_mesh

NAMESPACE = {name: getattr(np, name) for name in ("sin", "cos", "exp", "log", "pi")}


def function(text, names, **constants):
    code = compile(text, "reference", "eval")

    def evaluate(*coordinates):
        found = eval(code, NAMESPACE | constants | dict(zip(names, coordinates, strict=True)))
        return np.broadcast_to(np.asarray(found, float), np.shape(coordinates[0]))

    return evaluate


def manufactured(letter):
    entry = next(v for v in reference("manufactured")["values"] if v["quantity"].startswith(letter) and "forcing" in v)
    return entry, entry["at"]


def bulge(x, y):
    return x + 0.06 * np.sin(np.pi * y) * (1 + x), y + 0.08 * np.sin(np.pi * x)


def planar():
    entry, at = manufactured("A ")
    fields = [function(t, "xy", **at) for t in (*entry["velocity"], entry["pressure"], *entry["forcing"])]
    u, v, p, fx, fy = fields
    meshes = [box_mesh(n, n, bend=bulge) for n in (6, 9, 14)]
    return "planar", at, meshes, lambda x, y: (u(x, y), v(x, y)), p, lambda x, y: (fx(x, y), fy(x, y)), ()


def axisymmetric():
    """x is the axis: the file's z; y its r."""
    entry, at = manufactured("C ")
    at = dict(at)
    names = ("r", "z")
    ur, _, uz = (function(t, names, **at) for t in entry["velocity"])
    fr, _, fz = (function(t, names, **at) for t in entry["forcing"])
    p = function(entry["pressure"], names, **at)
    sides = {"bottom": ("axis", "axis"), **{s: (s, "wall") for s in ("left", "right", "top")}}

    def bend(x, y):
        return x + 0.1 * y * (1 - y), y * (1 + 0.15 * np.sin(np.pi * x / 2))

    meshes = [box_mesh(2 * n, n, box=(0, 2, 0, 1), names=sides, bend=bend) for n in (5, 7, 10)]
    velocity, force = (lambda x, y: (uz(y, x), ur(y, x))), (lambda x, y: (fz(y, x), fr(y, x)))
    return "axisymmetric", at, meshes, velocity, lambda x, y: p(y, x), force, ("axis",)


@pytest.fixture(params=[planar, axisymmetric], scope="module")
def series(request):
    kind, at, meshes, velocity, pressure, force, axis = request.param()
    wrong = []
    for mesh in meshes:
        _, state = forced_flow(mesh, kind, at["mu"], at["rho"], velocity, force, axis)
        wrong.append(errors(mesh, kind, state, velocity, pressure))
    return [len(mesh.cells) ** -0.5 for mesh in meshes], np.array(wrong)


def test_velocity_converges_at_order_three(series):
    assert_order(series[0], series[1][:, 0], 3)


def test_pressure_converges_at_order_two(series):
    assert_order(series[0], series[1][:, 1], 2)


def test_our_reading_of_the_manufactured_fields():
    """The strings give the point values of the same file, so no test above compares with a field read wrongly."""
    entry, at = manufactured("C ")
    points = next(v for v in reference("manufactured")["values"] if v["quantity"].startswith("C ") and "u_r" in v)
    for name, text in zip((*entry["velocity_names"], "p"), (*entry["velocity"], entry["pressure"]), strict=True):
        found = function(text, ("r", "z"), **at)(np.array(points["r"]), np.array(points["z"]))
        np.testing.assert_allclose(found, points[name], rtol=1e-10, atol=1e-12)


def kovasznay(reynolds):
    lam = values("kovasznay", "lambda", Re=reynolds)["value"]

    def velocity(x, y):
        e = np.exp(lam * x)
        return 1 - e * np.cos(2 * np.pi * y), lam / (2 * np.pi) * e * np.sin(2 * np.pi * y)

    return velocity, lambda x, y: 0.5 * (1 - np.exp(2 * lam * x))


def kovasznay_errors(n, reynolds=40.0):
    mesh = box_mesh(3 * n, 4 * n, box=(-0.5, 1.0, -0.5, 1.5))
    velocity, pressure = kovasznay(reynolds)
    _, state = forced_flow(mesh, "planar", 1 / reynolds, 1.0, velocity, lambda x, y: (0 * x, 0 * x))
    return errors(mesh, "planar", state, velocity, pressure)


@pytest.fixture(scope="module")
def kovasznay_series():
    return {n: kovasznay_errors(n) for n in (3, 4, 6)}


def test_kovasznay_converges_at_orders_three_and_two(kovasznay_series):
    sizes = [1 / n for n in kovasznay_series]
    wrong = np.array(list(kovasznay_series.values()))
    assert_order(sizes, wrong[:, 0], 3)
    assert_order(sizes, wrong[:, 1], 2)


def test_kovasznay_on_squares_of_a_twelfth(kovasznay_series):
    """At Re 40 on 18 x 24 squares the velocity is within 5e-4 of its own size (L2), the pressure within 1e-3 of its range."""
    velocity, pressure = kovasznay_series[6]
    entry = values("kovasznay", "over", Re=40.0)
    points = values("kovasznay", "u, v, p", Re=40.0)
    assert 0 < velocity < 5e-4 * np.sqrt(entry["int_u2"] + entry["int_v2"])
    assert 0 < pressure < 1e-3 * np.ptp(points["p"])
