"""What is known at a port, as algebra that couples to the flow. A new port condition is one class and one entry in LAWS.

The contract of a law (all values scaled):

1. ``essential`` is True where the law imposes the velocity at the port; ``flow`` is then the flow into the passage.
2. otherwise the port carries one uniform pressure. ``known`` gives it, or is None where it is an unknown of the system.
3. an unknown port pressure P has one equation: ``equation(port, u, P, rho, mu)`` returns its residual and its derivatives by
   the nodal velocity (2, n_nodes) and by P.
4. ``backflow`` tells whether the term for reverse flow acts where the net flow leaves.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fem_flow.flow.boundary import Boundary


@dataclass(frozen=True)
class FlowLaw:
    """A given flow into the passage with the developed profile of the section."""

    flow: float
    essential = True
    known = None
    backflow = False


@dataclass(frozen=True)
class ClosedLaw:
    """A port shut like a wall at rest."""

    flow = 0.0
    essential = True
    known = None
    backflow = False


@dataclass(frozen=True)
class StaticPressureLaw:
    """A uniform static pressure over the section."""

    known: float
    essential = False
    backflow = True


@dataclass(frozen=True)
class TotalPressureLaw:
    """A reservoir of total pressure: inflow has p = p_t - alpha rho V^2 / 2, a leaving jet loses its head (p = p_t).

    alpha is that of the current profile above Re = 2, of the developed profile below Re = 1, blended between; so the
    condition passes smoothly through Q = 0 and has no false solution there.
    """

    total: float
    diameter: float
    developed_alpha: float
    essential = False
    known = None
    backflow = False

    def equation(self, port: Boundary, u: np.ndarray, pressure: float, rho: float, mu: float):
        """Residual of P + kinetic(u) - p_t, its derivative by u (2, n_nodes) and by P."""
        inward = -port.normal_velocity(u)
        flow = float((port.w * inward).sum())
        if flow <= 0.0 or rho == 0.0:
            return pressure - self.total, np.zeros_like(u), 1.0
        mean = flow / port.area
        reynolds = rho * mean * self.diameter / mu
        blend = min(max(2.0 - reynolds, 0.0), 1.0)
        cube = float((port.w * inward**3).sum())
        developed = self.developed_alpha * mean**2
        kinetic = 0.5 * rho * ((1 - blend) * cube / flow + blend * developed)
        d_blend = -rho * self.diameter / mu / port.area if 1.0 < reynolds < 2.0 else 0.0
        d_flow = 0.5 * rho * ((blend - 1) * cube / flow**2 + blend * 2 * developed / flow + d_blend * (developed - cube / flow))
        density = d_flow + 0.5 * rho * (1 - blend) * 3 * inward**2 / flow
        derivative = -np.stack([port.load(density * port.normal[..., 0]), port.load(density * port.normal[..., 1])])
        return pressure + kinetic - self.total, derivative, 1.0
