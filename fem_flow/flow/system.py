"""The discrete equations of one mesh: residual and matrix with a pattern that never changes.

Unknowns: velocity components in the nodal frames, pressures, and one pressure for every port whose law leaves it unknown.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import scipy.sparse as sparse

from fem_flow.flow import kernels
from fem_flow.flow.boundary import Boundary
from fem_flow.flow.conditions import Fixed
from fem_flow.flow.pattern import Pattern, border_dofs
from fem_flow.flow.space import Space


@dataclass(frozen=True)
class State:
    """Scaled fields: velocity ``u`` (2, n_nodes), pressure ``p`` (n_pressure,), unknown port pressures ``ports`` (k,)."""

    u: np.ndarray
    p: np.ndarray
    ports: np.ndarray


class System:
    """Residual and matrix of the scaled equations.

    Parameters
    ----------
    space, boundaries : the mesh
    laws : port name -> law (see `fem_flow.flow.laws`)
    fixed : essential conditions
    mu, rho : scaled viscosity and density
    """

    def __init__(self, space: Space, boundaries: dict[str, Boundary], laws: dict, fixed: Fixed, mu: float, rho: float):
        self.space, self.boundaries, self.laws, self.fixed = space, boundaries, laws, fixed
        self.mu, self.rho = mu, rho
        self.open_ports = [name for name, law in laws.items() if not law.essential]
        self.unknown_ports = [name for name in self.open_ports if laws[name].known is None]
        self.level_is_free = not self.open_ports
        self.normal_loads = {name: boundaries[name].normal_load() for name in self.open_ports}
        self._number()

    def start(self) -> State:
        """Zero flow with the essential conditions set."""
        return self.impose(
            State(np.zeros((2, self.space.n_velocity)), np.zeros(self.space.n_pressure), np.zeros(len(self.unknown_ports)))
        )

    def impose(self, state: State) -> State:
        """The state with the fixed components at their values."""
        frames = self.fixed.frames
        u = frames.to_cartesian(np.where(self.fixed.mask, self.fixed.values, frames.to_frame(state.u)))
        return State(u, state.p, state.ports)

    def internal(self, state: State, rho: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Stress side of the equations.

        Returns
        -------
        (2, n_nodes) : int 2 mu D:D(phi) + ..., which is int t.phi on the boundary
        (n_pressure,) : -int q div u
        (n_pressure,) : int q |grad u|, the size that the former is judged against
        """
        n, m = self.space.n_velocity, self.space.n_pressure
        momentum, mass, size = np.zeros((2, n)), np.zeros(m), np.zeros(m)
        for g in self.space.groups:
            s = kernels.states(g, state.u, state.p)
            for k, f in enumerate(kernels.momentum_residual(g, s, self.mu, rho)):
                momentum[k] += np.bincount(g.nodes.ravel(), weights=f.ravel(), minlength=n)
            for target, f in zip((mass, size), kernels.continuity_residual(g, s), strict=True):
                target += np.bincount(g.corners.ravel(), weights=f.ravel(), minlength=m)
        return momentum, mass, size

    def port_pressure(self, state: State, name: str) -> float:
        """The uniform pressure imposed or found at an open port."""
        law = self.laws[name]
        return law.known if law.known is not None else float(state.ports[self.unknown_ports.index(name)])

    def loads(self, state: State, rho: float) -> np.ndarray:
        """(2, n_nodes): minus the tractions given at open ports, tested."""
        total = np.zeros((2, self.space.n_velocity))
        for name in self.open_ports:
            port = self.boundaries[name]
            density = self.radial_stress(port) * port.normal_velocity(state.u) + self._backflow(name, state.u, rho)[0]
            total += self.port_pressure(state, name) * self.normal_loads[name]
            total += np.stack([port.load(density * port.normal[..., k]) for k in (0, 1)])
        return total

    def residual(self, state: State, rho: float) -> tuple[np.ndarray, float]:
        """Residual of the free unknowns, and its size relative to what balances in it.

        The relative size is the largest of three: momentum against the forces of the whole boundary, continuity against the
        rates of deformation, port equations against the pressures. None of these counts as less than `_least_sizes`.
        """
        stress, mass, flows = self.internal(state, rho)
        momentum = stress + self.loads(state, rho)
        rows = np.array([
            self.laws[name].equation(self.boundaries[name], state.u, state.ports[k], rho, self.mu)[0]
            for k, name in enumerate(self.unknown_ports)
        ])
        full = np.concatenate([self.fixed.frames.to_frame(momentum).ravel(), mass, rows])[self.free]
        sizes = np.linalg.norm(stress), np.linalg.norm(flows), np.linalg.norm(state.p) + np.linalg.norm(state.ports)
        parts = (np.linalg.norm(full[block]) for block in self.blocks)
        pairs = zip(parts, np.maximum(sizes, self._least_sizes(state, rho)), strict=True)
        return full, max((float(r / s) if s else np.inf) if r else 0.0 for r, s in pairs)

    def _least_sizes(self, state, rho):
        """A thousandth of the forces, flows and pressures that the speed can give: plug flow has none of its own."""
        speed = np.hypot(*state.u).max()
        pressure = self.mu * speed + rho * speed**2
        volumes, surface = self._geometry
        return 1e-3 * np.array([pressure * surface, speed * volumes, pressure])

    @cached_property
    def _geometry(self):
        """Norms of int q over the pressure functions and of int n phi over the whole boundary."""
        m = self.space.n_pressure
        volumes = sum(np.bincount(g.corners.ravel(), weights=(g.w @ g.psi).ravel(), minlength=m) for g in self.space.groups)
        return np.linalg.norm(volumes), np.linalg.norm(sum(piece.normal_load() for piece in self.boundaries.values()))

    def matrix(self, state: State, rho: float, newton: bool) -> sparse.csr_matrix:
        """Derivative of the residual (Newton) or its Picard form with the carrier velocity frozen."""
        data = self._constant.copy()
        if rho > 0.0:
            for k, g in enumerate(self.space.groups):
                c = kernels.convection(g, state.u, rho)
                if newton:
                    xx, xy, yx, yy = kernels.convection_newton(g, state.u, rho)
                    blocks = _by_component(c + xx, xy, yx, c + yy)
                else:
                    blocks = _by_component(c, 0.0, 0.0, c)
                self.pattern.add_velocity(data, k, self._turned(g, blocks))
        for name in self.open_ports:
            slope = self._backflow(name, state.u, rho)[1]
            if slope.any():
                self._add_edge_blocks(data, name, slope)
        for k, name in enumerate(self.unknown_ports):
            law, port = self.laws[name], self.boundaries[name]
            _, by_velocity, by_pressure = law.equation(port, state.u, state.ports[k], rho, self.mu)
            row, column = (
                self.fixed.frames.to_frame(v).ravel()[border_dofs(port)] for v in (by_velocity, self.normal_loads[name])
            )
            self.pattern.add_border(data, name, row, column, by_pressure)
        return self.pattern.matrix(data)

    def advance(self, state: State, step: np.ndarray, share: float = 1.0) -> State:
        """The state moved by ``share`` of a step of the free unknowns."""
        full = np.zeros(self.size)
        full[self.free] = share * step
        n, m = self.space.n_velocity, self.space.n_pressure
        du = self.fixed.frames.to_cartesian(full[: 2 * n].reshape(2, n))
        return State(state.u + du, state.p + full[2 * n : 2 * n + m], state.ports + full[2 * n + m :])

    def _number(self):
        n, m, k = self.space.n_velocity, self.space.n_pressure, len(self.unknown_ports)
        self.size = 2 * n + m + k
        keep = np.concatenate([~self.fixed.mask.ravel(), np.ones(m + k, dtype=bool)])
        if self.level_is_free:
            keep[2 * n] = False
        self.free = np.flatnonzero(keep)
        self.position = np.full(self.size, -1, dtype=np.int64)
        self.position[self.free] = np.arange(len(self.free))
        momentum = int((~self.fixed.mask).sum())
        self.blocks = (slice(0, momentum), slice(momentum, len(self.free) - k), slice(len(self.free) - k, None))

    @cached_property
    def pattern(self) -> Pattern:
        """Where the blocks go; made when a matrix is first asked for and not pickled."""
        ports = [[self.boundaries[name] for name in names] for names in (self.open_ports, self.unknown_ports)]
        return Pattern(self.space, self.position, *ports)

    @cached_property
    def _constant(self):
        """Values of the part of the matrix that no step changes: viscosity, divergence, radial outflow."""
        data = self.pattern.zeros()
        frames = self.fixed.frames
        for k, g in enumerate(self.space.groups):
            self.pattern.add_velocity(data, k, self._turned(g, _by_component(*kernels.viscous(g, self.mu))))
            bx, by = kernels.divergence(g)
            if len(frames.turned):
                c, s = frames.cos[g.nodes][:, :, None], frames.sin[g.nodes][:, :, None]
                bx, by = c * bx + s * by, c * by - s * bx
            self.pattern.add_pressure(data, k, np.stack([bx, by], axis=1))
        for name in self.open_ports:
            self._add_edge_blocks(data, name, self.radial_stress(self.boundaries[name]))
        return data

    def __getstate__(self):
        return {key: value for key, value in self.__dict__.items() if key not in ("pattern", "_constant")}

    def _turned(self, g, blocks):
        """Blocks (E, 2, 6, 2, 6) from x-y components to the nodal frames, on both sides."""
        frames = self.fixed.frames
        hit = np.isin(g.nodes, frames.turned).any(axis=1) if len(frames.turned) else np.zeros(len(g.nodes), dtype=bool)
        if hit.any():
            c, s = frames.cos[g.nodes[hit]], frames.sin[g.nodes[hit]]
            turn = np.stack([np.stack([c, s], axis=1), np.stack([-s, c], axis=1)], axis=1)
            blocks[hit] = np.einsum("eaci,ecidj,ebdj->eaibj", turn, blocks[hit], turn, optimize=True)
        return blocks

    def _add_edge_blocks(self, data, name, density):
        """Add int density (du.n)(phi.n) along a port; ``density`` (m, q)."""
        port, frames = self.boundaries[name], self.fixed.frames
        block = np.einsum("eq,qi,qj->eij", port.w * density, port.shapes, port.shapes)
        normal = port.normal[:, :1, :].transpose(0, 2, 1)
        c, s = frames.cos[port.edges], frames.sin[port.edges]
        n = np.stack([c * normal[:, 0] + s * normal[:, 1], c * normal[:, 1] - s * normal[:, 0]], axis=1)
        self.pattern.add_edges(data, name, np.einsum("eai,eij,ebj->eaibj", n, block, n))

    def radial_stress(self, port):
        """2 mu n_r / r: the normal viscous stress of radial outflow, which a port pressure does not hold."""
        if not self.space.axisymmetric or np.abs(port.normal[..., 1]).max() < 1e-12:
            return np.zeros_like(port.w)
        return 2 * self.mu * port.normal[..., 1] / port.x[..., 1]

    def _backflow(self, name, u, rho):
        """Minus the traction rho/2 (u.n)_- (u.n) where fluid comes back through an outlet, and its derivative."""
        port = self.boundaries[name]
        speed = port.normal_velocity(u)
        if rho == 0.0 or not self.laws[name].backflow or (port.w * speed).sum() <= 0.0:
            return np.zeros_like(speed), np.zeros_like(speed)
        back = np.minimum(speed, 0.0)
        return -0.5 * rho * back * speed, -rho * back


def _by_component(xx, xy, yx, yy):
    """Blocks (E, 6, 6) of each pair of components as one array (E, 2, 6, 2, 6)."""
    blocks = np.empty((len(xx), 2, 6, 2, 6))
    for row, pair in enumerate(((xx, xy), (yx, yy))):
        for column, block in enumerate(pair):
            blocks[:, row, :, column] = block
    return blocks
