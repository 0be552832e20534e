"""The developed velocity profile of a straight section, solved on the section's own mesh nodes."""

from __future__ import annotations

import numpy as np
from scipy.linalg import solve

from fem_flow.flow.boundary import Boundary
from fem_flow.flow.reference import line_shapes


def developed_profile(port: Boundary, flow: float, wall_velocity: dict[int, float]) -> np.ndarray:
    """Nodal velocity through a section in fully developed flow, for a flow and given wall velocities.

    Solves ``-(1/w) d/ds (w dv/ds) = G`` (w = 1 in the plane, r in axisymmetric flow) for a Newtonian fluid by the same
    quadratic elements as the flow, with the pressure gradient G chosen such that the discrete flux is ``flow``. Plane and
    pipe Poiseuille profiles are exact; an end that is not in ``wall_velocity`` (axis, symmetry, slip) has zero shear.

    Parameters
    ----------
    port : the section
    flow : scaled flux wanted, in the direction counted positive
    wall_velocity : end node -> velocity of the wall that meets the section there, same direction

    Returns
    -------
    (n_nodes,) : nodal values, zero away from the section
    """
    carried, driven, load = _parts(port, wall_velocity)
    profile = np.zeros(port.space.n_velocity)
    profile[port.nodes] = carried + driven * (flow - load @ carried) / (load @ driven)
    return profile


def developed_gradient(port: Boundary, flow: float, wall_velocity: dict[int, float]) -> float:
    """Pressure gradient -dp/ds / mu of the developed flow that `developed_profile` describes (scaled); 0 without walls."""
    carried, driven, load = _parts(port, wall_velocity)
    return float((flow - load @ carried) / (load @ driven)) if wall_velocity else 0.0


def _parts(port, wall_velocity):
    """Nodal profile carried by the walls, that of a unit pressure gradient, and the flux weights, on the port's nodes."""
    number = {int(node): i for i, node in enumerate(port.nodes)}
    local = np.vectorize(number.__getitem__)(port.edges)
    n = len(port.nodes)
    stiffness, load = np.zeros((n, n)), np.zeros(n)
    slopes = _slopes(port)
    for edge, w, d in zip(local, port.w, slopes, strict=True):
        stiffness[np.ix_(edge, edge)] += d.T @ (w[:, None] * d)
        load[edge] += w @ port.shapes
    if not wall_velocity:
        return np.zeros(n), np.ones(n), load
    fixed = np.array([number[node] for node in wall_velocity], dtype=int)
    free = np.setdiff1d(np.arange(n), fixed)
    driven, carried = np.zeros(n), np.zeros(n)
    carried[fixed] = list(wall_velocity.values())
    inner = stiffness[np.ix_(free, free)]
    driven[free] = solve(inner, load[free], assume_a="sym")
    carried[free] = solve(inner, -stiffness[np.ix_(free, fixed)] @ carried[fixed], assume_a="sym")
    return carried, driven, load


def kinetic_coefficient(port: Boundary, profile: np.ndarray) -> float:
    """int v^3 / (V^2 Q) of a nodal profile: 54/35 in a slot, 2 in a pipe."""
    v = port.at_points(profile)
    flow = (port.w * v).sum()
    return float((port.w * v**3).sum() / (flow / port.area) ** 2 / flow)


def _slopes(port):
    _, gauss, _, slopes = line_shapes()
    return slopes[None] * (gauss / port.ds)[:, :, None]
