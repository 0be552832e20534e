"""The HTML report: one file that opens offline, answer first, and prints to A4."""

from __future__ import annotations

import base64
import tempfile
from functools import cache
from pathlib import Path

from fem_flow.show.layout import length_text
from fem_flow.show.words import (
    GROUPS,
    first_look,
    in_si,
    scope_of,
    scope_statement,
    shown,
    spoken,
    spoken_of,
    withheld,
)

RANK = {"breaks": 0, "caution": 1, "holds": 2}


def report_html(result: dict, pictures: list, outline=None) -> str:
    """The report as one HTML text without any outside reference; pictures are embedded.

    Parameters
    ----------
    result : the content of result.json; every text in it is escaped
    pictures : list of ``Picture``, in the order to show; may be empty
    outline : ``Outline`` or None; with it the report shows the drawing and the part's size
    """
    numbers, checks = result["numbers"], sorted(result["checks"], key=lambda c: RANK[c["verdict"]])
    scope = scope_of(result)
    kind = outline.kind if outline is not None else None
    figures = _figures(pictures, outline, result.get("title") or "Part")
    return _template().render(
        title=result.get("title") or "Result",
        version=result.get("fem_flow", ""),
        scope=scope,
        page_scope=scope_statement(kind),
        banners=[c for c in checks if c["verdict"] == "breaks"],
        cautions=[c for c in checks if c["verdict"] == "caution"],
        n_holds=sum(c["verdict"] == "holds" for c in checks),
        cards=[_row(n) for n in first_look(result)],
        groups=_groups(numbers),
        checks=[{**c, "name": spoken(c["check"]), "of": ", ".join(c["of"])} for c in checks],
        inputs=_inputs(result.get("case") or {}),
        mesh=result.get("mesh") or {},
        solver=result.get("solver") or {},
        statements=[s for s in result.get("statements", ()) if s != scope and not s.startswith("NOT FOR USE")],
        part=_part(outline),
        figures=figures,
        lines_left_out=outline is not None and len(figures["lines"]) < len(outline.names("wall")),
        spoken=spoken,
    )


@cache
def _template():
    import jinja2

    here = Path(__file__).parent
    return jinja2.Environment(
        loader=jinja2.FileSystemLoader(here),
        autoescape=True,
        trim_blocks=True,
        lstrip_blocks=True,
        undefined=jinja2.StrictUndefined,
    ).get_template("report.html.j2")


def _row(number: dict) -> dict:
    value, bar, unit = shown(number)
    return {
        "name": spoken(number["quantity"]),
        "of": spoken_of(number),
        "value": value,
        "bar": bar,
        "unit": unit,
        "si": in_si(number),
        "verdict": number["verdict"],
        "note": number.get("note"),
        "definition": number.get("definition") or "",
        "withheld": withheld(number),
    }


def _groups(numbers: list[dict]) -> list[dict]:
    """Numbers by group, then by quantity; a definition shared by all of a quantity stands once."""
    known = {q for _, quantities in GROUPS for q in quantities}
    others = tuple(dict.fromkeys(n["quantity"] for n in numbers if n["quantity"] not in known))
    groups = []
    for title, quantities in (*GROUPS, ("Further", others)):
        blocks = []
        for quantity in quantities:
            rows = [_row(n) for n in numbers if n["quantity"] == quantity]
            if rows:
                shared = {r["definition"] for r in rows}
                blocks.append(
                    {
                        "name": spoken(quantity),
                        "key": quantity,
                        "rows": rows,
                        "definition": shared.pop() if len(shared) == 1 else None,
                    }
                )
        if blocks:
            groups.append({"title": title, "blocks": blocks})
    return groups


def _inputs(case: dict) -> list[dict]:
    """The case as run, a table a section: ``[ports.inlet]`` with its keys and values."""
    sections: list[dict] = []

    def walk(name: str, table: dict) -> None:
        plain = [(k, _value(v)) for k, v in table.items() if not isinstance(v, dict)]
        if plain:
            sections.append({"name": name, "rows": plain})
        for key, inner in table.items():
            if isinstance(inner, dict):
                walk(f"{name}.{key}" if name else str(key), inner)

    walk("", case)
    return sections


def _value(value) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, (list, tuple)):
        return ", ".join(_value(v) for v in value)
    return "not given" if value is None else str(value)


def _part(outline) -> list[tuple[str, str]]:
    if outline is None:
        return []
    x0, y0, x1, y1 = outline.box
    size = (
        f"{length_text(x1 - x0)} long, {length_text(2 * y1)} across"
        if outline.kind == "axisymmetric"
        else f"{length_text(x1 - x0)} × {length_text(y1 - y0)}"
    )
    corners = len(outline.corners)
    return [
        ("Form", outline.kind),
        ("Size", size),
        ("Narrowest gap", length_text(outline.narrowest_gap)),
        ("Sharp re-entrant corners", str(corners) if corners else "none"),
        ("Ports", ", ".join(outline.names("port")) or "none"),
        ("Walls", ", ".join(outline.names("wall")) or "none"),
    ]


def _figures(pictures: list, outline, title: str) -> dict:
    """Embedded pictures: ``first`` (the flow), ``more`` (other fields), ``lines`` (along the walls), ``drawing`` (or None)."""
    pictures = sorted(pictures, key=lambda p: p.name == "mesh")  # the mesh comes last
    made = {"first": None, "more": [], "lines": [], "drawing": None}
    for picture in pictures:
        figure = _figure(picture)
        if picture.name == "speed":
            made["first"] = figure
        else:
            made["lines" if picture.name.startswith("along_") else "more"].append(figure)
    if outline is not None:
        from fem_flow.show.drawing import preview_picture

        with tempfile.TemporaryDirectory() as folder:
            made["drawing"] = _figure(preview_picture(outline, Path(folder) / "drawing.png", {}, title))
    return made


def _figure(picture) -> dict:
    data = Path(picture.path).read_bytes()
    width, height = int.from_bytes(data[16:20], "big"), int.from_bytes(data[20:24], "big")  # of the PNG header
    return {
        "data": base64.b64encode(data).decode("ascii"),
        "caption": picture.caption,
        "width": width,
        "height": height,
        "tall": height > 0.95 * width,
    }
