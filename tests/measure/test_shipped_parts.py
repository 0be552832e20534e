"""Identities on meshes of shipped parts: curved elements, graded corners, sections."""

import math
from pathlib import Path

import pytest
from solved import case_of, flow, named, static

from fem_flow.case.check import parameter_values
from fem_flow.case.model import Case
from fem_flow.flow.problem import solve
from fem_flow.measure.energy import discrete_energy_defect, discrete_momentum_defect
from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script

pytest.importorskip("gmsh", reason="gmsh is not here")

OIL = {"density": 870.0, "viscosity": 0.04}


def solved_part(name, entering, **values):
    """A shipped part on a coarse mesh with a flow (m^3/s) entering at its inlet, in oil."""
    case = Case(part={"script": name, **values}, fluid={"name": "water", "temperature": "20 degC"})
    with Drawing(find_script(name, Path.cwd())) as drawing:
        outline = drawing.draw(parameter_values(case, drawing.declare()))
        mesh = drawing.mesh(scale=3.0)
    outlets = {port: static(1e5) for port in mesh.names("port") if port != "inlet"}
    return solve(mesh, case_of(outline.kind, ports={"inlet": flow(entering), **outlets}, depth=0.1, **OIL))


@pytest.fixture(scope="module")
def poppet():
    return solved_part("poppet_valve", 5e-5)


def test_poppet_force_against_everything_else(poppet):
    """The force on the poppet is minus the reaction of all other boundaries, but for the term of the discrete divergence."""
    assert abs(discrete_momentum_defect(poppet)) < 1e-10
    assert abs(discrete_energy_defect(poppet)) < 1e-10


def test_poppet_figures(poppet):
    """Pressed open by the flow; the throat carries the whole flow; its diameter is twice the narrowest gap."""
    found = named(poppet)
    assert found["force_x", "poppet"].value > 0
    assert abs(found["flow_rate", "throat"].value) == pytest.approx(5e-5, rel=1e-2)
    assert found["hydraulic_diameter", "throat"].value == pytest.approx(2 * found["narrowest_gap",].value, rel=1e-2)
    assert 0.3 < found["discharge_coefficient", "throat"].value < 1.0


def test_round_expansion_withholds_at_its_sharp_edge():
    found = named(solved_part("sudden_expansion", 5e-5, shape="round"))
    for wall in ("small_bore", "step"):
        assert math.isnan(found["wall_shear_max", wall].value)
    assert math.isfinite(found["wall_shear_max", "large_bore"].value)


def test_half_a_planar_expansion_is_the_whole():
    whole, half = (named(solved_part("sudden_expansion", 1e-4, half=h)) for h in (False, True))
    for figure in ("area inlet", "flow_rate outlet", "total_pressure_drop inlet outlet", "force_x step", "dissipated_power"):
        key = tuple(figure.split())
        assert half[key].value == pytest.approx(whole[key].value, rel=0.01), figure
