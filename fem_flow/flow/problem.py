"""The door between SI and scaled variables: a mesh and a checked case in, a solution out."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from fem_flow.case.resolved import PortCondition, ResolvedCase, WallCondition
from fem_flow.errors import CaseError, GeometryError, NoSteadySolution
from fem_flow.flow.boundary import Boundary
from fem_flow.flow.conditions import fix_velocities
from fem_flow.flow.laws import ClosedLaw, FlowLaw, StaticPressureLaw, TotalPressureLaw
from fem_flow.flow.linear import Factorization, LinearSolveFailed
from fem_flow.flow.profile import developed_profile, kinetic_coefficient
from fem_flow.flow.sections import flow_factor, hydraulic_diameter, is_straight, mirrors
from fem_flow.flow.solution import Scales, Solution
from fem_flow.flow.space import Space
from fem_flow.flow.steer import NotConverged, steady
from fem_flow.flow.system import State, System
from fem_flow.part.mesh import MeshData


@dataclass(frozen=True)
class _Port:
    boundary: Boundary
    diameter: float
    area: float


def solve(
    mesh: MeshData,
    case: ResolvedCase,
    start: Solution | None = None,
    progress: Callable[[str], None] | None = None,
    extra_order: int = 0,
) -> Solution:
    """Solve the steady flow of a case on a mesh.

    Parameters
    ----------
    start : a solution on another mesh of the same part or of a neighbouring case, to begin from
    extra_order : raises every cell quadrature, to show that it does not matter

    Raises
    ------
    CaseError : a wall cannot slide along itself, or flows do not add up
    GeometryError : a port is not straight
    NoSteadySolution : with what was tried and what to try next
    """
    clock = time.perf_counter()
    length = _length(mesh)
    space = Space(mesh, case.kind, length, extra_order)
    boundaries = {name: Boundary(space, name, edges) for name, edges in mesh.boundaries.items()}
    sections = {name: Boundary(space, name, edges) for name, edges in mesh.sections.items()}
    ports = _ports(mesh, case, boundaries)
    scales = _scales(case, ports, length, mesh)
    solution = _solve(mesh, case, space, boundaries, sections, ports, scales, start, progress)
    better = _corrected(scales, solution, ports) if start is None and case.inertia and _pressure_driven(case) else None
    if better is not None:
        first, solution = solution, _solve(mesh, case, space, boundaries, sections, ports, better, solution, progress)
        solution = replace(solution, history=first.history + solution.history, counts=first.counts + solution.counts)
    factorise = solution.counts.seconds
    solution.seconds.update(assemble=time.perf_counter() - clock - factorise, factorise=factorise)
    return solution


def _solve(mesh, case, space, boundaries, sections, ports, scales, start, progress):
    walls = {name: case.walls.get(name, WallCondition()) for name in mesh.names("wall")}
    holding = [boundaries[name] for name, wall in walls.items() if wall.what != "slip"]
    laws = {name: _law(case.ports[name], ports[name], scales, case.inertia, holding) for name in ports}
    closed = [name for name, law in laws.items() if isinstance(law, ClosedLaw)]
    slip = [name for name, wall in walls.items() if wall.what == "slip"]
    sliding = {name: wall.value / scales.velocity for name, wall in walls.items() if wall.what == "sliding" and wall.value != 0}
    fixed = fix_velocities(
        boundaries,
        resting=[name for name in walls if name not in slip and name not in sliding] + closed,
        sliding=sliding,
        flows={name: law.flow for name, law in laws.items() if isinstance(law, FlowLaw)},
        normal_zero=slip + [n for n, role in mesh.roles.items() if role in ("axis", "symmetry")],
        tangent_zero=[name for name, law in laws.items() if not law.essential],
    )
    system = System(space, boundaries, laws, fixed, scales.mu, scales.rho if case.inertia else 0.0)
    if system.level_is_free:
        _refuse_net_flow(system)
    first = None if start is None else _transferred(start, system, scales)
    with Factorization(system.blocks) as solver:
        try:
            state, history = steady(system, solver, first, progress)
        except NotConverged as error:
            raise _no_steady_solution(error, case) from error
        except LinearSolveFailed as error:
            raise NoSteadySolution(str(error), reason="linear_solve_failed") from error
    if system.level_is_free:
        state = State(state.u, state.p - mean_pressure(space, state.p), state.ports)
    diameters = {name: port.diameter for name, port in ports.items()}
    for name, piece in sections.items():
        diameters[name] = hydraulic_diameter(piece, _nodes_on("symmetry", mesh, boundaries))
    return Solution(case, mesh, space, boundaries, sections, diameters, system, state, scales, history, solver.counts)


def _refuse_net_flow(system):
    """Where every flow is given, what enters has to leave: nothing else could take up the difference."""
    u = system.start().u
    speed = np.hypot(*u)
    net = sum(piece.flux(u) for piece in system.boundaries.values())
    if abs(net) > 1e-9 * sum(float((piece.w * np.abs(piece.at_points(speed))).sum()) for piece in system.boundaries.values()):
        raise CaseError(
            "the flows given at the ports do not add up to zero and no port has a pressure; give one port a pressure"
            " instead of its flow",
            reason="unbalanced_flows",
        )


def mean_pressure(space: Space, p: np.ndarray) -> float:
    """Volume mean of a pressure field."""
    total = sum(float((g.w * (p[g.corners] @ g.psi.T)).sum()) for g in space.groups)
    return total / sum(float(g.w.sum()) for g in space.groups)


def _nodes_on(role, mesh, boundaries):
    """Nodes of all boundaries of one role."""
    found = [boundaries[n].nodes for n in mesh.names(role)]
    return np.concatenate(found) if found else np.zeros(0, dtype=int)


def _length(mesh):
    """About the smallest hydraulic diameter of the ports (twice the width drawn); without ports the narrowest gap."""
    names = mesh.names("port")
    if not names:
        return mesh.narrowest_gap
    return min(2 * np.linalg.norm(np.diff(mesh.points[mesh.boundaries[n][:, :2]], axis=1), axis=2).sum() for n in names)


def _ports(mesh, case, boundaries):
    symmetry = _nodes_on("symmetry", mesh, boundaries)
    ports = {}
    for name in case.ports:
        boundary = boundaries[name]
        if not is_straight(boundary):
            raise GeometryError(
                f"the port {name} is not one straight edge; draw it straight, across the passage",
                reason="bent_port", details={"port": name},
            )
        ports[name] = _Port(boundary, hydraulic_diameter(boundary, symmetry), boundary.area)
    return ports


def _pressure_driven(case):
    return not any(c.what in ("flow", "velocity") and c.value != 0.0 for c in case.ports.values())


def _scales(case, ports, length, mesh):
    fluid = case.fluid
    factor = flow_factor(case.kind, case.depth, length, 2 ** len(mirrors(mesh)))
    sliding = max((abs(c.value) for c in case.walls.values() if c.what == "sliding"), default=0.0)
    pressures = [c.value for c in case.ports.values() if c.what.endswith("pressure")]
    velocity = sliding
    if ports and not _pressure_driven(case):
        smallest = min(ports.values(), key=lambda p: p.diameter)
        flow = max(
            abs(c.value) if c.what == "flow" else abs(c.value) * ports[n].area * factor
            for n, c in case.ports.items()
            if c.what in ("flow", "velocity")
        )
        velocity = max(velocity, flow / (smallest.area * factor))
    elif pressures:
        reach = float(np.linalg.norm(np.ptp(mesh.points, axis=0)))
        velocity = max(velocity, (max(pressures) - min(pressures)) * length**2 / (48 * fluid.viscosity * reach))
    if velocity == 0.0:
        velocity = fluid.viscosity / (fluid.density * length)
    return Scales.make(
        length, velocity, fluid.viscosity, fluid.density, case.inertia, factor, min(pressures, default=0.0)
    )


def _corrected(scales, solution, ports):
    """Scales with the largest mean velocity that the first solution has at a port, where that is far from the guess."""
    u = solution.state.u
    ratio = max((abs(port.boundary.flux(u)) / port.area for port in ports.values()), default=0.0)
    if 0.1 < ratio < 10 or ratio < 1e-12:
        return None
    s = scales
    return Scales.make(s.length, s.velocity * ratio, s.si_viscosity, s.si_density, True, s.flow_factor, s.level)


def _law(condition: PortCondition, port: _Port, scales: Scales, inertia: bool, walls: list[Boundary]):
    if condition.what == "closed":
        return ClosedLaw()
    if condition.what == "flow":
        return FlowLaw(condition.value / scales.flow)
    if condition.what == "velocity":
        return FlowLaw(condition.value / scales.velocity * port.area)
    level = (condition.value - scales.level) / scales.pressure
    if condition.what == "static_pressure" or not inertia:
        return StaticPressureLaw(level)
    if condition.what == "total_pressure":
        ends = _wall_ends(port.boundary, walls)
        alpha = kinetic_coefficient(port.boundary, developed_profile(port.boundary, 1.0, ends))
        return TotalPressureLaw(level, port.diameter, alpha)
    raise CaseError(f"a port cannot be given {condition.what}", reason="unknown_condition")


def _wall_ends(port, walls):
    """Nodes of a port on walls that hold the fluid, as resting walls: what alpha of the developed profile needs."""
    held = np.concatenate([wall.nodes for wall in walls]) if walls else np.zeros(0, dtype=int)
    return {int(node): 0.0 for node in np.intersect1d(port.nodes, held)}


def _transferred(start: Solution, system: System, scales: Scales) -> State:
    points = system.space.points * scales.length
    velocity, pressure = start.at_nodes_of(points, system.space.cells is start.space.cells)
    levels = np.array([_level_at(start, name, scales.level) for name in system.unknown_ports])
    return State(
        velocity / scales.velocity,
        (pressure[system.space.corner_nodes] - scales.level) / scales.pressure,
        (levels - scales.level) / scales.pressure,
    )


def _level_at(start, name, default):
    """Mean pressure (Pa) at a port of another solution, whatever was given there."""
    if name not in start.boundaries:
        return default
    port = start.boundaries[name]
    mean = float((port.w * port.pressure(start.state.p)).sum()) / port.area
    return start.scales.level + mean * start.scales.pressure


def _no_steady_solution(error: NotConverged, case: ResolvedCase) -> NoSteadySolution:
    what, smaller, lower = "flow", "flow rates", "flow rate"
    if not any(c.what != "closed" for c in case.ports.values()):
        what, smaller, lower = "wall speed", "speeds", "speed of the walls"
    elif _pressure_driven(case):
        what, smaller, lower = "pressures", "pressures", "pressure difference"
    if error.share > 0:
        reached = f"a steady flow was found up to {100 * error.share:.1f} % of the {what} asked for, none beyond"
    else:
        reached = "no steady flow was found"
    return NoSteadySolution(
        f"{reached}: Picard and Newton steps from creeping flow and from smaller {smaller}"
        f" were tried; the real flow is probably unsteady there. Lower the {lower}, take a thicker fluid, or ask for a finer"
        " mesh with [mesh] size",
        reason="no_steady_solution",
        details={"share_of_flow": error.share, "iterations": error.history.iterations},
    )
