"""Result files that other programs read: fields.vtu, walls.csv, ports.csv. Everything is in SI.

The CSV files begin with one line that starts with ``#`` and states the scope (pandas: ``read_csv(path, comment="#")``).
"""

from __future__ import annotations

import csv
import math
from pathlib import Path

import numpy as np

from fem_flow.show.words import scope_statement

QUADRATIC_TRIANGLE = 22  # VTK's number for it; its node order is ours
PORT_QUANTITIES = (
    "flow_rate",
    "mean_velocity",
    "area",
    "static_pressure",
    "total_pressure",
    "kinetic_energy_coefficient",
    "hydraulic_diameter",
    "reynolds_number",
    "flow_share",
    "discharge_coefficient",
)
WORSE = {"holds": 0, "caution": 1, "breaks": 2}


def write_fields(path: Path, fields) -> None:
    """Write a ``NodalFields`` as VTK quadratic triangles with the P2 values at their nodes.

    Point data: ``velocity`` (3 components, m/s), ``pressure`` (Pa), ``shear_rate`` (1/s), ``viscosity`` (Pa s),
    ``stream_function`` (m^2/s planar, m^3/s axisymmetric). Field data: ``scope``, ``kind``, ``units``.
    """
    import pyvista

    n = len(fields.points)
    points = np.column_stack([fields.points, np.zeros(n)])
    cells = np.column_stack([np.full(len(fields.cells), 6), fields.cells]).ravel()
    grid = pyvista.UnstructuredGrid(cells, np.full(len(fields.cells), QUADRATIC_TRIANGLE, dtype=np.uint8), points)
    grid.point_data["velocity"] = np.column_stack([fields.velocity[0], fields.velocity[1], np.zeros(n)])
    for name, values in (
        ("pressure", fields.pressure),
        ("shear_rate", fields.shear_rate),
        ("viscosity", fields.viscosity),
        ("stream_function", fields.stream),
    ):
        grid.point_data[name] = np.array(values, dtype=float)
    stream = "m^2/s" if fields.kind == "planar" else "m^3/s"
    grid.field_data["scope"] = [scope_statement(fields.kind)]
    grid.field_data["kind"] = [fields.kind]
    grid.field_data["units"] = [
        f"points m, velocity m/s, pressure Pa (from ambient), shear_rate 1/s, viscosity Pa*s, stream_function {stream}"
    ]
    grid.save(str(path))


def write_walls(path: Path, wall_curves, kind: str | None = None) -> None:
    """Write ``WallCurve`` objects, a row a point: wall, piece, arc_length [m], x [m], y [m], shear_stress [Pa], pressure [Pa].

    Shear that is withheld is an empty field. The last heading, of an empty column, is the statement of scope.
    """
    with open(path, "w", newline="", encoding="utf-8") as file:
        rows = csv.writer(file, lineterminator="\n")
        head = ["wall", "piece", "arc_length [m]", "x [m]", "y [m]", "shear_stress [Pa]", "pressure [Pa]"]
        rows.writerow([*head, scope_statement(kind)])
        for curve in wall_curves:
            for s, (x, y), shear, pressure in zip(curve.arc, curve.points, curve.shear, curve.pressure, strict=True):
                rows.writerow([curve.name, curve.piece, *(_plain(v) for v in (s, x, y, shear, pressure)), ""])


def write_ports(path: Path, numbers, kind: str | None = None) -> None:
    """Write the port and section figures of a list of ``Number``, a row a port or section.

    Columns: port, then every quantity as ``quantity [unit]`` with ``quantity error_bar [unit]`` behind it where bars are given,
    then ``verdict``, the worst of the row. Withheld values and values not given are empty fields. The last heading, of an empty
    column, is the statement of scope.
    """
    mine = [n for n in numbers if n.name in PORT_QUANTITIES and len(n.of) == 1]
    names = list(dict.fromkeys(n.of[0] for n in mine))
    columns = [
        (q, next(n.unit for n in mine if n.name == q), any(n.error_bar is not None for n in mine if n.name == q))
        for q in PORT_QUANTITIES
        if any(n.name == q for n in mine)
    ]
    at = {(n.of[0], n.name): n for n in mine}
    with open(path, "w", newline="", encoding="utf-8") as file:
        rows = csv.writer(file, lineterminator="\n")
        head = ["port"]
        for quantity, unit, bar in columns:
            head += [f"{quantity} [{unit}]"] + ([f"{quantity} error_bar [{unit}]"] if bar else [])
        rows.writerow([*head, "verdict", scope_statement(kind)])
        for name in names:
            row = [name]
            for quantity, _, bar in columns:
                n = at.get((name, quantity))
                row += [_plain(n.value if n else None)] + ([_plain(n.error_bar if n else None)] if bar else [])
            rows.writerow([*row, max((n.verdict for n in mine if n.of[0] == name), key=WORSE.get), ""])


def _plain(value) -> str:
    """Shortest text that reads back to the same float; nothing for a missing value."""
    return "" if value is None or math.isnan(value) else repr(float(value))
