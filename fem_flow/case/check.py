"""A case against its part: from text with units to SI numbers that can be drawn, meshed and solved."""

from __future__ import annotations

from pathlib import Path

from fem_flow.case.accuracy import TARGET, UNKNOWNS, Names, accuracy_of, default_of
from fem_flow.case.conditions import check_levels, port_conditions, wall_conditions
from fem_flow.case.declaration import Declaration
from fem_flow.case.fluids import fluid_of
from fem_flow.case.parameters import as_written, parameter_values
from fem_flow.case.resolved import ResolvedCase
from fem_flow.case.words import located, refuse
from fem_flow.units import convert, quoted, read

__all__ = ["parameter_values", "resolve", "script_reference"]


def script_reference(case) -> str:
    """What ``[part] script`` says: the name of a shipped part, or a path that counts from ``case.folder``."""
    return case.part.script


def resolve(case, declaration: Declaration, walls: tuple[str, ...], regions: tuple[str, ...] = ()) -> ResolvedCase:
    """Check a case against its part and turn it into SI.

    Parameters
    ----------
    case : Case
    declaration : of the part, asked with this case's parameters: kind, ports and legs are filled
    walls : names of the walls of the drawn outline
    regions : names of its regions

    Raises
    ------
    CaseError where the case does not fit the part, or its conditions do not make one flow
    """
    values = parameter_values(case, declaration)
    kind = declaration.kind
    model = case.model
    ambient = None if model.ambient is None else read(model.ambient, "pressure", "ambient")
    with located(case.source, "[fluid]"):
        fluid = fluid_of(case.fluid.given(), ambient)
    ports = port_conditions(case, declaration, fluid, ambient)
    conditions = wall_conditions(case, declaration, tuple(walls))
    check_levels(case, ports, conditions)
    names = Names(declaration, kind, walls, regions)
    accuracy = accuracy_of(case, names)
    size, near_walls = _mesh(case)
    legs = declaration.legs
    return ResolvedCase(
        title=case.title or declaration.name,
        values=values,
        kind=kind,
        depth=_depth(case, declaration),
        fluid=fluid,
        inertia=model.inertia is not False,
        ambient=ambient,
        ports=ports,
        walls=conditions,
        legs=None if legs is None else {port: convert(float(length), declaration.unit, "m") for port, length in legs.items()},
        accuracy=accuracy,
        mesh_size=size,
        mesh_near_walls=near_walls,
        filled=_filled(case, declaration, names),
    )


def _depth(case, declaration: Declaration) -> float | None:
    depth = case.model.depth
    if declaration.kind == "planar" and depth is None:
        raise refuse(
            case.source,
            "[model] depth",
            f'is missing: {declaration.name} is planar here; write depth = "25 mm", its size into the page',
            "missing",
        )
    if declaration.kind == "axisymmetric" and depth is not None:
        raise refuse(
            case.source,
            "[model] depth",
            f"is {quoted(depth)}, but {declaration.name} is axisymmetric here and its numbers are for the "
            "full turn; delete this line",
            "contradiction",
        )
    return None if depth is None else read(depth, "length", "depth")


def _mesh(case) -> tuple[float | None, float | None]:
    given = case.mesh.given() if case.mesh else {}
    if case.mesh is not None and not given:
        raise refuse(case.source, "[mesh]", 'is empty; give size = "0.5 mm" and near_walls = "0.1 mm", or delete it', "missing")
    size, near_walls = (read(given[k], "length", k) if k in given else None for k in ("size", "near_walls"))
    if size is not None and near_walls is not None and near_walls > size:
        raise refuse(
            case.source,
            "[mesh] near_walls",
            f"is {quoted(given['near_walls'])}, larger than size {quoted(given['size'])}; walls need the finer mesh",
            "contradiction",
        )
    return size, near_walls


def _filled(case, declaration: Declaration, names: Names) -> dict:
    """The case as plain data with every default filled in; reading it back resolves to the same."""
    keys = case.to_dict()
    script = case.part.script
    if Path(script).suffix or Path(script).name != script:
        script = str((case.folder / script).resolve())
    filled = {
        "title": case.title or declaration.name,
        "part": {"script": script, **as_written(case, declaration)},
        "fluid": keys["fluid"],
        "model": {
            "inertia": case.model.inertia is not False,
            **{k: v for k, v in case.model.given().items() if k != "inertia"},
        },
    }
    if declaration.ports:
        filled["ports"] = {name: keys["ports"][name] for name in declaration.ports}
    if case.walls:
        filled["walls"] = keys["walls"]
    if case.mesh is None or case.accuracy is not None:
        default = {"target": TARGET, "of": default_of(names), "unknowns": UNKNOWNS}
        filled["accuracy"] = {**default, **keys.get("accuracy", {})}
        filled["accuracy"]["of"] = list(filled["accuracy"]["of"])
    if case.mesh is not None:
        filled["mesh"] = keys["mesh"]
    return filled
