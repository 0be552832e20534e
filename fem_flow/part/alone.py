"""Running a part script by itself: ``python geometries/poppet_valve.py --lift "2 mm" -o valve.msh``.

gmsh runs in that very process. The mesh is written by gmsh, in the script's unit, with the names of the boundaries as physical
groups; the triangles in corners are as gmsh left them.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from fem_flow.case.declaration import Declaration, Parameter
from fem_flow.case.parameters import check_declaration, value_of
from fem_flow.case.words import located
from fem_flow.errors import CaseError, FemFlowError
from fem_flow.part.script import declaration, load
from fem_flow.part.session import session


def main(space: dict, arguments: list[str] | None = None) -> None:
    """Draw and mesh the script whose ``globals()`` these are, with dimensions from the command line.

    Ends the process: 0 done, 2 the input or the geometry is wrong (one sentence on stderr).
    """
    try:
        script = load(space["__file__"])
        declared = declaration(script)
        check_declaration(declared)
        given = _parser(declared).parse_args(arguments)
        values = {name: _value(declared, name, p, getattr(given, name)) for name, p in declared.parameters.items()}
        words = _mesh(script, values, given)
    except FemFlowError as error:
        print(error, file=sys.stderr)
        raise SystemExit(2) from None
    print(words, file=sys.stderr)
    raise SystemExit(0)


def _mesh(script, values, given) -> str:
    from fem_flow.part.design import Design

    with session() as gmsh:
        design = Design(gmsh, script, values)
        mesh = design.mesh(scale=given.scale)
        if given.output:
            _write(gmsh, given.output)
        names = ", ".join(f"{name} ({role})" for name, role in mesh.roles.items())
        gap = f"narrowest gap {design.gap[0]:.4g} {design.cad.unit}"
    done = f"written to {given.output}" if given.output else "nothing written (give -o FILE.msh)"
    return f"{len(mesh.cells)} elements, {gap}; {names}; {done}"


def _write(gmsh, path):
    """Save gmsh's own mesh, made quadratic, with the surface as a group too, for a mesh file holds only what is in a group."""
    named = {int(t) for _, g in gmsh.model.getPhysicalGroups(2) for t in gmsh.model.getEntitiesForPhysicalGroup(2, g)}
    rest = [tag for _, tag in gmsh.model.getEntities(2) if tag not in named]
    if rest:
        gmsh.model.addPhysicalGroup(2, rest, name="fluid")
    gmsh.model.mesh.setOrder(2)
    try:
        gmsh.write(str(path))
    except Exception as error:
        sentence = f"the mesh cannot be written to {path}: {' '.join(str(error).split())}; give a file that ends in .msh"
        raise CaseError(sentence, reason="file_not_writable", details={"file": str(path)}) from error


def _parser(declared: Declaration) -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog=f"python {Path(declared.path).name}",
        description=f"{declared.says}\n\n{declared.sketch}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("-o", "--output", type=Path, metavar="FILE", help="mesh file to write, for example part.msh")
    parser.add_argument("--scale", type=float, default=1.0, help="2 is a mesh twice as coarse (default: 1)")
    for name, p in declared.parameters.items():
        limits = f", {p.low} to {p.high}" if p.low is not None and p.high is not None else ""
        choices = f", one of {', '.join(p.choices)}" if p.choices else limits
        says = f"{p.says} (default: {p.default}{choices})".replace("%", "%%")
        spellings = dict.fromkeys([f"--{name}", "--" + name.replace("_", "-")])
        parser.add_argument(*spellings, dest=name, metavar="VALUE", help=says)
    return parser


def _value(declared: Declaration, name: str, parameter: Parameter, given: str | None):
    with located(None, f"--{name}"):
        return value_of(parameter, parameter.default if given is None else _bare(parameter, given), name, declared)


def _bare(parameter: Parameter, text: str):
    """What the command line gives as text is a switch or a number where the parameter is one."""
    default = parameter.default
    if isinstance(default, bool):
        return {"true": True, "false": False}.get(text.strip().lower(), text)
    if isinstance(default, (int, float)):
        try:
            number = float(text)
        except ValueError:
            return text
        return int(number) if number.is_integer() and isinstance(default, int) else number
    return text
