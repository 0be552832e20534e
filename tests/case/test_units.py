"""Reading quantities from text, strictly, and printing them as an engineer would."""

import doctest
import math
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import fem_flow.units
from fem_flow.errors import CaseError
from fem_flow.units import DIMENSIONS, Problem, convert, digits, friendly, nearest, parse, read, registry, show


@pytest.mark.parametrize(
    ("text", "dimension", "si"),
    [
        ("1.2 mm", "length", 1.2e-3),
        ("1.2mm", "length", 1.2e-3),
        ("  1.2   mm ", "length", 1.2e-3),
        ("1_000 mm", "length", 1.0),
        (".5 in", "length", 0.0127),
        ("1e-3 m", "length", 1e-3),
        ("5 µm", "length", 5e-6),  # micro sign
        ("5 μm", "length", 5e-6),  # Greek mu
        ("5 um", "length", 5e-6),
        ("3 thou", "length", 7.62e-5),
        ("12 L/min", "volume flow", 2e-4),
        ("12 l/min", "volume flow", 2e-4),
        ("20 uL/min", "volume flow", 20e-9 / 60),
        ("1 gal/min", "volume flow", 3.785411784e-3 / 60),
        ("6 kg/min", "mass flow", 0.1),
        ("40 mPa*s", "viscosity", 0.04),
        ("40 mPa s", "viscosity", 0.04),
        ("40 mPa.s", "viscosity", 0.04),
        ("40 mPa·s", "viscosity", 0.04),
        ("40 cP", "viscosity", 0.04),
        ("46 cSt", "kinematic viscosity", 46e-6),
        ("46 mm²/s", "kinematic viscosity", 46e-6),
        ("870 kg/m^3", "density", 870.0),
        ("870 kg/m³", "density", 870.0),
        ("0.87 g/cm**3", "density", 870.0),
        ("40 degC", "temperature", 313.15),
        ("40 °C", "temperature", 313.15),
        ("104 degF", "temperature", 313.15),
        ("313.15 K", "temperature", 313.15),
        ("0 bar", "pressure", 0.0),
        ("-0.5 bar", "pressure", -5e4),
        ("1 psi", "pressure", 6894.757293168361),
        ("45 deg", "angle", math.pi / 4),
        ("45°", "angle", math.pi / 4),
        ("1 %", "share", 0.01),
        ("1900 J/(kg*K)", "heat capacity", 1900.0),
        ("1.9 kJ/kg/K", "heat capacity", 1900.0),
        ("3000 rpm", "rotation", 100 * math.pi),
    ],
)
def test_a_quantity_is_read_in_si(text, dimension, si):
    assert read(text, dimension, "key") == pytest.approx(si, rel=1e-12, abs=0)


def test_a_wrong_quantity_is_a_case_error_with_key_and_reason():
    with pytest.raises(CaseError) as caught:
        read("1.2 bar", "length", "[model] depth")
    assert (
        str(caught.value) == '[model] depth is "1.2 bar", a pressure, where a length is expected, for example depth = "1.2 mm"'
    )
    assert (caught.value.reason, caught.value.details["key"]) == ("wrong_unit", "[model] depth")


@pytest.mark.parametrize(
    "text", ["9**9**9**9 mm", "1 mm**9**9**9", "1 (((((((m", "1 " + "(" * 500 + "m", "1 " + "m*" * 2000 + "m", "1" * 9999]
)
def test_nothing_is_computed_from_text(text):
    start = time.perf_counter()
    with pytest.raises(Problem):
        parse(text, (DIMENSIONS["length"],), "lift")
    assert time.perf_counter() - start < 1.0


def value_or_problem(text):
    try:
        return parse(text, (DIMENSIONS["length"], DIMENSIONS["angle"]), "key")
    except Problem as problem:
        return problem


@settings(max_examples=300, deadline=None)
@given(st.one_of(st.text(max_size=30), st.from_regex(r"[0-9.,eE+\- ]{1,8}[a-zA-Z%°/*^() ]{0,8}", fullmatch=True)))
def test_any_text_is_a_quantity_or_a_problem(text):
    found = value_or_problem(text)
    if isinstance(found, Problem):
        assert "\n" not in str(found)
        assert found.reason
    else:
        assert math.isfinite(found[0])
        assert found[1].unit in ("m", "rad")


def test_every_dimension_reads_its_own_example():
    for name, dimension in DIMENSIONS.items():
        value, found = parse(dimension.example, (dimension,), "key")
        assert found is dimension, name
        assert value > 0, name


def test_the_dimensions_are_distinct():
    from fem_flow.units import root_of

    roots = [root_of(d.unit) for d in DIMENSIONS.values()]
    assert len(set(roots)) == len(roots)


def test_conversion_to_the_same_unit_is_exact():
    for number in (0.1, 12.7, 1 / 3):
        assert convert(number, "mm", "mm") == number
    assert convert(20.0, "degC", "K") == pytest.approx(293.15)


def test_the_registry_is_built_once():
    assert registry() is registry()


@pytest.mark.parametrize(
    ("name", "known", "near"),
    [
        ("inlte", ["inlet", "outlet"], "inlet"),
        ("INLET", ["inlet", "outlet"], "inlet"),
        ("poppet", ["poppet_valve", "manifold"], "poppet_valve"),
        ("mn", ["N", "mm", "bar"], "mm"),
        ("zzz", ["inlet", "outlet"], None),
        ("x", ["mm"], None),
        ("x", [], None),
    ],
)
def test_nearest_name(name, known, near):
    assert nearest(name, known) == near


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (21830.0, "Pa", "21.83 kPa"),
        (218300.0, "Pa", "2.183 bar"),
        (1e5, "Pa", "1.000 bar"),
        (950.0, "Pa", "950.0 Pa"),
        (-21830.0, "Pa", "-21.83 kPa"),
        (0.0, "Pa", "0 Pa"),
        (0.05, "Pa", "50.00 mPa"),
        (2e-4, "m^3/s", "12.00 L/min"),
        (20e-9 / 60, "m^3/s", "20.00 µL/min"),
        (1.2e-3, "m", "1.200 mm"),
        (5e-6, "m", "5.000 µm"),
        (1.1e-4, "m^2", "110.0 mm^2"),
        (0.012, "N", "12.00 mN"),
        (0.03927, "Pa*s", "39.27 mPa*s"),
        (840.0, "1", "840.0"),
        (0.000123456, "1", "0.0001235"),
        (1.23456e-7, "1", "1.235e-07"),
        (123456.0, "1", "123500"),
        (9999.96, "1", "10000"),
        (2.5, "m^3/h", "2.500 m^3/h"),
        (math.nan, "Pa", "– Pa"),
    ],
)
def test_show(value, unit, text):
    assert show(value, unit) == text


def test_a_bar_is_shown_in_the_unit_of_its_number():
    assert friendly(95.0, "Pa", like=218300.0, significant=2) == ("0.00095", "bar")
    assert friendly(95.0, "Pa", like=math.nan) == ("95.00", "Pa")
    assert friendly(1e-9, "N", like=0.0) == ("0.001000", "µN")


@settings(max_examples=200, deadline=None)
@given(st.floats(min_value=1e-12, max_value=1e12), st.integers(1, 8))
def test_printed_digits_read_back_within_half_a_last_digit(value, significant):
    assert float(digits(value, significant)) == pytest.approx(value, rel=0.5000001 * 10 ** (1 - significant))


def test_the_examples_in_the_docstrings():
    found = doctest.testmod(fem_flow.units)
    assert found.failed == 0
    assert found.attempted >= 2
