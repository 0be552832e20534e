"""A case checked against a part's declaration: SI numbers, signs, defaults, and the filled case."""

import json
import math
import pickle
import time
from dataclasses import replace

import pytest
from declarations import CAVITY, CAVITY_WALLS, MANIFOLD, MANIFOLD_WALLS, POPPET, POPPET_WALLS

from fem_flow.case.check import parameter_values, resolve, script_reference
from fem_flow.case.declaration import Parameter
from fem_flow.case.model import Case
from fem_flow.case.quantities import QUANTITIES
from fem_flow.case.resolved import Accuracy, PortCondition, WallCondition
from fem_flow.case.write import HEADER, case_toml
from fem_flow.errors import CaseError
from fem_flow.units import root_of

OIL = {"name": "ISO VG 46", "temperature": "40 degC"}
PORTS = {"inlet": {"flow_in": "12 L/min"}, "outlet": {"static_pressure": "0 bar"}}


def poppet(**keys):
    return Case(**{"part": {"script": "poppet_valve"}, "fluid": OIL, "ports": PORTS, **keys})


def manifold(**keys):
    ports = {
        "inlet": {"flow_in": "1 L/min"},
        "outlet_1": {"static_pressure": "0 bar"},
        "outlet_2": {"static_pressure": "0 bar"},
    }
    return Case(**{"part": {"script": "manifold"}, "fluid": OIL, "model": {"depth": "20 mm"}, "ports": ports, **keys})


def cavity(**keys):
    walls = {"lid": {"velocity": "0.1 m/s"}}
    return Case(**{"part": {"script": "cavity"}, "fluid": OIL, "model": {"depth": "1 m"}, "walls": walls, **keys})


def solved(case):
    declaration, walls = {
        "poppet_valve": (POPPET, POPPET_WALLS),
        "manifold": (MANIFOLD, MANIFOLD_WALLS),
        "cavity": (CAVITY, CAVITY_WALLS),
    }[script_reference(case)]
    return resolve(case, declaration, walls)


# --- parameters


def test_parameters_in_the_units_of_the_script():
    case = poppet(part={"script": "poppet_valve", "bore": "1.6 cm", "seat_angle": "0.5 rad", "ratio": 2})
    values = parameter_values(case, POPPET)
    assert values == {
        "bore": pytest.approx(16.0),
        "lift": 1.0,
        "seat_angle": 0.5,
        "stem": "plain",
        "guides": 0,
        "ratio": 2.0,
        "vented": False,
    }
    assert {k: type(v) for k, v in values.items()} == {
        "bore": float, "lift": float, "seat_angle": float, "stem": str, "guides": int, "ratio": float, "vented": bool,
    }  # fmt: skip
    assert parameter_values(poppet(), POPPET)["seat_angle"] == pytest.approx(math.pi / 4)
    assert parameter_values(manifold(), MANIFOLD)["pad"] == 20.0  # an area in the square of the script's unit
    assert parameter_values(manifold(part={"script": "manifold", "pad": "1 cm^2"}), MANIFOLD)["pad"] == pytest.approx(100.0)


def test_a_length_in_the_unit_of_the_script_is_exact():
    for number in ("0.1", "0.3", "1.2", "7.7"):
        case = poppet(part={"script": "poppet_valve", "lift": f"{number} mm"})
        assert parameter_values(case, POPPET)["lift"] == float(number)


@pytest.mark.parametrize("lift", ["0.05 mm", "50 um", "10 mm", "1 cm", "0.01 m"])
def test_limits_are_inclusive_in_every_unit(lift):
    parameter_values(poppet(part={"script": "poppet_valve", "lift": lift}), POPPET)


@pytest.mark.parametrize("lift", ["0.0499999 mm", "10.00001 mm"])
def test_just_outside_the_limits_is_refused(lift):
    with pytest.raises(CaseError, match=r"outside its limits; poppet_valve allows 0\.05 mm to 10 mm"):
        parameter_values(poppet(part={"script": "poppet_valve", "lift": lift}), POPPET)


def test_a_whole_float_is_a_count():
    assert parameter_values(poppet(part={"script": "poppet_valve", "guides": 2.0}), POPPET)["guides"] == 2


@pytest.mark.parametrize(
    ("name", "parameter", "sentence"),
    [
        ("script", Parameter("1 mm"), "parameter script is reserved (script, file, unit, kind, inside)"),
        ("a-b", Parameter("1 mm"), "parameter a-b is no name that a script can use as p.name"),
        ("lambda", Parameter("1 mm"), "parameter lambda is no name that a script can use as p.name"),
        ("gap", "1 mm", 'parameter gap is no Parameter; write for example Parameter("12 mm", low="2 mm", high="60 mm")'),
        ("gap", Parameter("wide"), 'parameter gap has the default "wide"; write "12 mm" for a length, 12.0 for a pure number, '
         "or give choices for a word"),
        ("gap", Parameter("1 mm", low=0.5), "parameter gap is declared wrongly: its default or a limit is 0.5 without a unit; "
         'write it as text with a unit, for example gap = "0.5 mm"'),
        ("gap", Parameter("1 mm", low="2 mm", high="3 mm"), "parameter gap is declared wrongly: its default or a limit is "
         '"1 mm", outside its own limits 2 mm to 3 mm'),
        ("gap", Parameter("1 mm", high="3 bar"), "parameter gap is declared wrongly: its default or a limit is "
         '"3 bar", a pressure, where a length is expected, for example gap = "1 mm"'),
        ("form", Parameter("round", choices=["flat"]), "parameter form is declared wrongly: its default or a limit is "
         '"round"; it can be flat'),
    ],
)  # fmt: skip
def test_a_wrong_declaration_is_the_scripts_fault(name, parameter, sentence):
    with pytest.raises(CaseError) as caught:
        parameter_values(poppet(), replace(POPPET, parameters={name: parameter}))
    assert str(caught.value) == f"poppet_valve.py: {sentence}"
    assert caught.value.reason == "declaration"


def test_a_script_in_no_length_unit_is_refused():
    with pytest.raises(CaseError) as caught:
        parameter_values(poppet(), replace(POPPET, unit="bar"))
    assert str(caught.value) == 'poppet_valve.py: unit is "bar"; write a length unit, for example unit = "mm"'


# --- conditions


@pytest.mark.parametrize(
    ("condition", "expected"),
    [
        ({"flow_in": "12 L/min"}, PortCondition("flow", 2e-4)),
        ({"flow_out": "12 L/min"}, PortCondition("flow", -2e-4)),
        ({"flow_in": "853.75 kg/s"}, PortCondition("flow", 1.0)),  # the oil has 853.75 kg/m^3 at 40 degC
        ({"flow_out": "853.75 kg/s"}, PortCondition("flow", -1.0)),
        ({"velocity_in": "3 m/s"}, PortCondition("velocity", 3.0)),
        ({"velocity_out": "3 m/s"}, PortCondition("velocity", -3.0)),
        ({"static_pressure": "2 bar"}, PortCondition("static_pressure", 2e5)),
        ({"static_pressure": "-0.5 bar"}, PortCondition("static_pressure", -5e4)),
        ({"total_pressure": "2 bar"}, PortCondition("total_pressure", 2e5)),
    ],
)
def test_port_conditions_in_si_with_their_sign(condition, expected):
    found = solved(poppet(ports={**PORTS, "inlet": condition})).ports["inlet"]
    assert found.what == expected.what
    assert found.value == pytest.approx(expected.value, rel=1e-12)


def test_ports_come_in_the_order_of_the_part():
    ports = {"outlet": {"static_pressure": "0 bar"}, "inlet": {"flow_in": "1 L/min"}}
    assert list(solved(poppet(ports=ports)).ports) == ["inlet", "outlet"]


def test_a_port_may_be_closed():
    case = manifold().with_(ports={"outlet_2": {"closed": True}})
    assert solved(case).ports["outlet_2"] == PortCondition("closed")


def test_walls_that_are_mentioned():
    walls = {"poppet": {"velocity": "-0.1 m/s"}, "seat": {"slip": True}, "housing": {"velocity": "0 m/s"}}
    assert solved(poppet(walls=walls)).walls == {
        "poppet": WallCondition("sliding", -0.1),
        "seat": WallCondition("slip"),
        "housing": WallCondition("rest"),
    }
    assert solved(poppet()).walls == {}


def test_a_moving_wall_may_be_all_that_drives():
    assert solved(cavity()).ports == {}
    still = {"inlet": {"static_pressure": "0 bar"}, "outlet": {"static_pressure": "0 bar"}}
    moving = {"poppet": {"velocity": "0.1 m/s"}}
    assert solved(poppet(ports=still, walls=moving)).ports["inlet"] == PortCondition("static_pressure", 0.0)
    assert solved(poppet(ports={**still, "outlet": {"closed": True}}, walls=moving)).ports["outlet"].what == "closed"
    assert solved(poppet(ports={"inlet": {"closed": True}, "outlet": {"closed": True}}, walls=moving)).walls


def test_pressures_at_both_ends_are_legal():
    ports = {"inlet": {"total_pressure": "2 bar"}, "outlet": {"static_pressure": "0 bar"}}
    assert solved(poppet(ports=ports)).ports["inlet"] == PortCondition("total_pressure", 2e5)


def test_a_pressure_of_zero_absolute_is_the_limit():
    below = {"inlet": {"flow_in": "1 L/min"}, "outlet": {"static_pressure": "-1 bar"}}
    assert solved(poppet(ports=below, model={"ambient": "1 bar"})).ambient == 1e5
    with pytest.raises(CaseError, match="below zero absolute"):
        solved(poppet(ports=below, model={"ambient": "0.99 bar"}))
    assert solved(poppet(ports=below)).ambient is None  # nothing to judge it by


# --- model


def test_model_defaults():
    r = solved(poppet())
    assert (r.inertia, r.ambient, r.depth, r.kind, r.title) == (True, None, None, "axisymmetric", "poppet_valve")
    r = solved(manifold(model={"depth": "2 cm", "inertia": False}, title="Two ways"))
    assert (r.inertia, r.depth, r.kind, r.title) == (False, 0.02, "planar", "Two ways")


def test_legs_in_metres():
    assert solved(poppet()).legs == {"inlet": pytest.approx(0.036)}
    assert solved(manifold()).legs is None


def test_air_takes_its_density_from_ambient():
    air = {"name": "dry air", "temperature": "20 degC"}
    dense = solved(poppet(fluid=air, model={"ambient": "5 bar"})).fluid
    assert dense.density == pytest.approx(5e5 / (287.055 * 293.15))
    light = solved(poppet(fluid=air, ports={**PORTS, "inlet": {"flow_in": "1 g/s"}}))
    assert light.ports["inlet"].value == pytest.approx(1e-3 / light.fluid.density)


# --- accuracy and mesh


def test_accuracy_by_default():
    drop, force_x, force_y = (("total_pressure_drop", ()), ("force_x", ()), ("force_y", ()))
    assert solved(manifold()).accuracy == Accuracy(0.01, True, (drop, force_x, force_y), 400_000)
    assert solved(poppet()).accuracy.of == (drop, force_x)  # no force_y in an axisymmetric part
    assert solved(cavity()).accuracy.of == (force_x, force_y)  # no ports, no drops
    assert solved(poppet(accuracy={"target": "2 %"})).accuracy == Accuracy(0.02, True, (drop, force_x), 400_000)
    assert solved(poppet(accuracy={})).accuracy == solved(poppet()).accuracy


def test_a_mesh_without_accuracy_refines_nothing():
    r = solved(poppet(mesh={"size": "0.5 mm", "near_walls": "50 um"}))
    assert (r.accuracy, r.mesh_size, r.mesh_near_walls) == (None, pytest.approx(5e-4), pytest.approx(5e-5))
    r = solved(poppet(mesh={"near_walls": "50 um"}, accuracy={"unknowns": 5000}))
    assert (r.accuracy.unknowns, r.mesh_size, r.mesh_near_walls) == (5000, None, pytest.approx(5e-5))


@pytest.mark.parametrize(
    ("target", "of", "value", "relative"),
    [
        ("0.5 %", ["total_pressure_drop"], 0.005, True),
        ("20 Pa", ["total_pressure_drop", "wall_shear_max poppet"], 20.0, False),
        ("0.02 kPa", ["total_pressure_drop"], 20.0, False),
        ("2 mN", ["force_x poppet"], 0.002, False),
        ("1 mL/min", ["flow_rate inlet"], 1e-6 / 60, False),
        ("0.05", ["loss_coefficient"], 0.05, False),
        ("0.1 m^3/h", ["flow_coefficient_kv"], 0.1, False),
        ("1 L/min", ["flow_coefficient_kv"], 0.06, False),
        ("0.1 K", ["temperature_rise"], 0.1, False),
        ("1 um", ["wall_shear_max_at"], 1e-6, False),
    ],
)
def test_targets(target, of, value, relative):
    accuracy = solved(poppet(accuracy={"target": target, "of": of})).accuracy
    assert (accuracy.target, accuracy.relative) == (pytest.approx(value, rel=1e-12), relative)


def test_a_pair_is_given_in_the_order_of_the_ports():
    of = ["total_pressure_drop  outlet inlet", "discharge_coefficient throat", "static_pressure throat", "dissipated_power"]
    assert solved(poppet(accuracy={"of": of})).accuracy.of == (
        ("total_pressure_drop", ("inlet", "outlet")),
        ("discharge_coefficient", ("throat",)),
        ("static_pressure", ("throat",)),
        ("dissipated_power", ()),
    )


def test_every_quantity_can_be_asked_for():
    everything = solved(manifold(accuracy={"of": [q for q, row in QUANTITIES.items() if row.of != "throat"]}))
    assert len(everything.accuracy.of) == len(QUANTITIES) - 1
    everything = solved(poppet(accuracy={"of": [q for q, row in QUANTITIES.items() if not row.planar_only]}))
    assert len(everything.accuracy.of) == len(QUANTITIES) - 4


def test_the_table_of_quantities_is_complete():
    for name, row in QUANTITIES.items():
        assert row.unit == "1" or root_of(row.unit) is not None, name
        assert row.of in ("port or section", "port", "two ports", "throat", "wall", "region", "part"), name
        assert row.definition, name
        assert "\n" not in row.definition, name


# --- the filled case


@pytest.mark.parametrize(
    "case",
    [
        poppet(),
        poppet(title='A "quoted" title — with signs', part={"script": "poppet_valve", "lift": "1.2 mm", "stem": "necked"}),
        poppet(walls={"poppet": {"velocity": "0.1 m/s"}}, model={"ambient": "1 bar"}, mesh={"size": "1 mm"}),
        poppet(accuracy={"target": "20 Pa", "of": ["total_pressure_drop outlet inlet"]}, mesh={"size": "1 mm"}),
        manifold(),
        cavity(),
    ],
    ids=range(6),
)
def test_the_filled_case_resolves_to_the_same(tmp_path, case):
    first = solved(case)
    text = case_toml(first.filled)
    assert text.startswith(HEADER)
    (tmp_path / "case.toml").write_text(text, encoding="utf-8")
    again = solved(Case.read(tmp_path / "case.toml"))
    assert again == first
    assert case_toml(again.filled) == text
    json.dumps(first.filled)


def test_every_default_is_filled_in():
    filled = solved(poppet()).filled
    assert filled == {
        "title": "poppet_valve",
        "part": {
            "script": "poppet_valve", "bore": "12 mm", "lift": "1 mm", "seat_angle": "45 deg", "stem": "plain", "guides": 0,
            "ratio": 1.5, "vented": False,
        },
        "fluid": OIL,
        "model": {"inertia": True},
        "ports": PORTS,
        "accuracy": {"target": "1 %", "of": ["total_pressure_drop", "force_x"], "unknowns": 400_000},
    }  # fmt: skip


def test_a_script_given_by_its_path_is_filled_in_so_that_the_case_may_move(tmp_path):
    (tmp_path / "a.toml").write_text('[part]\nscript = "parts/mine.py"\n[fluid]\nname = "water"\ntemperature = "20 degC"\n')
    case = Case.read(tmp_path / "a.toml").with_(ports=PORTS)
    assert resolve(case, POPPET, POPPET_WALLS).filled["part"]["script"] == str(tmp_path / "parts" / "mine.py")


def test_resolving_changes_nothing_and_survives_pickling():
    case = poppet()
    before = case.to_dict()
    first = solved(case)
    assert case.to_dict() == before
    assert pickle.loads(pickle.dumps(first)) == first == solved(case)
    first.filled["part"]["lift"] = "changed"
    assert solved(case).filled["part"]["lift"] == "1 mm"


def test_reading_and_resolving_is_quick(tmp_path):
    (tmp_path / "a.toml").write_text(poppet().to_toml())
    solved(Case.read(tmp_path / "a.toml"))  # units are looked up once in a process
    start = time.perf_counter()
    for _ in range(5):
        solved(Case.read(tmp_path / "a.toml"))
    assert (time.perf_counter() - start) / 5 < 0.1
