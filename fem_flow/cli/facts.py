"""What the commands ``parts`` and ``draft`` tell of a part, gathered from its script."""

from __future__ import annotations

import os
from dataclasses import asdict
from pathlib import Path

from fem_flow.case.declaration import Declaration
from fem_flow.case.draft import draft
from fem_flow.case.parameters import check_declaration, value_of
from fem_flow.errors import CaseError
from fem_flow.part.drawing import Drawing, declare_many
from fem_flow.part.find import find_script, shipped


def part_list() -> list[dict]:
    """Name and first line of every shipped part."""
    scripts = [find_script(name, Path.cwd()) for name in shipped()]
    return [{"name": declared.name, "says": declared.says} for declared in declare_many(scripts)]


def drawn_part(reference: str) -> tuple[Declaration, tuple[str, ...]]:
    """A part's declaration with its default dimensions, and the names of its walls.

    Raises
    ------
    CaseError : there is no such part
    GeometryError : its script fails
    """
    with Drawing(find_script(reference, Path.cwd())) as drawing:
        declared = drawing.declare()
        check_declaration(declared)
        values = {name: value_of(p, p.default, name, declared) for name, p in declared.parameters.items()}
        return drawing.declare(values), drawing.draw(values).names("wall")


def part_facts(reference: str) -> dict:
    """A part as plain data: what it is, sketch, parameters with limits, ports, sections and walls."""
    declaration, walls = drawn_part(reference)
    return {
        "name": declaration.name,
        "says": declaration.says,
        "sketch": declaration.sketch,
        "kind": declaration.kind,
        "unit": declaration.unit,
        "parameters": [{"name": name, **asdict(p)} for name, p in declaration.parameters.items()],
        "ports": list(declaration.ports or ()),
        "sections": list(declaration.sections),
        "walls": list(walls),
    }


def draft_text(reference: str, folder: Path) -> str:
    """A case file for a part, whose paths count from `folder`."""
    declaration, walls = drawn_part(reference)
    script = None if reference in shipped() else Path(os.path.relpath(declaration.path, folder.resolve())).as_posix()
    return draft(declaration, walls, script)


def new_file(path: Path, text: str) -> None:
    """Write a file that must not exist yet.

    Raises
    ------
    CaseError : there is such a file, or it cannot be written
    """
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        sentence = f"{path} exists and is left as it is; name another file with -o, or remove it"
        raise CaseError(sentence, reason="file_exists", details={"file": str(path)}) from None
    except OSError as error:
        sentence = f"{path} cannot be written ({error.strerror}); name another file with -o"
        raise CaseError(sentence, reason="file_not_writable", details={"file": str(path)}) from None
