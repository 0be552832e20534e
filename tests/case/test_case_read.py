"""A case as an object: read, compared, pickled, changed into a copy, written again."""

import copy
import pickle
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fem_flow.case.model import Case
from fem_flow.errors import CaseError
from fem_flow.units import registry

KEYS = {
    "title": "Poppet check valve",
    "part": {"script": "poppet_valve", "lift": "1.2 mm", "guides": 2, "vented": True},
    "fluid": {"name": "ISO VG 46", "temperature": "40 degC"},
    "model": {"inertia": False, "ambient": "1.01325 bar"},
    "ports": {"inlet": {"flow_in": "12 L/min"}, "outlet": {"static_pressure": "0 bar"}},
    "walls": {"poppet": {"velocity": "0.1 m/s"}},
    "accuracy": {"target": "1 %", "of": ["total_pressure_drop inlet outlet"], "unknowns": 100_000},
    "mesh": {"size": "0.5 mm"},
}

TEXT = """\
title = "Poppet check valve"
[part]
script = "poppet_valve"
lift = "1.2 mm"
guides = 2
vented = true
[fluid]
name = "ISO VG 46"
temperature = "40 degC"
[model]
inertia = false
ambient = "1.01325 bar"
[ports.inlet]
flow_in = "12 L/min"
[ports.outlet]
static_pressure = "0 bar"
[walls.poppet]
velocity = "0.1 m/s"
[accuracy]
target = "1 %"
of = ["total_pressure_drop inlet outlet"]
unknowns = 100_000
[mesh]
size = "0.5 mm"
"""


@pytest.fixture
def case():
    return Case(**KEYS)


def test_a_file_and_the_same_keywords_are_the_same_case(tmp_path, monkeypatch):
    path = tmp_path / "poppet.toml"
    path.write_text(TEXT, encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    read = Case.read(path)
    assert read == Case(**KEYS)
    assert (read.folder, read.source) == (tmp_path, "poppet.toml")
    assert read != Case(**{**KEYS, "title": "Another"})
    assert read != "poppet"


@pytest.mark.parametrize(
    "encode", [lambda t: b"\xef\xbb\xbf" + t.encode(), lambda t: t.replace("\n", "\r\n").encode()], ids=["bom", "crlf"]
)
def test_files_of_other_editors_are_read(tmp_path, case, encode):
    (tmp_path / "poppet.toml").write_bytes(encode(TEXT))
    assert Case.read(tmp_path / "poppet.toml").to_dict() == case.to_dict()


def test_relative_paths_count_from_the_file(tmp_path, monkeypatch):
    (tmp_path / "poppet.toml").write_text(TEXT)
    monkeypatch.chdir(tmp_path)
    assert Case.read("poppet.toml").folder == tmp_path
    assert Case(**KEYS).folder == Path.cwd()


def test_a_case_survives_pickling_and_copying(case):
    for again in (pickle.loads(pickle.dumps(case)), copy.deepcopy(case), copy.copy(case)):
        assert again == case
        assert again.to_dict() == KEYS | {"accuracy": KEYS["accuracy"] | {"of": ("total_pressure_drop inlet outlet",)}}
        assert again.folder == case.folder


def test_a_case_is_written_and_read_back(tmp_path, case):
    (tmp_path / "again.toml").write_text(case.to_toml(), encoding="utf-8")
    assert Case.read(tmp_path / "again.toml").to_dict() == case.to_dict()


def test_a_case_cannot_be_changed(case):
    with pytest.raises(ValueError, match="frozen"):
        case.title = "x"
    with pytest.raises(ValueError, match="frozen"):
        case.ports["inlet"].flow_in = "1 L/min"
    with pytest.raises(ValueError, match="frozen"):
        case.part.lift = "2 mm"
    with pytest.raises(TypeError, match="changed copy"):
        case.ports["drain"] = case.ports["inlet"]
    with pytest.raises(TypeError, match="changed copy"):
        del case.walls["poppet"]


def test_arguments_are_not_kept_nor_changed():
    keys = copy.deepcopy(KEYS)
    case = Case(**keys)
    keys["ports"]["inlet"]["flow_in"] = "99 L/min"
    keys["ports"].clear()
    assert case.ports["inlet"].flow_in == "12 L/min"
    change = {"inlet": {"flow_in": "9 L/min"}}
    case.with_(ports=change)
    assert change == {"inlet": {"flow_in": "9 L/min"}}


def test_the_order_of_the_ports_is_kept():
    ports = {name: {"closed": True} for name in ("c", "a", "b")}
    assert list(Case(**{**KEYS, "ports": ports}).ports) == ["c", "a", "b"]


# --- with_


def test_with_gives_a_changed_copy_and_leaves_the_original(case):
    before = copy.deepcopy(case.to_dict())
    changed = case.with_(lift="1.5 mm", ports={"inlet": {"velocity_in": "2 m/s"}}, model={"ambient": "2 bar"}, title="B")
    assert changed.part.parameters == {"lift": "1.5 mm", "guides": 2, "vented": True}
    assert changed.ports["inlet"].given() == {"velocity_in": "2 m/s"}  # the old condition of the port is gone
    assert changed.ports["outlet"].given() == {"static_pressure": "0 bar"}
    assert changed.model.given() == {"inertia": False, "ambient": "2 bar"}
    assert changed.title == "B"
    assert case.to_dict() == before
    assert type(changed) is Case
    assert changed.folder == case.folder


def test_with_keeps_the_folder_of_the_file(tmp_path):
    (tmp_path / "poppet.toml").write_text(TEXT)
    assert Case.read(tmp_path / "poppet.toml").with_(lift="2 mm").folder == tmp_path


def test_none_takes_a_key_away(case):
    changed = case.with_(lift=None, walls={"poppet": None}, mesh=None, accuracy={"target": None}, title=None)
    assert changed.part.parameters == {"guides": 2, "vented": True}
    assert changed.walls == {}
    assert changed.mesh is None
    assert changed.accuracy.given() == {"of": ("total_pressure_drop inlet outlet",), "unknowns": 100_000}
    assert changed.title is None
    assert case.with_(accuracy=None).accuracy is None
    assert case.with_(accuracy={}).accuracy == case.accuracy


def test_with_takes_every_parameter_name_through_part(case):
    assert case.with_(part={"script": "manifold", "title": "x"}).part.parameters["title"] == "x"


@pytest.mark.parametrize(
    ("change", "fluid"),
    [
        ({"temperature": "60 degC"}, {"name": "ISO VG 46", "temperature": "60 degC"}),
        ({"name": "water"}, {"name": "water", "temperature": "40 degC"}),
        ({"heat_capacity": "2 kJ/(kg*K)"}, {"name": "ISO VG 46", "temperature": "40 degC", "heat_capacity": "2 kJ/(kg*K)"}),
        ({"density": "1 g/mL", "viscosity": "1 cP"}, {"density": "1 g/mL", "viscosity": "1 cP"}),
    ],
)
def test_with_changes_the_fluid(case, change, fluid):
    assert case.with_(fluid=change).fluid.given() == fluid


def test_with_turns_a_given_fluid_into_another(case):
    given = case.with_(fluid={"density": "870 kg/m^3", "viscosity": "40 mPa*s"})
    assert given.with_(fluid={"kinematic_viscosity": "46 cSt"}).fluid.given() == {
        "density": "870 kg/m^3",
        "kinematic_viscosity": "46 cSt",
    }
    back = given.with_(fluid={"name": "water", "temperature": "20 degC"})
    assert back.fluid.given() == {"name": "water", "temperature": "20 degC"}
    mixed = given.with_(fluid={"name": "glycerol-water", "temperature": "20 degC", "glycerol": "60 %"})
    assert mixed.with_(fluid={"name": "water"}).fluid.given() == {"name": "water", "temperature": "20 degC"}


def test_values_of_numpy_pint_and_pathlib_are_taken(case):
    changed = case.with_(
        guides=np.int64(3),
        ratio=np.float64(1.5),
        vented=np.bool_(False),
        stem=np.str_("necked"),
        lift=registry().Quantity(1.5, "mm"),
        ports={"inlet": {"flow_in": registry().Quantity(9.0, "L/min")}},
        part={"script": Path("parts") / "mine.py"},
    )
    assert changed.part.given()["script"] == "parts/mine.py"
    values = changed.part.parameters
    assert {k: type(v) for k, v in values.items()} == {"lift": str, "guides": int, "vented": bool, "ratio": float, "stem": str}
    from fem_flow.units import read

    assert read(values["lift"], "length", "lift") == pytest.approx(1.5e-3)
    assert read(changed.ports["inlet"].flow_in, "volume flow", "flow_in") == pytest.approx(1.5e-4)


def test_tables_of_another_case_are_taken(case):
    other = Case(part=case.part, fluid=case.fluid, ports=dict(case.ports))
    assert other.part == case.part
    assert other.ports == case.ports


# --- errors from Python


@pytest.mark.parametrize(
    ("call", "sentence"),
    [
        (lambda c: Case(), '[part] is missing; a case needs this table, for example with script = "poppet_valve"'),
        (lambda c: Case(prts={}), "[prts] is not part of a case file; did you mean ports?"),
        (lambda c: Case(**{**KEYS, "ports": ["inlet"]}), "[ports] is a list; write a table, for example [ports.NAME]"),
        (lambda c: c.with_(ports={"inlet": {"flow": "3 L/min"}}), "[ports.inlet] flow is not known; did you mean flow_in?"),
        (lambda c: c.with_(ports={"inlet": {}}), "[ports.inlet] has no condition; give one of flow_in, flow_out, "
         "velocity_in, velocity_out, static_pressure, total_pressure or closed = true"),
        (lambda c: c.with_(model=3), "[model] is 3; write a table, that is a line [model] with its keys below"),
        (lambda c: c.with_(fluid={"temperature": 40.0}), "[fluid] temperature is 40.0 without a unit; write it as text with "
         'a unit, for example temperature = "40.0 degC"'),
    ],
)  # fmt: skip
def test_a_bad_keyword_is_a_case_error(case, call, sentence):
    with pytest.raises(CaseError) as caught:
        call(case)
    assert str(caught.value) == sentence
    assert pickle.loads(pickle.dumps(caught.value)).reason == caught.value.reason


anything = st.recursive(
    st.one_of(
        st.none(),
        st.booleans(),
        st.integers(),
        st.floats(),
        st.text(max_size=8),
        st.dates(),
        st.just("1 mm"),
        st.just("20 degC"),
    ),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3),
        st.dictionaries(
            st.one_of(
                st.sampled_from(["inlet", "flow_in", "closed", "script", "name", "target", "of", "size", "velocity", "lift"]),
                st.text(max_size=5),
            ),
            inner,
            max_size=4,
        ),
    ),
    max_leaves=8,
)


def case_or_error(keys) -> Case | CaseError:
    try:
        return Case(**keys)
    except CaseError as error:
        return error


@settings(max_examples=300, deadline=None)
@given(st.dictionaries(st.sampled_from([*KEYS, "zzz"]), anything, max_size=4))
def test_whatever_is_given_comes_out_as_a_case_or_one_sentence(keys):
    found = case_or_error({**KEYS, **keys})
    if isinstance(found, CaseError):
        assert "\n" not in str(found)
        assert found.reason
    else:
        assert found == Case(**found.to_dict())
