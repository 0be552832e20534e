"""Fields on the nodes of the mesh in SI: velocity, pressure, shear rate, viscosity, stream function."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sparse

from fem_flow.flow import kernels
from fem_flow.flow.boundary import physical_gradients
from fem_flow.flow.linear import Factorization
from fem_flow.flow.nodal import NodalFields
from fem_flow.flow.reference import line_shapes, p2_gradients
from fem_flow.flow.solution import Solution
from fem_flow.measure.rim import rim_of

CELL_NODES = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [0.5, 0.0], [0.5, 0.5], [0.0, 0.5]])


def nodal_fields(solution: Solution) -> NodalFields:
    """Gather the fields of a solution for pictures, files and probes."""
    s, space = solution.scales, solution.space
    viscosity = np.full(space.n_velocity, solution.case.fluid.viscosity)
    return NodalFields(
        space.kind,
        space.points * s.length,
        space.cells,
        solution.state.u * s.velocity,
        solution.nodal_pressure() * s.pressure + s.level,
        _shear_rate(solution) * s.velocity / s.length,
        viscosity,
        _stream(solution) * (s.velocity * s.length if space.kind == "planar" else 2 * np.pi * s.velocity * s.length**2),
    )


def _shear_rate(solution):
    """sqrt(2 D:D) at the nodes, averaged over the cells that meet there."""
    space, u = solution.space, solution.state.u
    slopes = physical_gradients(space.points[space.cells], p2_gradients(CELL_NODES))
    grad = np.einsum("cen,eqnx->eqcx", u[:, space.cells], slopes)
    square = 2 * grad[..., 0, 0] ** 2 + 2 * grad[..., 1, 1] ** 2 + (grad[..., 0, 1] + grad[..., 1, 0]) ** 2
    if space.axisymmetric:
        y, v = space.points[space.cells][..., 1], u[1][space.cells]
        hoop = np.divide(v, y, out=grad[..., 1, 1].copy(), where=y > 0)
        square = square + 2 * hoop**2
    nodes, n = space.cells.ravel(), space.n_velocity
    return np.bincount(nodes, weights=np.sqrt(square).ravel(), minlength=n) / np.maximum(np.bincount(nodes, minlength=n), 1)


def _stream(solution):
    """psi with u_x = d psi/dy, u_y = -d psi/dx (planar); r u_x = d psi/dr, r u_r = -d psi/dx (axisymmetric).

    Solved as int grad psi.grad v = int (-u_y dv/dx + u_x dv/dy) w on P2. Along the outer boundary psi is the flow that has
    passed it, counted from its lowest point (on the axis, if there is one), so it is constant along walls; a wall around an
    island has one value, which follows. An island with ports on it would make psi many-valued; it is not meant for them.
    """
    space, n = solution.space, solution.space.n_velocity
    rows, columns, data, load = [], [], [], np.zeros(n)
    for g in space.groups:
        plain = g.w if g.r is None else g.w / g.r
        k = sum(np.matmul(np.swapaxes(d * plain[..., None], 1, 2), d) for d in (g.gx, g.gy))
        s = kernels.states(g, solution.state.u, solution.state.p)
        f = np.einsum("eq,eqi->ei", g.w * s.ux, g.gy) - np.einsum("eq,eqi->ei", g.w * s.uy, g.gx)
        load += np.bincount(g.nodes.ravel(), weights=f.ravel(), minlength=n)
        r, c = np.broadcast_arrays(g.nodes[:, :, None], g.nodes[:, None, :])
        rows.append(r.ravel())
        columns.append(c.ravel())
        data.append(k.ravel())
    matrix = sparse.csr_matrix((np.concatenate(data), (np.concatenate(rows), np.concatenate(columns))), shape=(n, n))
    fixed, values, number_of = _stream_at_boundary(solution)
    free, number_of = np.unique(number_of[~fixed], return_inverse=True)
    join = sparse.csr_matrix((np.ones(len(number_of)), (np.flatnonzero(~fixed), number_of)), shape=(n, len(free)))
    with Factorization() as solver:
        solver.factorise((join.T @ matrix @ join).tocsr())
        return values + join @ solver.solve(join.T @ (load - matrix @ values))


def _stream_at_boundary(solution):
    """Nodes of the outer boundary (n,), psi there (n,), and for every node the node it shares its value with (n,)."""
    space, rim = solution.space, rim_of(solution)
    fixed, values, same = np.zeros(space.n_velocity, dtype=bool), np.zeros(space.n_velocity), np.arange(space.n_velocity)
    half, whole = _passed(rim, solution.state.u)
    lowest = int(np.lexsort(space.points.T)[0])
    left = np.ones(len(rim.edges), dtype=bool)
    while left.any():
        loop = [int(np.flatnonzero(left)[0])]
        while rim.next[loop[-1]] != loop[0]:
            loop.append(int(rim.next[loop[-1]]))
        loop = np.array(loop)
        left[loop] = False
        edges = rim.edges[loop]
        if lowest in edges:
            begin = np.cumsum(whole[loop]) - whole[loop]
            values[edges[:, 0]], values[edges[:, 2]] = begin, begin + half[loop]
            fixed[edges[:, [0, 2]]] = True
            values[np.unique(edges)] -= values[lowest]
        elif np.abs(whole[loop]).max() < 1e-9 * max(np.abs(whole).max(), 1e-300):
            same[edges[:, [0, 2]]] = edges[0, 0]
    return fixed, values, same


def _passed(rim, u):
    """Scaled flow out of the fluid through the first half and the whole of each rim edge."""
    piece = rim.boundary
    corners, nodal = rim.solution.space.points[rim.edges], u[:, rim.edges]
    out = []
    for share in (0.5, 1.0):
        s, gauss, _, _ = line_shapes()
        s = share * s
        shapes = np.stack([(1 - s) * (1 - 2 * s), s * (2 * s - 1), 4 * s * (1 - s)], axis=1)
        slopes = np.stack([4 * s - 3, 4 * s - 1, 4 - 8 * s], axis=1)
        along = np.einsum("qi,eix->eqx", slopes, corners)
        weight = share * gauss * piece.space.measure(np.einsum("qi,eix->eqx", shapes, corners))
        velocity = np.einsum("qi,cei->ceq", shapes, nodal)
        out.append((weight * (velocity[0] * along[..., 1] - velocity[1] * along[..., 0])).sum(axis=1))
    return out
