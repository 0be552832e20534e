"""Every figure on plane Poiseuille, Hagen-Poiseuille and annular flow against closed forms, with its sign."""

import math

import pytest
from meshes import box_mesh
from solved import PIPE, SLOT, flow, named, solved, static, with_section

from fem_flow.case.quantities import QUANTITIES

MU, RHO, DEPTH, GAP, LENGTH, Q = 0.1, 3.0, 0.5, 2.0, 6.0, 0.4
V = Q / (DEPTH * GAP)
DROP = 12 * MU * V * LENGTH / GAP**2
HEAD = 0.5 * RHO * V**2
SLOT_ALPHA = 54 / 35


def slot(inlet=None, outlet=None, nx=6, ny=4, names=SLOT, **case):
    mesh = with_section(box_mesh(nx, ny, (0.0, LENGTH, 1.0, 1.0 + GAP), names), "throat", 0, LENGTH / 2)
    ports = {"inlet": inlet or flow(Q), "outlet": outlet or static(5.0)}
    return solved(mesh, ports=ports, depth=DEPTH, density=RHO, viscosity=MU, **case)


@pytest.fixture(scope="module")
def planar():
    return named(slot(legs={"inlet": 2.0, "outlet": 4.0}, heat_capacity=2000.0))


def at(found, key):
    return found[tuple(key.split())].value


SLOT_FIGURES = {
    "flow_rate inlet": Q,
    "flow_rate outlet": -Q,
    "flow_rate throat": Q,
    "mean_velocity inlet": V,
    "mean_velocity outlet": -V,
    "mean_velocity throat": V,
    "area inlet": DEPTH * GAP,
    "area throat": DEPTH * GAP,
    "static_pressure inlet": 5.0 + DROP,
    "static_pressure outlet": 5.0,
    "static_pressure throat": 5.0 + DROP / 2,
    "total_pressure inlet": 5.0 + DROP + SLOT_ALPHA * HEAD,
    "total_pressure outlet": 5.0 + SLOT_ALPHA * HEAD,
    "total_pressure throat": 5.0 + DROP / 2 + SLOT_ALPHA * HEAD,
    "kinetic_energy_coefficient inlet": SLOT_ALPHA,
    "kinetic_energy_coefficient outlet": SLOT_ALPHA,
    "kinetic_energy_coefficient throat": SLOT_ALPHA,
    "hydraulic_diameter inlet": 2 * GAP,
    "reynolds_number outlet": RHO * V * 2 * GAP / MU,
    "flow_share outlet": 1.0,
    "static_pressure_drop inlet outlet": DROP,
    "total_pressure_drop inlet outlet": DROP,
    "hydraulic_resistance inlet outlet": DROP / Q,
    "flow_coefficient_kv inlet outlet": Q * 3600 * math.sqrt(RHO / 1000 / (DROP / 1e5)),
    "flow_coefficient_cv inlet outlet": Q / 3.785411784e-3 * 60 * math.sqrt(RHO / 1000 / (DROP / 6894.757293168361)),
    "discharge_coefficient throat": Q / (DEPTH * GAP * math.sqrt(2 * DROP / RHO)),
    "force_x low": MU * 6 * V / GAP * LENGTH * DEPTH,
    "force_x_viscous low": MU * 6 * V / GAP * LENGTH * DEPTH,
    "force_y low": -(5.0 + DROP / 2) * LENGTH * DEPTH,
    "force_y high": (5.0 + DROP / 2) * LENGTH * DEPTH,
    "force_y_pressure high": (5.0 + DROP / 2) * LENGTH * DEPTH,
    # moment of p (pushing along +y at x) and of the shear (pulling along +x at y = 3) about the origin, anticlockwise
    "torque high": DEPTH * (5.0 * LENGTH**2 / 2 + DROP * LENGTH**2 / 6) - (1 + GAP) * MU * 6 * V / GAP * LENGTH * DEPTH,
    "wall_shear_mean low": MU * 6 * V / GAP,
    "wall_shear_min low": MU * 6 * V / GAP,
    "wall_shear_max low": MU * 6 * V / GAP,
    "wall_shear_p99 low": MU * 6 * V / GAP,
    "wall_shear_max_at low": 0.0,
    "dissipated_power": DROP * Q,
    "pressure_min": 5.0,
    "temperature_rise": DROP / (RHO * 2000.0),
}


@pytest.mark.parametrize("figure", SLOT_FIGURES)
def test_plane_poiseuille(planar, figure):
    assert at(planar, figure) == pytest.approx(SLOT_FIGURES[figure], rel=1e-10)


ZERO = ("excess_pressure_drop inlet outlet", "loss_coefficient inlet outlet", "force_x_pressure low", "force_y_viscous high")


@pytest.mark.parametrize("figure", ZERO)
def test_plane_poiseuille_has_no(planar, figure):
    """Full legs leave no excess, a flat wall along x feels no pressure along x and no shear along y."""
    assert abs(at(planar, figure)) < 1e-11


def test_every_figure_has_the_unit_of_the_table(planar):
    assert all(n.unit == QUANTITIES[n.name].unit for n in planar.values())


def test_units_of_flow_coefficients(planar):
    """1 US gallon is 231 cubic inches, 1 psi is a pound force on a square inch: Cv / Kv = 1.15610."""
    assert at(planar, "flow_coefficient_cv inlet outlet") / at(planar, "flow_coefficient_kv inlet outlet") == pytest.approx(
        1 / (231 * 0.0254**3 * 60) / math.sqrt(1e5 / (0.45359237 * 9.80665 / 0.0254**2)), rel=1e-12
    )


PIPE_R, PIPE_L, PIPE_Q = 0.5, 4.0, 0.3
PIPE_V = PIPE_Q / (math.pi * PIPE_R**2)
PIPE_DROP = 8 * MU * PIPE_V * PIPE_L / PIPE_R**2
PIPE_FIGURES = {
    "flow_rate inlet": PIPE_Q,
    "area outlet": math.pi * PIPE_R**2,
    "mean_velocity outlet": -PIPE_V,
    "kinetic_energy_coefficient inlet": 2.0,
    "hydraulic_diameter inlet": 2 * PIPE_R,
    "static_pressure_drop inlet outlet": PIPE_DROP,
    "total_pressure outlet": 7.0 + RHO * PIPE_V**2,
    "force_x bore": PIPE_DROP * math.pi * PIPE_R**2,
    "wall_shear_mean bore": 4 * MU * PIPE_V / PIPE_R,
    "wall_shear_max bore": 4 * MU * PIPE_V / PIPE_R,
    "dissipated_power": PIPE_DROP * PIPE_Q,
}


@pytest.fixture(scope="module")
def pipe():
    mesh = box_mesh(6, 3, (0.0, PIPE_L, 0.0, PIPE_R), PIPE)
    ports = {"inlet": flow(PIPE_Q), "outlet": static(7.0)}
    return named(solved(mesh, "axisymmetric", ports=ports, density=RHO, viscosity=MU, legs={"inlet": 1.0, "outlet": 3.0}))


@pytest.mark.parametrize("figure", PIPE_FIGURES)
def test_hagen_poiseuille_of_the_full_turn(pipe, figure):
    assert at(pipe, figure) == pytest.approx(PIPE_FIGURES[figure], rel=1e-10)


def test_axisymmetric_parts_have_no_lateral_force_and_no_torque(pipe):
    assert not {n for n, *_ in pipe if n.startswith("force_y") or n == "torque"}


def test_full_legs_of_a_pipe_leave_no_excess(pipe):
    assert abs(at(pipe, "excess_pressure_drop inlet outlet")) < 1e-11 * PIPE_DROP


def test_annulus():
    a, b, length, q = 0.4, 1.0, 2.0, 0.3
    names = {**SLOT, "bottom": ("shaft", "wall"), "top": ("bore", "wall")}
    mesh = box_mesh(8, 12, (0.0, length, a, b), names)
    found = named(
        solved(mesh, "axisymmetric", ports={"inlet": flow(q), "outlet": static(0.0)}, viscosity=MU, legs={"inlet": length})
    )
    log = math.log(b / a)
    drop = 8 * MU * length * q / (math.pi * (b**4 - a**4 - (b**2 - a**2) ** 2 / log))
    shaft = drop / length / 4 * abs(2 * a - (b**2 - a**2) / (a * log))  # mu du/dr of the exact profile
    assert at(found, "total_pressure_drop inlet outlet") == pytest.approx(drop, rel=1e-6)
    assert at(found, "hydraulic_diameter inlet") == pytest.approx(2 * (b - a), rel=1e-12)
    assert at(found, "wall_shear_mean shaft") == pytest.approx(shaft, rel=1e-3)
    assert at(found, "force_x shaft") + at(found, "force_x bore") == pytest.approx(drop * math.pi * (b**2 - a**2), rel=3e-5)
    assert abs(at(found, "excess_pressure_drop inlet outlet")) < 1e-6 * drop
