"""Reactions split between walls, forces, and the balances of energy and momentum."""

import math

import numpy as np
import pytest
from meshes import box_mesh
from solved import PIPE, SHUT, SLIP, SLOT, flow, named, renamed, round_body, sliding, solved, static, step, values

from fem_flow.measure.energy import (
    boundary_power,
    discrete_energy_defect,
    discrete_momentum_defect,
    dissipation,
    momentum_terms,
    wall_power,
)
from fem_flow.measure.force import wall_force
from fem_flow.measure.rim import rim_of

FORCES = ("force_x", "force_x_pressure", "force_x_viscous", "force_y", "force_y_pressure", "force_y_viscous", "torque")


def bulge(x, y):
    return x, y * (1 + 0.4 * np.sin(np.pi * x / 3) ** 2)


def channel(nx=12, ny=6, ports=None, names=SLOT, bend=None, kind="planar", viscosity=0.1, **case):
    ports = ports or {"inlet": flow(2.0), "outlet": static(5.0)}
    return solved(
        box_mesh(nx, ny, (0.0, 3.0, 0.0, 1.0), names, bend), kind, ports=ports, density=3.0, viscosity=viscosity, **case
    )


def test_a_wall_cut_in_two_names_gives_each_its_share():
    mesh = renamed(box_mesh(9, 4, (0.0, 3.0, 0.0, 1.0), SLOT), "low", "low_b", lambda x, y: x > 1.0)
    found = named(solved(mesh, ports={"inlet": flow(2.0), "outlet": static(5.0)}, viscosity=0.1))
    shear = 6 * 0.1 * 2.0
    assert found["force_x", "low"].value == pytest.approx(shear * 1.0, rel=1e-11)
    assert found["force_x", "low_b"].value == pytest.approx(shear * 2.0, rel=1e-11)
    assert abs(found["force_x_pressure", "low_b"].value) < 1e-12


def test_cutting_names_changes_no_sum():
    """On a curved wall, at a step's corners too: forces and torque of the pieces add up to those of the whole."""
    for mesh, name in ((box_mesh(12, 6, (0.0, 3.0, 0.0, 1.0), SLOT, bulge), "high"), (step(3, whole=True), "block")):
        ports = {"inlet": flow(2.0), "outlet": static(5.0)}
        whole = named(solved(mesh, ports=ports, viscosity=0.1))
        cut = named(solved(renamed(mesh, name, "piece", lambda x, y: x > 1.6), ports=ports, viscosity=0.1))
        for figure in FORCES:
            total = cut[figure, name].value + cut[figure, "piece"].value
            assert total == pytest.approx(whole[figure, name].value, rel=1e-9, abs=1e-9), figure


def test_a_wall_that_meets_a_port_at_100_bar_feels_none_of_it():
    found = named(channel(ports={"inlet": static(1e7 + 7.2), "outlet": static(1e7)}))
    assert found["force_x", "low"].value == pytest.approx(3.6, rel=1e-8)
    assert abs(found["force_x_pressure", "low"].value) < 1e-8


def test_pressure_from_100_bar_to_zero():
    """The whole drop over the wall's own length: the first node does not take the port's load."""
    drop = 1e7
    found = named(channel(ports={"inlet": static(drop), "outlet": static(0.0)}, inertia=False))
    assert found["force_x", "low"].value == pytest.approx(drop / 2, rel=1e-10)


def test_a_constant_added_to_the_ports_pushes_on_the_closure_only():
    keys = ("force_x high", "force_x_pressure high", "force_x_viscous high", "torque high")
    low = values(channel(bend=bulge, nx=24), *keys)
    high = values(channel(bend=bulge, nx=24, ports={"inlet": flow(2.0), "outlet": static(1005.0)}), *keys)
    # the ends of the curved wall are at y = 1: its closure along x is nothing, its moment that of a flat wall at x = 1.5
    assert np.subtract(high, low)[:3] == pytest.approx([0.0, 0.0, 0.0], abs=1e-9)
    assert high[3] - low[3] == pytest.approx(1000.0 * 3.0 * 1.5, rel=1e-9)


def test_pressure_pushes_a_wall_out_of_the_fluid():
    """A widening wall: a constant pressure pushes it along -x by p times what the section gains."""
    found = [
        values(channel(bend=lambda x, y: (x, y * (1 + x / 6)), ports={"inlet": flow(2.0), "outlet": static(p)}), "force_x high")
        for p in (0.0, 1000.0)
    ]
    assert found[1][0] - found[0][0] == pytest.approx(-1000.0 * 0.5, rel=1e-9)


def test_force_on_a_cone_of_the_full_turn():
    """Axisymmetric: a constant pressure pushes a widening bore by p times the area gained, along -x."""
    found = [
        values(
            channel(
                kind="axisymmetric",
                names=PIPE,
                bend=lambda x, y: (x, y * (1 + x / 6)),
                ports={"inlet": flow(0.2), "outlet": static(p)},
            ),
            "force_x bore",
        )[0]
        for p in (0.0, 1000.0)
    ]
    assert found[1] - found[0] == pytest.approx(-1000.0 * math.pi * (1.5**2 - 1.0), rel=1e-9)


def test_force_on_a_body_is_minus_that_of_everything_else():
    """Force on a cylinder against pressure, shear and momentum of all others, with the term of the discrete divergence."""
    solution = solved(round_body(), ports={"inlet": flow(2.0), "outlet": static(0.0)}, viscosity=0.1)
    terms = momentum_terms(solution)
    others = sum(t for n, t in terms.items() if n != "body")[0] * solution.scales.force
    force = wall_force(solution, "body")[0][0]
    assert force > 0
    assert force == pytest.approx(others, rel=2e-3)
    assert abs(discrete_momentum_defect(solution)) < 1e-10


def test_symmetric_flow_has_no_lift():
    found = named(solved(round_body(), ports={"inlet": flow(2.0), "outlet": static(0.0)}, viscosity=1.0, inertia=False))
    assert abs(found["force_y", "body"].value) < 1e-2 * found["force_x", "body"].value


IDENTITIES = {
    "planar": {"bend": bulge},
    "creeping": {"bend": bulge, "inertia": False},
    "pressures": {"bend": bulge, "ports": {"inlet": static(5.5), "outlet": static(5.0)}},
    "flow out": {"bend": bulge, "ports": {"inlet": flow(-1.0), "outlet": static(5.0)}},
    "sliding": {"bend": bulge, "walls": {"high": sliding(0.8)}},
    "slip": {"bend": bulge, "walls": {"low": SLIP}},
    "depth": {"bend": bulge, "depth": 0.2},
    "axisymmetric": {"bend": bulge, "kind": "axisymmetric", "names": PIPE},
    "axisymmetric sliding": {"kind": "axisymmetric", "names": PIPE, "bend": bulge, "walls": {"bore": sliding(-0.4)}},
    "symmetry": {"bend": bulge, "names": {**SLOT, "bottom": ("symmetry", "symmetry")}},
}


@pytest.mark.parametrize("situation", IDENTITIES)
def test_discrete_identities_close(situation):
    solution = channel(**IDENTITIES[situation])
    assert abs(discrete_energy_defect(solution)) < 1e-10
    assert abs(discrete_momentum_defect(solution)) < 1e-10


def test_discrete_identities_in_a_cavity():
    solution = solved(box_mesh(8, 8, names=SHUT), walls={"lid": sliding(1.0)}, viscosity=0.05)
    assert abs(discrete_energy_defect(solution)) < 1e-10
    assert abs(discrete_momentum_defect(solution)) < 1e-10


def test_the_identities_see_a_field_that_solves_nothing():
    solution = channel(bend=bulge)
    inner = np.setdiff1d(np.arange(solution.space.n_velocity), rim_of(solution).boundary.nodes)
    solution.state.u[:, inner] *= 1.001
    assert abs(discrete_energy_defect(solution)) > 1e-4
    assert abs(discrete_momentum_defect(solution)) > 1e-5


def physical(n, kind, names):
    solution = channel(nx=2 * n, ny=n, bend=bulge, kind=kind, names=names)
    s = solution.scales
    terms = [t[0] for t in momentum_terms(solution).values()]
    rim = rim_of(solution).boundary
    u = solution.state.u
    square = rim.at_points(u[0]) ** 2 + rim.at_points(u[1]) ** 2
    kinetic = 0.5 * solution.rho * float((rim.w * square * rim.normal_velocity(u)).sum())
    lost = dissipation(solution)
    return abs(sum(terms)) / max(map(abs, terms)), abs((boundary_power(solution) - kinetic) * s.power - lost) / lost


@pytest.mark.parametrize(("kind", "names"), [("planar", SLOT), ("axisymmetric", PIPE)])
def test_physical_balances_fall_at_the_order_of_the_method(kind, names):
    """Order 3 or better on meshes 8, 16 (the gap is the flux of the divergence that P1 does not see)."""
    coarse, fine = physical(8, kind, names), physical(16, kind, names)
    assert fine[0] < coarse[0] / 7
    assert fine[1] < coarse[1] / 7
    assert max(fine) < 1e-4


def test_power_of_a_sliding_wall():
    """Couette-Poiseuille: wall power is the force that holds the wall against the fluid times its speed."""
    solution = channel(walls={"high": sliding(0.8)})
    force = named(solution)["force_x", "high"].value
    assert wall_power(solution) * solution.scales.power == pytest.approx(-force * 0.8, rel=1e-10)


def test_regions_share_the_dissipation():
    mesh = box_mesh(6, 4, (0.0, 3.0, 0.0, 1.0), SLOT)
    left = np.flatnonzero(mesh.points[mesh.cells[:, :3]].mean(axis=1)[:, 0] < 1.0)
    mesh.regions["entry"] = left
    found = named(solved(mesh, ports={"inlet": flow(2.0), "outlet": static(5.0)}))
    assert found["dissipated_power", "entry"].value == pytest.approx(found["dissipated_power",].value / 3, rel=1e-10)


# --- a share of the part is modelled: numbers are those of the whole


def half_and_whole(**case):
    whole = box_mesh(8, 8, (0.0, 3.0, -1.0, 1.0), SLOT, lambda x, y: (x, y * (1 - 0.2 * np.sin(np.pi * x / 3) ** 2)))
    half = box_mesh(
        8,
        4,
        (0.0, 3.0, 0.0, 1.0),
        {**SLOT, "bottom": ("symmetry", "symmetry")},
        lambda x, y: (x, y * (1 - 0.2 * np.sin(np.pi * x / 3) ** 2)),
    )
    case = {"ports": {"inlet": flow(2.0), "outlet": static(5.0)}, "viscosity": 1.0, "heat_capacity": 10.0, "depth": 0.4, **case}
    return named(solved(half, **case)), named(solved(whole, **case))


def test_a_half_model_gives_the_numbers_of_the_whole_part():
    half, whole = half_and_whole()
    for figure in (
        "flow_rate inlet",
        "area inlet",
        "mean_velocity inlet",
        "reynolds_number inlet",
        "total_pressure_drop inlet outlet",
        "hydraulic_resistance inlet outlet",
        "dissipated_power",
        "temperature_rise",
        "wall_shear_mean high",
    ):
        key = tuple(figure.split())
        assert half[key].value == pytest.approx(whole[key].value, rel=2e-3), figure
    assert half["force_x", "high"].value == pytest.approx(
        whole["force_x", "high"].value + whole["force_x", "low"].value, rel=2e-3
    )
    assert half["force_x_viscous", "high"].value == pytest.approx(2 * whole["force_x_viscous", "high"].value, rel=2e-3)
    assert half["force_y", "high"].value == 0.0
    assert abs(half["torque", "high"].value) < 1e-12


def test_torque_with_a_mirror_off_the_origin():
    """The wall and its image about y = 1: their force along x acts on that line."""
    names = {**SLOT, "bottom": ("symmetry", "symmetry")}
    found = named(solved(box_mesh(4, 4, (0.0, 3.0, 1.0, 2.0), names), ports={"inlet": flow(2.0), "outlet": static(1e4)}))
    assert found["torque", "high"].value == pytest.approx(-1.0 * found["force_x", "high"].value, rel=1e-10)


def test_two_parallel_mirrors_bound_one_cell_of_a_row():
    """Between them the figures are those of the cell."""
    names = {**SLOT, "bottom": ("symmetry", "symmetry"), "top": ("symmetry", "symmetry")}
    found = named(solved(box_mesh(4, 4, (0.0, 3.0, 0.0, 1.0), names), ports={"inlet": flow(2.0), "outlet": static(0.0)}))
    assert found["area", "inlet"].value == pytest.approx(1.0)
    assert found["mean_velocity", "inlet"].value == pytest.approx(2.0)


def test_a_quarter_model_counts_four_times():
    names = {
        "left": ("end", "symmetry"),
        "bottom": ("symmetry", "symmetry"),
        "right": ("outlet", "port"),
        "top": ("inlet", "port"),
    }
    solution = solved(box_mesh(4, 4, names=names), ports={"inlet": flow(4.0), "outlet": static(0.0)}, viscosity=1.0)
    found = named(solution)
    assert found["area", "inlet"].value == pytest.approx(4.0)
    assert found["mean_velocity", "inlet"].value == pytest.approx(1.0)
