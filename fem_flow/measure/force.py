"""What the fluid does to a wall: force with its pressure and viscous parts, torque."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.flow.sections import mirrors
from fem_flow.flow.solution import Solution
from fem_flow.measure.number import Number, number
from fem_flow.measure.rim import rim_of
from fem_flow.measure.singular import flaw_of


def wall_force(solution: Solution, name: str) -> tuple[np.ndarray, np.ndarray]:
    """Total force and its pressure part on a wall of the whole part, each (2,), N, pressure counted from ambient.

    The total comes from the reaction (variationally consistent, twice the order of integrated stresses), the pressure part from
    the integral of p n; the viscous part is their difference. In axisymmetric flow only the axial component has a meaning.
    """
    s, wall, rim = solution.scales, solution.boundaries[name], rim_of(solution)
    closure = np.array([(wall.w * wall.normal[..., k]).sum() for k in (0, 1)])
    total = -rim.share(rim.of(name)).sum(axis=1) * s.force + s.level * s.area * closure
    p = wall.pressure(solution.state.p) * s.pressure + s.level
    pressure = np.array([(wall.w * p * wall.normal[..., k]).sum() for k in (0, 1)]) * s.area
    return _of_whole_part(solution, total), _of_whole_part(solution, pressure)


def _of_whole_part(solution, force):
    """Mean of a force and its mirror images; the scales count them already."""
    for _, normal in mirrors(solution.mesh):
        force = force - (force @ normal) * normal
    return force


def wall_torque(solution: Solution, name: str) -> float:
    """Torque on a wall about the origin of the drawing, N m, anticlockwise; planar parts."""
    s, wall, rim = solution.scales, solution.boundaries[name], rim_of(solution)
    x, y = solution.space.points.T
    share = -rim.share(rim.of(name)) * s.force
    arm = wall.x[..., 0] * wall.normal[..., 1] - wall.x[..., 1] * wall.normal[..., 0]
    torque = (float((x * share[1] - y * share[0]).sum()) + s.level * s.area * float((wall.w * arm).sum())) * s.length
    closure = np.array([(wall.w * wall.normal[..., k]).sum() for k in (0, 1)])
    force = share.sum(axis=1) + s.level * s.area * closure
    for point, normal in mirrors(solution.mesh):  # the image of a torque turns the other way, about the image of the origin
        image = force - 2 * (force @ normal) * normal
        offset = 2 * (point @ normal) * normal
        torque = 0.5 * float(offset[0] * image[1] - offset[1] * image[0])
        force = 0.5 * (force + image)
    return torque


def measure(solution: Solution) -> Iterator[Number]:
    """Forces on every wall; torque in the plane. Axisymmetric flow without swirl has no torque and no lateral force."""
    planar = solution.case.kind == "planar"
    for name in solution.mesh.names("wall"):
        flaw = flaw_of(solution, name)
        why = f"the force has no limit: {flaw.says}" if flaw is not None and flaw.jump else None
        total, pressure = wall_force(solution, name)
        for k, axis in enumerate("xy" if planar else "x"):
            parts = {"": total[k], "_pressure": pressure[k], "_viscous": total[k] - pressure[k]}
            for part, value in parts.items():
                yield number(f"force_{axis}{part}", (name,), np.nan if why else value, why)
        if planar:
            yield number("torque", (name,), np.nan if why else wall_torque(solution, name), why)
