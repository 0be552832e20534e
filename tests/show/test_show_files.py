"""Result files read back exactly and carry units and scope."""

import csv
from dataclasses import replace

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.measure.number import Number
from fem_flow.show.files import write_fields, write_ports, write_walls


def test_fields_are_quadratic_triangles_that_read_back_exactly(tmp_path):
    import pyvista

    fields, _, _ = synthetic.nozzle(nx=6, ny=2)
    fields = replace(fields, stream=fields.points[:, 0] ** 2)
    write_fields(tmp_path / "fields.vtu", fields)
    grid = pyvista.read(tmp_path / "fields.vtu")
    assert set(grid.celltypes) == {22}
    assert np.array_equal(grid.cells.reshape(-1, 7)[:, 1:], fields.cells)
    assert np.array_equal(grid.points[:, :2], fields.points)
    assert np.array_equal(grid["stream_function"], fields.points[:, 0] ** 2)
    assert np.array_equal(grid["velocity"], np.column_stack([*fields.velocity, 0 * fields.pressure]))
    assert set(grid.point_data.keys()) == {"velocity", "pressure", "shear_rate", "viscosity", "stream_function"}
    assert grid.field_data["scope"][0].startswith("Steady laminar single-phase 2-D (axisymmetric) computation")


def test_x_squared_is_exact_inside_a_quadratic_cell(tmp_path):
    """The node order is VTK's: probing x² between the nodes gives x², which a wrong order of the mid-edge nodes does not."""
    import pyvista

    fields, _, _ = synthetic.slot(length=1.0, height=1.0, nx=1, ny=1)
    fields = replace(fields, pressure=fields.points[:, 0] ** 2)
    write_fields(tmp_path / "fields.vtu", fields)
    grid = pyvista.read(tmp_path / "fields.vtu")
    points = np.array([[0.3, 0.1, 0], [0.8, 0.35, 0], [0.15, 0.6, 0]])
    found = pyvista.PolyData(points).sample(grid)
    assert found["vtkValidPointMask"].all()
    assert found["pressure"] == pytest.approx(points[:, 0] ** 2, abs=1e-4)


def rows_of(path):
    """The table without its last column, whose heading states the scope and which is empty."""
    rows = list(csv.reader(path.read_text(encoding="utf-8").splitlines()))
    assert rows[0][-1].startswith("Steady laminar single-phase 2-D")
    assert {row[-1] for row in rows[1:]} == {""}
    return [row[:-1] for row in rows]


def test_walls_have_units_in_the_header_and_empty_fields_where_withheld(tmp_path):
    _, _, walls = synthetic.needle()
    write_walls(tmp_path / "walls.csv", walls, "axisymmetric")
    head, *rows = rows_of(tmp_path / "walls.csv")
    assert head == ["wall", "piece", "arc_length [m]", "x [m]", "y [m]", "shear_stress [Pa]", "pressure [Pa]"]
    assert len(rows) == len(walls[0].arc)
    assert [float(r[2]) for r in rows] == walls[0].arc.tolist()
    assert [r[5] == "" for r in rows] == np.isnan(walls[0].shear).tolist()
    assert sum(r[5] == "" for r in rows) == 4


def test_pandas_reads_the_tables(tmp_path):
    import pandas

    _, _, walls = synthetic.needle()
    write_walls(tmp_path / "walls.csv", walls)
    table = pandas.read_csv(tmp_path / "walls.csv")
    assert table["shear_stress [Pa]"].isna().sum() == 4
    assert table["pressure [Pa]"].to_numpy() == pytest.approx(walls[0].pressure, rel=1e-15)


def test_ports_are_a_row_a_port_with_bars_and_the_worst_verdict(tmp_path):
    numbers = [
        Number("flow_rate", ("inlet",), 2e-4, "m^3/s", "d"),
        Number("static_pressure", ("inlet",), 100.0, "Pa", "d", 2.0),
        Number("flow_rate", ("throat",), 2e-4, "m^3/s", "d"),
        Number("static_pressure", ("throat",), float("nan"), "Pa", "d", None, "caution"),
        Number("discharge_coefficient", ("throat",), 0.6, "1", "d", 0.01),
        Number("force_x", ("poppet",), 2.0, "N", "d"),
        Number("total_pressure_drop", ("inlet", "outlet"), 3.0, "Pa", "d"),
    ]
    write_ports(tmp_path / "ports.csv", numbers)
    assert rows_of(tmp_path / "ports.csv") == [
        [
            "port",
            "flow_rate [m^3/s]",
            "static_pressure [Pa]",
            "static_pressure error_bar [Pa]",
            "discharge_coefficient [1]",
            "discharge_coefficient error_bar [1]",
            "verdict",
        ],
        ["inlet", "0.0002", "100.0", "2.0", "", "", "holds"],
        ["throat", "0.0002", "", "", "0.6", "0.01", "caution"],
    ]
