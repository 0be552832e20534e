"""Small solved flows on structured meshes, for tests of figures and checks that must not depend on the mesh generator."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from meshes import box_mesh

from fem_flow.case.resolved import Fluid, PortCondition, ResolvedCase, WallCondition
from fem_flow.flow.problem import solve
from fem_flow.flow.solution import Solution
from fem_flow.measure.all import measure
from fem_flow.measure.number import Number
from fem_flow.part.mesh import MeshData

SLOT = {"left": ("inlet", "port"), "right": ("outlet", "port"), "bottom": ("low", "wall"), "top": ("high", "wall")}
PIPE = {"left": ("inlet", "port"), "right": ("outlet", "port"), "bottom": ("axis", "axis"), "top": ("bore", "wall")}
SHUT = {"left": ("left", "wall"), "right": ("right", "wall"), "bottom": ("floor", "wall"), "top": ("lid", "wall")}


def flow(value: float) -> PortCondition:
    return PortCondition("flow", value)


def static(value: float) -> PortCondition:
    return PortCondition("static_pressure", value)


def total(value: float) -> PortCondition:
    return PortCondition("total_pressure", value)


def sliding(speed: float) -> WallCondition:
    return WallCondition("sliding", speed)


SLIP = WallCondition("slip")
CLOSED = PortCondition("closed")


def case_of(
    kind: str = "planar",
    ports: dict | None = None,
    walls: dict | None = None,
    depth: float = 1.0,
    legs: dict | None = None,
    inertia: bool = True,
    ambient: float | None = None,
    title: str = "test",
    filled: dict | None = None,
    **fluid,
) -> ResolvedCase:
    """A case in SI; further keywords are those of `Fluid`."""
    liquid = Fluid(**{"name": "as given", "density": 1.0, "viscosity": 1.0, **fluid})
    return ResolvedCase(
        title,
        {},
        kind,
        depth if kind == "planar" else None,
        liquid,
        inertia,
        ambient,
        ports or {},
        walls or {},
        legs,
        None,
        None,
        None,
        filled or {},
    )


def solved(mesh: MeshData, kind: str = "planar", **case) -> Solution:
    return solve(mesh, case_of(kind, **case))


def named(numbers: list[Number] | Solution) -> dict:
    """Numbers by quantity and names; every figure of a solution. Points of attachment, which may be repeated, are left out."""
    numbers = measure(numbers) if isinstance(numbers, Solution) else numbers
    found = {(n.name, *n.of): n for n in numbers if not n.name.endswith("tachment_point")}
    assert len(found) == sum(not n.name.endswith("tachment_point") for n in numbers), "a figure is given twice"
    return found


def values(numbers, *keys: str) -> list[float]:
    """Values of figures written as "quantity name name"."""
    found = named(numbers)
    return [found[tuple(key.split())].value for key in keys]


def renamed(mesh: MeshData, name: str, new: str, chosen: Callable, role: str = "wall") -> MeshData:
    """Give the edges of a boundary whose middle (x, y) is chosen a new name."""
    edges = mesh.boundaries[name]
    hit = np.array([bool(chosen(*mesh.points[e[2]])) for e in edges])
    boundaries = {**mesh.boundaries, name: edges[~hit]}
    boundaries[new] = np.concatenate([boundaries[new], edges[hit]]) if new in boundaries else edges[hit]
    boundaries = {n: e for n, e in boundaries.items() if len(e)}
    roles = {**mesh.roles, new: role}
    return replace(mesh, boundaries=boundaries, roles={n: roles[n] for n in boundaries})


def carved(mesh: MeshData, removed: Callable, name: str = "block") -> MeshData:
    """The mesh without the cells whose centre (x, y) is in ``removed``; new boundary edges are a wall called ``name``."""
    centres = mesh.points[mesh.cells[:, :3]].mean(axis=1)
    cells = mesh.cells[[not removed(x, y) for x, y in centres]]
    edges = np.concatenate([cells[:, [0, 1, 3]], cells[:, [1, 2, 4]], cells[:, [2, 0, 5]]])
    middles, counts = np.unique(edges[:, 2], return_counts=True)
    rim = edges[np.isin(edges[:, 2], middles[counts == 1])]
    owner = {int(e[2]): n for n, es in mesh.boundaries.items() for e in es}
    names = [owner.get(int(e[2]), name) for e in rim]
    used = np.unique(cells)
    number_of = np.full(len(mesh.points), -1)
    number_of[used] = np.arange(len(used))
    boundaries = {n: number_of[rim[[k == n for k in names]]] for n in dict.fromkeys([*mesh.boundaries, name]) if n in names}
    roles = {n: mesh.roles.get(n, "wall") for n in boundaries}
    return replace(
        mesh, points=mesh.points[used], cells=number_of[cells], boundaries=boundaries, roles=roles,
        node_curve=np.full(len(used), -1), node_parameter=np.full(len(used), np.nan),
    )  # fmt: skip


def with_section(mesh: MeshData, name: str, axis: int, at: float) -> MeshData:
    """Name the mesh edges on x = at (axis 0) or y = at (axis 1) as a section, its normal towards +x or +y."""
    edges = np.concatenate([mesh.cells[:, [0, 1, 3]], mesh.cells[:, [1, 2, 4]], mesh.cells[:, [2, 0, 5]]])
    on = edges[(np.abs(mesh.points[edges][..., axis] - at) < 1e-9).all(axis=1)]
    along = mesh.points[on[:, 1], 1 - axis] - mesh.points[on[:, 0], 1 - axis]
    return replace(mesh, sections={**mesh.sections, name: on[along > 0 if axis == 0 else along < 0]})


def round_body(n: int = 4, rings: int = 4, twist: float = 0.0, width: float = 2.0, radius: float = 0.5) -> MeshData:
    """A square channel around a cylinder at the origin: inlet, outlet, low, high, and the closed wall body.

    ``twist`` turns the nodes on the cylinder by an angle, so that its point of smallest x need not be a node.
    """

    def bend(t, s):
        angle = -t
        half = 0.5 * width / np.maximum(np.abs(np.cos(angle)), np.abs(np.sin(angle)))
        turned = angle + twist * (1 - s)
        return (
            radius * np.cos(turned) * (1 - s) + half * np.cos(angle) * s,
            radius * np.sin(turned) * (1 - s) + half * np.sin(angle) * s,
        )

    around = (0.0, 2 * np.pi, 0.0, 1.0)
    mesh = box_mesh(8 * n, rings, around, {"bottom": ("body", "wall"), "top": ("low", "wall")}, bend, periodic=True)
    h = 0.5 * width - 1e-9
    mesh = renamed(mesh, "low", "inlet", lambda x, y: x < -h, "port")
    mesh = renamed(mesh, "low", "outlet", lambda x, y: x > h, "port")
    return renamed(mesh, "low", "high", lambda x, y: y > h)


def step(n: int = 4, length: float = 8.0, **names) -> MeshData:
    """A channel of height 1 that widens to 2 downwards at x = 2; walls low (before), block (face), floor, high."""
    sides = {"left": ("inlet", "port"), "right": ("outlet", "port"), "bottom": ("floor", "wall"), "top": ("high", "wall")}
    mesh = carved(box_mesh(int(length) * n, 2 * n, (0.0, length, -1.0, 1.0), sides), lambda x, y: x < 2 and y < 0)
    return mesh if names.get("whole") else renamed(mesh, "block", "low", lambda x, y: abs(y) < 1e-9)
