"""Our scalar blocks against scikit-fem's own vector-valued forms."""

from __future__ import annotations

import numpy as np
import pytest
from flow_tools import boundary_fixed
from meshes import box_mesh
from scipy.spatial import cKDTree
from skfem import Basis, BilinearForm, ElementTriP1, ElementTriP2, ElementVector, MeshTri2
from skfem.helpers import ddot, div, dot, grad, mul, sym_grad

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.conditions import Fixed
from fem_flow.flow.reference import quadrature_order
from fem_flow.flow.space import Space
from fem_flow.flow.system import State, System

MU, RHO = 0.7, 1.3


def bent(x, y):
    return x + 0.08 * np.sin(3 * y) * (1 + x), y * (1 + 0.1 * np.sin(2 * x)) + 0.5


class Both:
    """A system without conditions and the same spaces in scikit-fem, unknowns matched by their places."""

    def __init__(self, kind, curved):
        self.kind = kind
        mesh = box_mesh(3, 2, bend=bent if curved else lambda x, y: (x, y + 0.5))
        space = Space(mesh, kind, 1.0)
        boundaries = {n: Boundary(space, n, e) for n, e in mesh.boundaries.items()}
        fixed = boundary_fixed(space, boundaries, lambda x, y: (x, y))
        free = Fixed(fixed.frames, np.zeros_like(fixed.mask), np.zeros_like(fixed.values))
        self.system = System(space, boundaries, {}, free, MU, RHO)
        theirs = MeshTri2(mesh.points.T.copy(), mesh.cells.T.copy())
        order = quadrature_order(kind, curved)
        self.vector = Basis(theirs, ElementVector(ElementTriP2()), intorder=order)
        self.scalar = Basis(theirs, ElementTriP1(), intorder=order)
        v = [np.concatenate([self.vector.nodal_dofs[k], self.vector.facet_dofs[k]]) for k in (0, 1)]
        self.velocity = np.concatenate([self._match(self.vector.doflocs[:, d], d, mesh.points) for d in v])
        p = np.arange(self.scalar.N)
        self.pressure = self._match(self.scalar.doflocs, p, mesh.points[space.corner_nodes])
        rng = np.random.default_rng(5)
        self.state = State(rng.normal(size=(2, space.n_velocity)), rng.normal(size=space.n_pressure), np.zeros(0))

    @staticmethod
    def _match(places, dofs, wanted):
        distance, found = cKDTree(places.T).query(wanted)
        assert distance.max() < 1e-12
        assert len(set(found)) == len(wanted)
        return dofs[found]

    def blocks(self, rho, newton):
        """Our velocity block and divergence block (rows pressures 1, 2, ...: the first is left out as the level)."""
        full = self.system.matrix(self.state, rho, newton).toarray()
        n = 2 * self.system.space.n_velocity
        assert full.shape[0] == n + self.system.space.n_pressure - 1
        np.testing.assert_array_equal(full[n:, n:], 0.0)
        return full[:n, :n], full[n:, :n], full[:n, n:]

    def theirs(self, form, trial, test):
        return form.assemble(trial, test)

    def carrier(self):
        field = np.zeros(self.vector.N)
        field[self.velocity] = self.state.u.ravel()
        return self.vector.interpolate(field)


def weight(kind, w):
    return w.x[1] if kind == "axisymmetric" else np.ones_like(w.x[1])


def hoop(kind, w):
    return 1.0 / w.x[1] ** 2 if kind == "axisymmetric" else np.zeros_like(w.x[1])


@pytest.fixture(params=[("planar", False), ("planar", True), ("axisymmetric", False), ("axisymmetric", True)], scope="module")
def both(request):
    return Both(*request.param)


def agree(ours, theirs):
    np.testing.assert_allclose(ours, theirs, rtol=0, atol=2e-13 * np.abs(theirs).max())


def test_viscous_block(both):
    @BilinearForm
    def form(u, v, w):
        strain = ddot(sym_grad(u), sym_grad(v)) + hoop(both.kind, w) * u[1] * v[1]
        return 2 * MU * strain * weight(both.kind, w)

    theirs = form.assemble(both.vector).toarray()[np.ix_(both.velocity, both.velocity)]
    agree(both.blocks(0.0, False)[0], theirs)


def test_divergence_block(both):
    @BilinearForm
    def form(u, q, w):
        radial = u[1] / w.x[1] if both.kind == "axisymmetric" else 0.0
        return -q * (div(u) + radial) * weight(both.kind, w)

    theirs = form.assemble(both.vector, both.scalar).toarray()[np.ix_(both.pressure[1:], both.velocity)]
    _, divergence, gradient = both.blocks(0.0, False)
    agree(divergence, theirs)
    np.testing.assert_array_equal(gradient, divergence.T)


def test_convection_block(both):
    @BilinearForm
    def form(u, v, w):
        return RHO * dot(mul(grad(u), w["carrier"]), v) * weight(both.kind, w)

    theirs = form.assemble(both.vector, carrier=both.carrier()).toarray()[np.ix_(both.velocity, both.velocity)]
    agree(both.blocks(RHO, False)[0] - both.blocks(0.0, False)[0], theirs)


def test_newton_block(both):
    @BilinearForm
    def form(u, v, w):
        return RHO * dot(mul(grad(w["carrier"]), u), v) * weight(both.kind, w)

    theirs = form.assemble(both.vector, carrier=both.carrier()).toarray()[np.ix_(both.velocity, both.velocity)]
    agree(both.blocks(RHO, True)[0] - both.blocks(RHO, False)[0], theirs)


def test_residual_is_the_picard_matrix_times_the_state(both):
    s = both.state
    n = 2 * both.system.space.n_velocity
    momentum, mass, _ = both.system.internal(s, RHO)
    velocity, divergence, gradient = both.blocks(RHO, False)
    level = s.p - s.p[0]
    expected = velocity @ s.u.ravel() + gradient @ level[1:]
    constant = both.system.internal(State(s.u * 0, s.p * 0 + s.p[0], s.ports), RHO)[0].ravel()
    agree(momentum.ravel() - constant, expected)
    agree(mass[1:], divergence @ s.u.ravel())
    assert len(expected) == n


def test_convection_needs_order_five_and_gets_it():
    """On straight planar cells order 5 is exact and order 4 is not."""
    mesh = box_mesh(2, 2)
    theirs = MeshTri2(mesh.points.T.copy(), mesh.cells.T.copy())

    def entries(order):
        basis = Basis(theirs, ElementVector(ElementTriP2()), intorder=order)
        field = basis.interpolate(np.sin(np.arange(basis.N)))
        form = BilinearForm(lambda u, v, w: dot(mul(grad(u), w["carrier"]), v))
        return form.assemble(basis, carrier=field).toarray()

    exact = entries(9)
    size = np.abs(exact).max()
    assert quadrature_order("planar", False) == 5
    assert np.abs(entries(5) - exact).max() < 1e-14 * size
    assert np.abs(entries(4) - exact).max() > 1e-3 * size


@pytest.mark.parametrize(("kind", "curved", "order"), [
    ("planar", False, 5), ("planar", True, 7), ("axisymmetric", False, 6), ("axisymmetric", True, 8),
])
def test_quadrature_orders(kind, curved, order):
    assert quadrature_order(kind, curved) == order


def test_straight_and_curved_cells_have_their_own_rule():
    mesh = box_mesh(4, 2, bend=lambda x, y: (x, y + np.where(x > 0.5, 0.3 * (x - 0.5) ** 2 * y, 0.0)))
    space = Space(mesh, "planar", 1.0)
    straight, curved = space.groups
    assert len(straight.index) == len(curved.index) == 8
    assert straight.phi.shape[0] < curved.phi.shape[0]
    assert sorted([*straight.index, *curved.index]) == list(range(16))
