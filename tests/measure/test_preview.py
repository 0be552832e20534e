"""Areas and Reynolds numbers before a solve agree with those after it."""

import numpy as np
import pytest
from meshes import box_mesh
from solved import PIPE, SLOT, case_of, flow, solved, static, with_section

from fem_flow.case.resolved import PortCondition
from fem_flow.measure.preview import port_table
from fem_flow.measure.section import stations
from fem_flow.part.mesh import Curve, Outline


def outline(mesh, kind):
    curves = [Curve(n, mesh.roles[n], mesh.points[np.append(e[:, 0], e[-1, 1])]) for n, e in mesh.boundaries.items()]
    curves += [Curve(n, "section", mesh.points[np.append(e[:, 0], e[-1, 1])]) for n, e in mesh.sections.items()]
    return Outline(kind, "m", tuple(curves), (), 1.0, (0.0, 0.0, 3.0, 1.0), 1.0, ((0, 0), (0, 1)))


@pytest.mark.parametrize(
    ("kind", "names"), [("planar", SLOT), ("axisymmetric", PIPE), ("planar", {**SLOT, "bottom": ("symmetry", "symmetry")})]
)
def test_the_table_agrees_with_the_solution(kind, names):
    mesh = with_section(box_mesh(4, 2, (0.0, 3.0, 0.0, 1.0), names), "throat", 0, 1.5)
    ports = {"inlet": PortCondition("velocity", 2.0), "outlet": static(0.0)}
    solution = solved(mesh, kind, ports=ports, depth=0.3, density=3.0, viscosity=0.1)
    rows = {row["name"]: row for row in port_table(outline(mesh, kind), solution.case)}
    assert list(rows) == ["inlet", "outlet", "throat"]
    for name, st in stations(solution).items():
        row = rows[name]
        assert row["area"] == pytest.approx(st.area, rel=1e-12)
        assert row["hydraulic_diameter"] == pytest.approx(st.diameter, rel=1e-12)
        assert row["flow_rate"] == pytest.approx(st.flow, rel=1e-9)
        assert row["mean_velocity"] == pytest.approx(st.mean_velocity, rel=1e-9)
        assert row["reynolds_number"] == pytest.approx(3.0 * abs(st.mean_velocity) * st.diameter / 0.1, rel=1e-9)


def test_flows_that_the_case_does_not_give_are_left_open():
    mesh = box_mesh(4, 2, (0.0, 3.0, 0.0, 1.0), SLOT)
    rows = list(port_table(outline(mesh, "planar"), case_of(ports={"inlet": static(1.0), "outlet": static(0.0)})))
    assert [(r["flow_rate"], r["reynolds_number"]) for r in rows] == [(None, None), (None, None)]
    rows = list(port_table(outline(mesh, "planar"), case_of(ports={"inlet": flow(1.0), "outlet": static(0.0)})))
    assert [r["flow_rate"] for r in rows] == [1.0, -1.0]
