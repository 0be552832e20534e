"""A way to write and to draw small part scripts."""

from pathlib import Path
from textwrap import dedent

import pytest
from part_scripts import BOX, NAMED, default_values

from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script


@pytest.fixture
def script(tmp_path):
    """Write a script file from its text and return the path."""

    def write(text: str, name: str = "own.py") -> Path:
        path = tmp_path / name
        path.write_text(dedent(text), encoding="utf-8")
        return path

    return write


@pytest.fixture
def box_script(script):
    """The channel with some lines in place of its names."""

    def write(lines: str = NAMED, **changed) -> Path:
        text = BOX
        originals = {"kind": "planar", "ports": '["inlet", "outlet"]', "corner": "0, 0, 0, 4"}
        for key, new in changed.items():
            text = text.replace(originals[key], new)
        return script(text + lines)

    return write


@pytest.fixture
def drawn():
    """Draw a script (a path, or the name of a shipped part); returns the open Drawing, its outline and its declaration."""
    open_ones = []

    def draw(reference, **changed):
        path = find_script(reference, Path.cwd()) if isinstance(reference, str) else reference
        drawing = Drawing(path)
        open_ones.append(drawing)
        values = default_values(drawing.declare(), **changed)
        outline = drawing.draw(values)
        return drawing, outline, drawing.declare(values)

    yield draw
    for drawing in open_ones:
        drawing.close()
