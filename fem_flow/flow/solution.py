"""A converged flow: scaled arrays inside, SI through its methods."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from fem_flow.case.resolved import ResolvedCase
from fem_flow.flow.boundary import Boundary
from fem_flow.flow.finder import Finder
from fem_flow.flow.linear import Counts
from fem_flow.flow.space import Space
from fem_flow.flow.steer import History
from fem_flow.flow.system import State, System
from fem_flow.part.mesh import MeshData


@dataclass(frozen=True)
class Scales:
    """What one scaled unit is in SI.

    ``pressure`` = mu V/L + rho V^2 (without inertia mu V/L), so that the scaled ``mu`` and ``rho`` add up to 1. Pressures
    are counted from ``level``, Pa: 100 bar of supply must not drown the drop in round-off.
    """

    length: float
    velocity: float
    pressure: float
    mu: float
    rho: float
    si_viscosity: float
    si_density: float
    flow_factor: float
    level: float = 0.0

    @classmethod
    def make(
        cls, length: float, velocity: float, viscosity: float, density: float, inertia: bool, flow_factor: float, level: float
    ) -> Scales:
        viscous = viscosity * velocity / length
        inertial = density * velocity**2 if inertia else 0.0
        pressure = viscous + inertial
        return cls(length, velocity, pressure, viscous / pressure, inertial / pressure, viscosity, density, flow_factor, level)

    @property
    def flow(self) -> float:
        """m^3/s of the whole part for a scaled flux of 1."""
        return self.flow_factor * self.velocity

    @property
    def force(self) -> float:
        """N of the whole part for a scaled force of 1."""
        return self.flow_factor * self.pressure

    @property
    def area(self) -> float:
        """m^2 of the whole part for a scaled area of 1."""
        return self.flow_factor

    @property
    def power(self) -> float:
        """W of the whole part for a scaled power of 1."""
        return self.flow * self.pressure


@dataclass
class Solution:
    """Fields of one mesh with everything the figures need.

    Attributes
    ----------
    case, mesh : what was solved
    space, boundaries, sections : scaled geometry; ``sections`` are interior curves
    diameters : port or section -> scaled hydraulic diameter
    system, state, scales : the discrete equations and their solution
    history, counts : how it was reached
    seconds : time by stage
    """

    case: ResolvedCase
    mesh: MeshData
    space: Space
    boundaries: dict[str, Boundary]
    sections: dict[str, Boundary]
    diameters: dict[str, float]
    system: System
    state: State
    scales: Scales
    history: History
    counts: Counts
    seconds: dict[str, float] = field(default_factory=dict)

    @property
    def rho(self) -> float:
        """Scaled density as the equations see it (0 without inertia)."""
        return self.system.rho

    @property
    def unknowns(self) -> int:
        return len(self.system.free)

    def port_pressure(self, name: str) -> float:
        """Uniform pressure of an open port, Pa."""
        return self.scales.level + self.system.port_pressure(self.state, name) * self.scales.pressure

    def piece(self, name: str) -> Boundary:
        """A port, wall or section by name."""
        return self.sections[name] if name in self.sections else self.boundaries[name]

    def reaction(self) -> np.ndarray:
        """(2, n_nodes) scaled: int t.phi over the boundary, t the stress on the outward normal; zero inside."""
        return self.system.internal(self.state, self.rho)[0]

    def nodal_pressure(self) -> np.ndarray:
        """(n_nodes,) scaled: P1 pressure on all nodes."""
        p = np.zeros(self.space.n_velocity)
        corners = self.space.cells[:, :3]
        values = self.state.p[self.space.pressure_of_node[corners]]
        p[corners] = values
        p[self.space.cells[:, 3:]] = 0.5 * (values + np.roll(values, -1, axis=1))
        return p

    def __getstate__(self):
        return {key: value for key, value in self.__dict__.items() if not key.startswith("_")}

    def finder(self) -> Finder:
        """Point location on the curved mesh, built on first use."""
        if "_finder" not in self.__dict__:
            self.__dict__["_finder"] = Finder(self.space.points, self.space.cells)
        return self.__dict__["_finder"]

    def velocity(self, points: np.ndarray) -> np.ndarray:
        """Velocity (2, n), m/s, at points (n, 2), m; NaN outside the fluid."""
        cells, shapes, inside = self.finder().locate(np.atleast_2d(points) / self.space.length)
        values = np.einsum("cnk,nk->cn", self.state.u[:, self.space.cells[cells]], shapes) * self.scales.velocity
        return np.where(inside, values, np.nan)

    def pressure(self, points: np.ndarray) -> np.ndarray:
        """Pressure (n,), Pa, at points (n, 2), m; NaN outside the fluid."""
        cells, _, inside, linear = self.finder().locate(np.atleast_2d(points) / self.space.length, with_linear=True)
        corners = self.space.pressure_of_node[self.space.cells[cells][:, :3]]
        values = np.einsum("nk,nk->n", self.state.p[corners], linear) * self.scales.pressure + self.scales.level
        return np.where(inside, values, np.nan)

    def at_nodes_of(self, points: np.ndarray, same_mesh: bool) -> tuple[np.ndarray, np.ndarray]:
        """Velocity (2, n) m/s and pressure (n,) Pa carried to the nodes of another mesh of the same part."""
        if same_mesh:
            return self.state.u * self.scales.velocity, self.nodal_pressure() * self.scales.pressure + self.scales.level
        cells, shapes, _, linear = self.finder().locate(points / self.space.length, with_linear=True)
        velocity = np.einsum("cnk,nk->cn", self.state.u[:, self.space.cells[cells]], shapes)
        corners = self.space.pressure_of_node[self.space.cells[cells][:, :3]]
        pressure = np.einsum("nk,nk->n", self.state.p[corners], linear)
        return velocity * self.scales.velocity, pressure * self.scales.pressure + self.scales.level
