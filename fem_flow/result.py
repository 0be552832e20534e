"""What a run hands back: numbers, checks, fields and the files they are written to."""

from __future__ import annotations

import json
import math
import time
from dataclasses import asdict, dataclass, field
from pathlib import Path

import numpy as np

from fem_flow.case.model import Case
from fem_flow.case.resolved import ResolvedCase
from fem_flow.flow.solution import Solution
from fem_flow.measure.nodal import nodal_fields
from fem_flow.measure.number import Check, Number
from fem_flow.measure.shear import wall_curves
from fem_flow.part.mesh import Outline

SCHEMA = "fem_flow.result/1"
PREVIEW_SCHEMA = "fem_flow.preview/1"


@dataclass(frozen=True)
class MeshFacts:
    """Size of the finest mesh, and how many meshes were solved."""

    unknowns: int
    elements: int
    levels: int


class Fields:
    """Probes of the solved fields at points in metres, walls included; outside the fluid NaN."""

    def __init__(self, solution: Solution):
        self._solution = solution

    def velocity(self, points) -> np.ndarray:
        """(2, n), m/s, at points (n, 2), m."""
        return self._solution.velocity(np.asarray(points, dtype=float))

    def pressure(self, points) -> np.ndarray:
        """(n,), Pa counted from ambient, at points (n, 2), m."""
        return self._solution.pressure(np.asarray(points, dtype=float))


@dataclass(frozen=True)
class Result:
    """The result of a case.

    ``result["total_pressure_drop", "inlet", "outlet"]`` is a `Number`; ``numbers`` and ``checks`` are pandas tables;
    ``fields`` probes velocity and pressure anywhere; ``write(folder)`` writes the result directory.
    """

    case: Case
    resolved: ResolvedCase
    outline: Outline
    solution: Solution
    listed: tuple[Number, ...]
    found: tuple[Check, ...]
    statements: tuple[str, ...]
    levels: int
    solver: dict
    missed: tuple[Number, ...] = field(default=())

    @property
    def accuracy_met(self) -> bool:
        """Whether every error bar asked for was reached."""
        return not self.missed

    @property
    def mesh(self) -> MeshFacts:
        return MeshFacts(self.solution.unknowns, len(self.solution.space.cells), self.levels)

    @property
    def fields(self) -> Fields:
        return Fields(self.solution)

    def __getitem__(self, key) -> Number:
        """The number of a quantity: ``result["pressure_min"]``, ``result["force_x", "poppet"]``.

        Two ports asked the other way round give the number with its sign changed (a drop is a minus b).

        Raises
        ------
        KeyError : there is no such number; the message names the nearest ones
        """
        name, *of = (key,) if isinstance(key, str) else key
        of = tuple(of)
        for n in self.listed:
            if n.name == name and n.of == of:
                return n
        for n in self.listed:
            if n.name == name and len(of) == 2 and n.of == of[::-1]:
                turned = -n.value if name.endswith("_drop") else n.value
                return n.with_(of=of, value=turned)
        have = sorted({" ".join(n.of) for n in self.listed if n.name == name})
        if have:
            raise KeyError(f"there is no {name} of {' '.join(of) or 'the whole part'}; it is given of: {', '.join(have)}")
        raise KeyError(f"there is no number called {name}; there are: {', '.join(sorted({n.name for n in self.listed}))}")

    @property
    def numbers(self):
        """pandas.DataFrame, a row a number."""
        import pandas

        return pandas.DataFrame(
            [
                {"quantity": n.name, "of": " ".join(n.of), "value": n.value, "unit": n.unit, "error_bar": n.error_bar,
                 "verdict": n.verdict, "note": n.note, "definition": n.definition}
                for n in self.listed
            ]
        )

    @property
    def checks(self):
        """pandas.DataFrame, a row a check."""
        import pandas

        return pandas.DataFrame([{**asdict(c), "of": " ".join(c.of)} for c in self.found])

    def _repr_html_(self) -> str:
        return self.numbers.drop(columns="definition").to_html(index=False, na_rep="")

    def to_dict(self) -> dict:
        """The content of result.json."""
        from fem_flow import __version__

        return {
            "schema": SCHEMA,
            "title": self.resolved.title,
            "fem_flow": __version__,
            "case": self.resolved.filled,
            "numbers": [_number(n) for n in self.listed],
            "checks": [{**asdict(c), "of": list(c.of)} for c in self.found],
            "statements": list(self.statements),
            "mesh": {"unknowns": self.mesh.unknowns, "elements": self.mesh.elements, "levels": self.levels},
            "solver": self.solver,
        }

    def write(self, folder: str | Path) -> Path:
        """Write the result directory: result.json, fields.vtu, walls.csv, ports.csv, pictures, report.html, case.toml.

        The folder appears whole or not at all; an earlier result there is replaced.

        Raises
        ------
        CaseError : the folder exists and is no result of ours
        """
        from fem_flow.show.folder import result_folder

        with result_folder(Path(folder)) as place:
            self._write_into(place)
        return Path(folder)

    def _write_into(self, place: Path) -> None:
        from fem_flow.case.write import case_toml
        from fem_flow.show.files import write_fields, write_ports, write_walls
        from fem_flow.show.pictures import PicturesUnavailable, Rendering
        from fem_flow.show.plots import wall_plots
        from fem_flow.show.report import report_html

        clock = time.perf_counter()
        fields, curves = nodal_fields(self.solution), wall_curves(self.solution)
        rendering = Rendering(fields, self.outline, curves, place / "pictures")
        content = self.to_dict()
        try:
            (place / "case.toml").write_text(case_toml(self.resolved.filled), encoding="utf-8")
            write_fields(place / "fields.vtu", fields)
            write_walls(place / "walls.csv", curves, fields.kind)
            write_ports(place / "ports.csv", self.listed, fields.kind)
            plots = wall_plots(curves, place / "pictures")
            shown = rendering.pictures()
        except PicturesUnavailable as error:
            shown = []
            content["statements"].append(f"The field pictures could not be drawn on this machine: {error}")
        finally:
            rendering.stop()
        shown += plots
        seconds = {**self.solver["seconds"], "picture": round(time.perf_counter() - clock, 4)}
        content["solver"] = {**self.solver, "seconds": seconds}
        (place / "report.html").write_text(report_html(content, shown, self.outline), encoding="utf-8")
        (place / "result.json").write_text(json.dumps(content, indent=1, allow_nan=False) + "\n", encoding="utf-8")


@dataclass(frozen=True)
class Preview:
    """A drawn part before it is solved: outline, and area and Reynolds number of every port and section.

    ``ports`` rows are dicts: name, role, area (m^2), hydraulic_diameter (m), flow_rate (m^3/s), mean_velocity (m/s),
    reynolds_number; the last three None where the case does not give the flow.
    """

    resolved: ResolvedCase
    outline: Outline
    ports: tuple[dict, ...]

    def to_dict(self) -> dict:
        """Plain data for --json."""
        from fem_flow import __version__

        x0, y0, x1, y1 = self.outline.box
        return {
            "schema": PREVIEW_SCHEMA,
            "title": self.resolved.title,
            "fem_flow": __version__,
            "case": self.resolved.filled,
            "kind": self.resolved.kind,
            "box": {"x": [x0, x1], "y": [y0, y1], "unit": "m"},
            "area": self.outline.area,
            "narrowest_gap": self.outline.narrowest_gap,
            "ports": list(self.ports),
            "walls": list(self.outline.names("wall")),
            "sharp_corners": [{"x": c.x, "y": c.y, "angle": c.angle, "walls": list(c.walls)} for c in self.outline.corners],
        }

    def write(self, folder: str | Path) -> Path:
        """Write preview.json and preview.png."""
        from fem_flow.show.drawing import preview_picture
        from fem_flow.show.folder import result_folder

        known = [row for row in self.ports if row["reynolds_number"] is not None]
        labels = {row["name"]: f"{row['name']}\nRe {row['reynolds_number']:.3g}" for row in known}
        with result_folder(Path(folder)) as place:
            preview_picture(self.outline, place / "preview.png", labels, self.resolved.title)
            (place / "preview.json").write_text(json.dumps(self.to_dict(), indent=1) + "\n", encoding="utf-8")
        return Path(folder)


def _number(n: Number) -> dict:
    value = None if n.withheld or math.isinf(n.value) else n.value
    return {
        "quantity": n.name, "of": list(n.of), "value": value, "unit": n.unit, "error_bar": n.error_bar, "verdict": n.verdict,
        "definition": n.definition, "note": n.note,
    }
