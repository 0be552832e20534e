"""What the tests of the flow share: cases by hand, forced flows, norms, and the files of reference values."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np

from fem_flow.case.resolved import Fluid, PortCondition, ResolvedCase
from fem_flow.flow import kernels
from fem_flow.flow.boundary import Boundary
from fem_flow.flow.conditions import Fixed, Frames
from fem_flow.flow.linear import Factorization
from fem_flow.flow.problem import mean_pressure
from fem_flow.flow.space import Space
from fem_flow.flow.steer import steady
from fem_flow.flow.system import State, System
from fem_flow.part.mesh import MeshData

REFERENCE = Path(__file__).parent / "reference"


def reference(topic: str) -> dict:
    """A file of reference values."""
    return tomllib.loads((REFERENCE / f"{topic}.toml").read_text(encoding="utf-8"))


def values(topic: str, quantity: str, **at) -> dict:
    """The one entry whose quantity begins with these words, at these parameters."""
    found = [v for v in reference(topic)["values"] if v["quantity"].startswith(quantity) and v.get("at", {}) == at]
    (entry,) = found
    return entry


def flow_case(ports, kind="planar", mu=1e-3, rho=1000.0, inertia=True, walls=None, depth=1.0) -> ResolvedCase:
    """A resolved case; ``ports`` name -> (what, value)."""
    conditions = {name: PortCondition(*given) for name, given in ports.items()}
    fluid = Fluid("test fluid", rho, mu)
    depth = depth if kind == "planar" else None
    return ResolvedCase("test", {}, kind, depth, fluid, inertia, None, conditions, walls or {}, None, None, None, None, {})


class ForcedSystem(System):
    """A system with a body force: minus int f phi joins the loads."""

    def __init__(self, space, boundaries, fixed, mu, rho, force):
        super().__init__(space, boundaries, {}, fixed, mu, rho)
        self.body = np.zeros((2, space.n_velocity))
        for g in space.groups:
            f = force(*points_of(space, g))
            for k in (0, 1):
                np.add.at(self.body[k], g.nodes, -(g.w * f[k]) @ g.phi)

    def loads(self, state, rho):
        return super().loads(state, rho) + self.body


def points_of(space: Space, group) -> tuple[np.ndarray, np.ndarray]:
    """x and y (each (E, q)) of the quadrature points."""
    nodes = space.points[group.nodes]
    return nodes[..., 0] @ group.phi.T, nodes[..., 1] @ group.phi.T


def boundary_fixed(space: Space, boundaries: dict[str, Boundary], velocity, axis: tuple[str, ...] = ()) -> Fixed:
    """Nodal values of ``velocity(x, y)`` on every boundary; on the axis the radial component only."""
    n = space.n_velocity
    mask = np.zeros((2, n), dtype=bool)
    for name in axis:
        mask[1, boundaries[name].nodes] = True
    for name, piece in boundaries.items():
        if name not in axis:
            mask[:, piece.nodes] = True
    frames = Frames(np.zeros(0, dtype=int), np.ones(n), np.zeros(n))
    return Fixed(frames, mask, np.where(mask, np.stack(velocity(*space.points.T)), 0.0))


def forced_flow(mesh: MeshData, kind: str, mu: float, rho: float, velocity, force, axis=()) -> tuple[System, State]:
    """Flow with all boundary velocities given and a body force, in the units of the mesh; zero mean pressure."""
    space = Space(mesh, kind, 1.0)
    boundaries = {name: Boundary(space, name, edges) for name, edges in mesh.boundaries.items()}
    system = ForcedSystem(space, boundaries, boundary_fixed(space, boundaries, velocity, axis), mu, rho, force)
    with Factorization(system.blocks) as solver:
        state, _ = steady(system, solver)
    return system, State(state.u, state.p - mean_pressure(space, state.p), state.ports)


def errors(mesh: MeshData, kind: str, state: State, velocity, pressure) -> tuple[float, float]:
    """L2 errors of velocity and of pressure (both taken minus their means), with a finer quadrature."""
    space = Space(mesh, kind, 1.0, extra_order=4)
    wrong = volume = gap = square = 0.0
    for g in space.groups:
        s, (x, y) = kernels.states(g, state.u, state.p), points_of(space, g)
        u, v = velocity(x, y)
        wrong += (g.w * ((s.ux - u) ** 2 + (s.uy - v) ** 2)).sum()
        difference = s.p - pressure(x, y)
        volume, gap, square = volume + g.w.sum(), gap + (g.w * difference).sum(), square + (g.w * difference**2).sum()
    return float(np.sqrt(wrong)), float(np.sqrt(square - gap**2 / volume))


def fitted_order(sizes, wrong) -> float:
    """Slope of log(error) over log(size)."""
    return float(np.polyfit(np.log(sizes), np.log(wrong), 1)[0])


def assert_order(sizes, wrong, order: int) -> None:
    """The fitted order lies in [order - 0.15, order + 0.4]."""
    fitted = fitted_order(sizes, wrong)
    assert order - 0.15 <= fitted <= order + 0.4, (fitted, wrong)


def turned(degrees: float):
    """A bend that turns the plane about the origin."""
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    return lambda x, y: (c * x - s * y, s * x + c * y)


CHANNEL = {"left": ("inlet", "port"), "right": ("outlet", "port"), "bottom": ("lower", "wall"), "top": ("upper", "wall")}
PIPE = CHANNEL | {"bottom": ("axis", "axis")}
HALF = CHANNEL | {"bottom": ("middle", "symmetry")}
