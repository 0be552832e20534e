"""Figures of ports and sections and between ports: directions, legs, several outlets, radial ports, sliding walls."""

import math

import numpy as np
import pytest
from meshes import box_mesh
from solved import CLOSED, SLIP, SLOT, flow, named, renamed, sliding, solved, static, step, total, values, with_section

from fem_flow.case.quantities import QUANTITIES
from fem_flow.flow.problem import solve
from fem_flow.measure.all import measure
from fem_flow.measure.section import stations

MU, RHO, DEPTH, GAP, LENGTH, Q = 0.1, 3.0, 0.5, 2.0, 6.0, 0.4
V = Q / (DEPTH * GAP)
DROP = 12 * MU * V * LENGTH / GAP**2
HEAD = 0.5 * RHO * V**2
SLOT_ALPHA = 54 / 35


def slot(inlet=None, outlet=None, nx=6, ny=4, names=SLOT, **case):
    mesh = with_section(box_mesh(nx, ny, (0.0, LENGTH, 1.0, 1.0 + GAP), names), "throat", 0, LENGTH / 2)
    ports = {"inlet": inlet or flow(Q), "outlet": outlet or static(5.0)}
    return solved(mesh, ports=ports, depth=DEPTH, density=RHO, viscosity=MU, **case)


def at(found, key):
    return found[tuple(key.split())].value


def test_flow_out_at_the_first_port_turns_the_signs():
    found = named(slot(flow(-Q), static(5.0), legs={"inlet": 2.0, "outlet": 4.0}))
    assert at(found, "flow_rate inlet") == pytest.approx(-Q, rel=1e-12)
    assert at(found, "flow_rate throat") == pytest.approx(-Q, rel=1e-12)
    assert at(found, "total_pressure_drop inlet outlet") == pytest.approx(-DROP, rel=1e-10)
    assert at(found, "hydraulic_resistance inlet outlet") == pytest.approx(DROP / Q, rel=1e-10)
    assert at(found, "flow_coefficient_kv inlet outlet") == pytest.approx(
        Q * 3600 * math.sqrt(RHO / 1000 / (DROP / 1e5)), rel=1e-10
    )
    assert at(found, "discharge_coefficient throat") == pytest.approx(Q / (DEPTH * GAP * math.sqrt(2 * DROP / RHO)), rel=1e-10)
    assert at(found, "force_x low") == pytest.approx(-MU * 6 * V / GAP * LENGTH * DEPTH, rel=1e-10)
    assert at(found, "flow_share inlet") == 1.0
    assert ("flow_share", "outlet") not in found
    assert abs(at(found, "excess_pressure_drop inlet outlet")) < 1e-11


def test_loss_coefficient_is_a_loss_in_either_direction():
    """No legs declared: the friction of the whole slot over the head, positive whichever way the flow goes."""
    for sign in (1, -1):
        n = named(slot(flow(sign * Q), static(5.0)))["loss_coefficient", "inlet", "outlet"]
        assert n.value == pytest.approx(DROP / HEAD, rel=1e-10)
    assert n.note == "V is the mean velocity at inlet; the part declares no straight legs, so their friction is in it"


def test_excess_drop_without_legs_is_the_total_drop_and_says_so():
    n = named(slot())["excess_pressure_drop", "inlet", "outlet"]
    assert n.value == pytest.approx(DROP, rel=1e-10)
    assert n.note == "the part declares no straight legs: this is the total drop"


def test_loss_coefficient_names_the_faster_port():
    mesh = step(2)
    found = named(
        solved(mesh, ports={"inlet": flow(0.2), "outlet": static(0.0)}, depth=1.0, legs={"inlet": 2.0, "outlet": 6.0})
    )
    n = found["loss_coefficient", "inlet", "outlet"]
    assert n.note == "V is the mean velocity at inlet"
    assert n.value == pytest.approx(at(found, "excess_pressure_drop inlet outlet") / (0.5 * 0.2**2), rel=1e-12)


def branches():
    """A slot whose right side is two outlets with a wall between."""
    mesh = box_mesh(6, 6, (0.0, 2.0, 0.0, 3.0), SLOT)
    mesh = renamed(mesh, "outlet", "upper", lambda x, y: y > 2, "port")
    mesh = renamed(mesh, "outlet", "middle", lambda x, y: 1 < y < 2)
    return mesh


def test_excess_between_two_outlets_takes_each_leg_with_its_own_sign():
    """Both legs lose pressure outwards, so at the junction outlet lies above by its friction and upper by its own."""
    ports = {"inlet": flow(1.0), "outlet": static(0.3), "upper": static(0.0)}
    legs = {"outlet": 0.2, "upper": 0.5}
    found = named(solved(branches(), ports=ports, legs=legs, inertia=False, viscosity=MU))
    q1, q2 = -at(found, "flow_rate outlet"), -at(found, "flow_rate upper")
    assert q1 > 0
    assert q2 > 0
    # each outlet is 1 wide between walls
    expected = 0.3 + 12 * MU * (q1 * 0.2 - q2 * 0.5)
    assert at(found, "excess_pressure_drop outlet upper") == pytest.approx(expected, rel=1e-9)
    assert ("loss_coefficient", "outlet", "upper") not in found
    assert ("hydraulic_resistance", "outlet", "upper") not in found
    assert ("hydraulic_resistance", "inlet", "upper") not in found


def test_each_pair_once_in_the_order_of_the_ports():
    ports = {"upper": static(0.0), "inlet": flow(1.0), "outlet": static(0.0)}
    pairs = [n.of for n in measure(solved(branches(), ports=ports)) if n.name == "total_pressure_drop"]
    assert pairs == [("upper", "inlet"), ("upper", "outlet"), ("inlet", "outlet")]


def test_flow_shares_are_positive_and_add_up():
    ports = {"inlet": flow(1.0), "outlet": static(0.1), "upper": static(0.0)}
    found = named(solved(branches(), ports=ports))
    shares = [n.value for n in found.values() if n.name == "flow_share"]
    assert len(shares) == 2
    assert min(shares) > 0
    assert sum(shares) == pytest.approx(1.0, rel=1e-12)
    assert at(found, "flow_share upper") == pytest.approx(-at(found, "flow_rate upper"), rel=1e-9)


def test_no_discharge_coefficient_with_two_outlets():
    mesh = with_section(branches(), "throat", 0, 1.0)
    assert ("discharge_coefficient", "throat") not in named(
        solved(mesh, ports={"inlet": flow(1.0), "outlet": static(0), "upper": static(0)})
    )


def test_closed_port_has_no_flow_weighted_figures():
    ports = {"inlet": flow(1.0), "outlet": static(0.0), "upper": CLOSED}
    found = named(solved(branches(), ports=ports))
    assert found["flow_rate", "upper"].value == 0.0
    assert math.isnan(at(found, "total_pressure upper"))
    assert found["total_pressure", "upper"].note == "the port is closed, so there is no flow-weighted mean"
    assert found["static_pressure", "upper"].note == "the port is closed; this is the area mean"
    assert not [k for k in found if len(k) == 3 and "upper" in k]


def test_static_pressure_rising_along_the_flow_has_no_flow_coefficient():
    found = named(radial(4, True, SLIP))
    assert at(found, "static_pressure_drop inlet outlet") < 0
    n = found["flow_coefficient_kv", "inlet", "outlet"]
    assert math.isnan(n.value)
    assert n.note == "the static pressure rises in the direction of flow, so there is no flow coefficient"


WITH_KINETIC = (
    "total_pressure inlet",
    "total_pressure_drop inlet outlet",
    "excess_pressure_drop inlet outlet",
    "loss_coefficient inlet outlet",
    "hydraulic_resistance inlet outlet",
    "discharge_coefficient throat",
)


def test_without_inertia_the_kinetic_part_is_left_out_and_the_definition_says_so():
    mesh = step(2)
    mesh = with_section(mesh, "throat", 0, 1.0)
    found = named(solved(mesh, ports={"inlet": flow(1.0), "outlet": static(0.0)}, inertia=False))
    assert at(found, "total_pressure inlet") == at(found, "static_pressure inlet")
    assert at(found, "total_pressure_drop inlet outlet") == at(found, "static_pressure_drop inlet outlet")
    tail = "; inertia = false: the kinetic part of every total pressure is left out"
    told = {" ".join(k) for k, n in found.items() if n.definition.endswith(tail)}
    assert told == {*WITH_KINETIC, "total_pressure outlet", "total_pressure throat"}
    assert all(n.definition == QUANTITIES[n.name].definition for k, n in found.items() if " ".join(k) not in told)


def test_a_section_at_constant_y_counts_flow_towards_plus_y():
    names = {"bottom": ("inlet", "port"), "top": ("outlet", "port"), "left": ("left", "wall"), "right": ("right", "wall")}
    for sign in (1, -1):
        mesh = with_section(box_mesh(4, 6, (0.0, 1.0, 0.0, 3.0), names), "middle", 1, 1.5)
        found = named(solved(mesh, ports={"inlet": flow(sign * 2.0), "outlet": static(0.0)}))
        assert at(found, "flow_rate middle") == pytest.approx(sign * 2.0, rel=1e-12)


def test_symmetry_line_doubles_the_hydraulic_diameter():
    names = {**SLOT, "bottom": ("symmetry", "symmetry")}
    found = named(solved(box_mesh(4, 3, (0, 2, 0, 1), names), ports={"inlet": flow(1.0), "outlet": static(0.0)}))
    assert at(found, "hydraulic_diameter inlet") == pytest.approx(4.0, rel=1e-12)


def radial(ny, inertia, walls, q=1.0):
    """Flow outwards between two discs 0.5 apart, from a port at r = 1 to one at r = 2."""
    names = {"bottom": ("inlet", "port"), "top": ("outlet", "port"), "left": ("back", "wall"), "right": ("front", "wall")}
    mesh = box_mesh(ny // 2, ny, (0.0, 0.5, 1.0, 2.0), names)
    conditions = {"back": walls, "front": walls} if walls else {}
    return solved(
        mesh, "axisymmetric", ports={"inlet": flow(q), "outlet": static(3.0)}, walls=conditions, inertia=inertia, viscosity=MU
    )


def test_a_radial_port_at_3_pa_is_at_3_pa():
    """Creeping flow between frictionless discs has one pressure everywhere; the normal viscous stress of ports is taken out."""
    found = [at(named(radial(ny, False, SLIP)), "static_pressure inlet") - 3.0 for ny in (4, 8)]
    velocity = 1.0 / (2 * math.pi * 0.5)
    assert abs(found[1]) < 1e-3 * 2 * MU * velocity
    assert abs(found[1]) < abs(found[0]) / 6


def test_radial_flow_keeps_its_total_pressure():
    found = named(radial(8, True, SLIP))
    velocity = 1.0 / (2 * math.pi * 0.5)
    assert at(found, "static_pressure_drop inlet outlet") == pytest.approx(-0.5 * velocity**2 * (1 - 1 / 4), rel=1e-4)
    # what is left is the dissipation of radial flow: mu (2 u_r/r)^2 integrated, 4 pi mu ... over Q
    lost = at(named(radial(8, True, SLIP)), "dissipated_power")
    assert lost > 0
    viscous_ports = 2 * MU * velocity * (1 - 1 / 4)  # power of the normal viscous stress at the ports over Q
    assert lost == pytest.approx(viscous_ports * velocity * 2 * math.pi * 0.5, rel=1e-3)


@pytest.mark.parametrize("walls", [None, SLIP])
def test_port_pressure_from_the_reaction_is_the_section_integral_in_the_limit(walls):
    gaps = []
    for ny in (6, 12):
        solution = radial(ny, True, walls)
        port, u = solution.boundaries["inlet"], solution.state.u
        speed = port.normal_velocity(u)
        integral = float((port.w * port.pressure(solution.state.p) * speed).sum() / (port.w * speed).sum())
        gaps.append(abs(stations(solution)["inlet"].static - (integral * solution.scales.pressure + solution.scales.level)))
    assert gaps[1] < gaps[0] / 2.5


def test_total_pressure_port():
    """A reservoir at the inlet: static plus developed kinetic pressure is its total pressure."""
    found = named(slot(total(30.0), static(5.0)))
    assert at(found, "total_pressure inlet") == pytest.approx(30.0, rel=1e-9)
    v = at(found, "mean_velocity inlet")
    assert 30.0 - at(found, "static_pressure inlet") == pytest.approx(SLOT_ALPHA * 0.5 * RHO * v**2, rel=1e-6)


def test_sliding_wall_couette():
    """Between ports of one pressure the wall drags the fluid: force against the motion, power in equals dissipation."""
    speed = 0.7
    found = named(slot(static(0.0), static(0.0), walls={"high": sliding(speed)}))
    drag = MU * speed / GAP * LENGTH * DEPTH
    assert at(found, "flow_rate inlet") == pytest.approx(speed / 2 * GAP * DEPTH, rel=1e-10)
    assert at(found, "force_x high") == pytest.approx(-drag, rel=1e-10)
    assert at(found, "force_x low") == pytest.approx(drag, rel=1e-10)
    assert at(found, "dissipated_power") == pytest.approx(drag * speed, rel=1e-10)
    assert at(found, "kinetic_energy_coefficient inlet") == pytest.approx(2.0, rel=1e-10)


def test_legs_of_a_couette_flow_have_no_friction_but_those_of_poiseuille_have():
    """A wall that slides along the legs carries flow without a pressure gradient: flow V = speed/2 needs no drop."""
    found = named(slot(flow(0.7 / 2 * GAP * DEPTH), static(0.0), walls={"high": sliding(0.7)}, legs={"inlet": 6.0}))
    assert np.abs([at(found, "excess_pressure_drop inlet outlet"), at(found, "total_pressure_drop inlet outlet")]).max() < 1e-12


def test_values_do_not_depend_on_the_level_of_the_ports():
    keys = ("total_pressure_drop inlet outlet", "force_x low", "force_x_viscous low", "force_y_viscous low", "dissipated_power")
    low, high = (values(slot(outlet=static(p)), *keys) for p in (5.0, 1e7))
    assert np.abs(np.subtract(low, high)).max() < 1e-8


def test_solving_twice_gives_the_same_numbers():
    first = slot()
    again = solve(first.mesh, first.case)
    assert [n.value for n in measure(first)] == pytest.approx(
        [n.value for n in measure(again)], rel=1e-12, abs=1e-12, nan_ok=True
    )
