"""The fluid library against tabulated values, its ranges, and what a [fluid] table gives."""

import doctest

import numpy as np
import pytest

from fem_flow.case import properties as p
from fem_flow.case.fluids import LIBRARY, fluid_of
from fem_flow.case.words import Problem

# IAPWS-95 density and IAPWS R12-08 viscosity of liquid water at 101325 Pa; IAPWS-95 saturation pressure
T_WATER = np.array([0.01, 5, 10, 15, 20, 25, 30, 40, 50, 60, 70, 80, 90, 99.9])
RHO_WATER = np.array(
    [999.844, 999.967, 999.702, 999.103, 998.207, 997.048, 995.649, 992.216, 988.035, 983.196, 977.765, 971.79, 965.31, 958.421]
)
MU_WATER = 1e-3 * np.array(
    [1.79113, 1.51817, 1.3059, 1.13757, 1.0016, 0.89002, 0.79722, 0.65273, 0.54652, 0.46604, 0.40355, 0.35405, 0.31418, 0.28188]
)
P_WATER = np.array(
    [
        611.65,
        872.58,
        1228.2,
        1705.79,
        2339.32,
        3169.93,
        4246.97,
        7384.94,
        12351.95,
        19946.43,
        31200.93,
        47414.47,
        70181.77,
        101056.6,
    ]
)

# dry air at 101325 Pa: Lemmon et al. 2000 equation of state; US Standard Atmosphere 1976 (Sutherland)
T_AIR = np.array([-20, 0, 15, 20, 25, 40, 60, 100, 200])
RHO_AIR = np.array([1.39565, 1.29307, 1.22554, 1.20458, 1.18432, 1.12745, 1.05963, 0.94587, 0.74581])
MU_AIR = 1e-6 * np.array([16.1533, 17.1608, 17.8938, 18.1341, 18.3723, 19.0757, 19.9882, 21.7341, 25.7145])

# Cheng 2008, mass shares 0, 0.1, ... 1 of glycerol, mPa s
MU_GLYCEROL = {
    20.0: [1.0049, 1.2972, 1.7414, 2.455, 3.6848, 6.0023, 10.911, 23.094, 60.859, 223.75, 1413.8],
    25.0: [0.89274, 1.1456, 1.5245, 2.1238, 3.1372, 5.0037, 8.8478, 18.057, 45.35, 156.35, 905.68],
    40.0: [0.6546, 0.82646, 1.0751, 1.4522, 2.0589, 3.1113, 5.125, 9.5257, 21.123, 61.53, 282.44],
}

# ASTM D341 through two points, mm^2/s
T_OIL = np.array([0, 10, 20, 30, 40, 50, 60, 70, 80, 100])
NU_OIL = {
    "ISO VG 32": [336.0, 161.0, 86.28, 50.63, 32.0, 21.5, 15.19, 11.19, 8.533, 5.4],
    "ISO VG 46": [577.3, 261.9, 133.8, 75.39, 46.0, 29.97, 20.62, 14.85, 11.1, 6.8],
    "ISO VG 68": [1033.0, 442.0, 214.8, 115.8, 68.0, 42.87, 28.66, 20.12, 14.72, 8.7],
}


def fluid(name, celsius, ambient=None, **more):
    return fluid_of({"name": name, "temperature": f"{celsius} degC", **more}, ambient)


def relative(values, reference):
    return np.max(np.abs(np.array(values) / np.array(reference) - 1))


def test_water_agrees_with_the_tables():
    fluids = [fluid("water", t) for t in T_WATER]
    assert relative([f.density for f in fluids], RHO_WATER) < 2e-5
    assert relative([f.viscosity for f in fluids], MU_WATER) < 1e-4
    assert relative([f.vapour_pressure for f in fluids], P_WATER) < 1e-4


def test_water_is_smooth_between_the_tabulated_points():
    """A monotone cubic through the table's logarithm stays within 0.05 % of the formula half way between its points."""
    from scipy.interpolate import PchipInterpolator

    inner = T_WATER[(T_WATER >= 10) & (T_WATER <= 30)]  # 5 K apart, where the interpolation itself is that good
    middle = 0.5 * (inner[1:] + inner[:-1])
    table = np.exp(PchipInterpolator(T_WATER, np.log(MU_WATER))(middle))
    assert relative([p.water_viscosity(t) for t in middle], table) < 5e-4
    fine = np.linspace(0.01, 99.9, 400)
    assert np.all(np.diff([p.water_viscosity(t) for t in fine]) < 0)
    assert np.all(np.diff([p.water_vapour_pressure(t) for t in fine]) > 0)
    assert 3.5 < fine[np.argmax([p.water_density(t) for t in fine])] < 4.5  # water is densest near 4 degC


def test_water_other_properties():
    f = fluid("Water", 20)
    assert f.heat_capacity == pytest.approx(4184, rel=1e-3)
    assert f.sound_speed == pytest.approx(1482.4, abs=0.2)
    assert "memory" in f.sources["heat_capacity"]
    assert "memory" in f.sources["sound_speed"]
    assert (f.name, f.is_gas, f.temperature) == ("water", False, pytest.approx(293.15))


def test_air_agrees_with_the_tables():
    fluids = [fluid("dry air", t) for t in T_AIR]
    assert relative([f.density for f in fluids], RHO_AIR) < 1e-3  # the ideal gas
    assert relative([f.viscosity for f in fluids], MU_AIR) < 5e-6
    assert all(f.is_gas for f in fluids)
    assert fluid("dry air", 20).sound_speed == pytest.approx(343.2, abs=0.2)


def test_air_density_follows_ambient():
    assert fluid("dry air", 20, ambient=5 * 101325.0).density == pytest.approx(5 * fluid("dry air", 20).density)
    assert fluid("DRY  Air", 20, ambient=101325.0) == fluid("dry air", 20)
    with pytest.raises(Problem) as caught:
        fluid("dry air", 20, ambient=3e6)
    assert str(caught.value) == "is dry air, a gas known from 0.01 to 20 bar, but ambient is 30 bar; give density and viscosity"


@pytest.mark.parametrize("name", NU_OIL)
def test_oils_agree_with_the_tables(name):
    fluids = [fluid(name.lower(), t) for t in T_OIL]
    assert (
        relative([f.viscosity / f.density for f in fluids], 1e-6 * np.array(NU_OIL[name])) < 5e-4
    )  # the table has four digits
    grade = float(name.split()[-1])
    assert fluid(name, 40).viscosity / fluid(name, 40).density == pytest.approx(1e-6 * grade, rel=1e-12)  # ISO 3448
    assert fluid(name, 15).density == pytest.approx(870.0)
    assert fluid(name, 55).density == pytest.approx(870.0 - 0.65 * 40)


@pytest.mark.parametrize("celsius", MU_GLYCEROL)
def test_glycerol_water_viscosity_agrees_with_the_tables(celsius):
    shares = np.arange(0, 101, 10)
    values = [fluid("glycerol-water", celsius, glycerol=f"{c} %").viscosity for c in shares]
    assert relative(values, 1e-3 * np.array(MU_GLYCEROL[celsius])) < 5e-5


def test_glycerol_water_density():
    assert p.glycerol_water_density(20.0, 1.0) == pytest.approx(1273.3 - 0.6121 * 20)
    assert p.glycerol_water_density(20.0, 0.0) == pytest.approx(998.2, abs=0.3)
    shares = np.linspace(0, 1, 51)
    mixture = np.array([p.glycerol_water_density(20.0, c) for c in shares])
    assert np.all(np.diff(mixture) > 0)
    ideal = 1 / (shares / mixture[-1] + (1 - shares) / mixture[0])
    assert 0.009 < np.max(mixture / ideal - 1) < 0.012  # the mixture contracts by about 1 %
    assert fluid("glycerol-water", 20, glycerol="60 %").name == "glycerol-water, 60 % glycerol by mass"


@pytest.mark.parametrize("name", LIBRARY)
def test_the_range_is_enforced_on_both_sides_and_closed(name):
    entry = LIBRARY[name]
    more = {"glycerol": "50 %"} if name == "glycerol-water" else {}
    for inside in (entry.low, entry.high):
        f = fluid(name, inside, **more)
        assert f.density > 0
        assert f.viscosity > 0
        assert set(f.sources) >= {"density", "viscosity"}
    for outside in (entry.low - 0.02, entry.high + 0.02):
        with pytest.raises(Problem) as caught:
            fluid(name, outside, **more)
        known = f"{name} is known from {entry.low:g} to {entry.high:g} degC, and nothing is extrapolated"
        assert str(caught.value) == f'temperature is "{outside} degC"; {known}'


def test_temperature_may_be_in_any_unit():
    same = [fluid_of({"name": "water", "temperature": t}, None) for t in ("40 degC", "313.15 K", "104 degF")]
    assert relative([f.viscosity for f in same], same[0].viscosity) < 1e-12


def test_a_fluid_given_by_its_properties():
    a = fluid_of({"density": "870 kg/m^3", "viscosity": "40.02 mPa*s"}, None)
    b = fluid_of({"density": "0.87 g/cm^3", "kinematic_viscosity": "46 cSt"}, None)
    assert (a.density, a.viscosity) == (pytest.approx(870.0), pytest.approx(0.04002))
    assert (b.density, b.viscosity) == (pytest.approx(870.0), pytest.approx(0.04002))
    assert (a.temperature, a.heat_capacity, a.vapour_pressure, a.sound_speed, a.is_gas) == (None, None, None, None, False)
    assert fluid_of({"density": "1.2 kg/m^3", "viscosity": "18 uPa*s"}, None).is_gas


def test_optional_properties_are_taken_and_named():
    given = {"heat_capacity": "1.9 kJ/(kg*K)", "vapour_pressure": "1 Pa", "sound_speed": "1300 m/s"}
    for base in ({"density": "870 kg/m^3", "viscosity": "40 mPa*s"}, {"name": "ISO VG 46", "temperature": "40 degC"}):
        f = fluid_of({**base, **given}, None)
        assert (f.heat_capacity, f.vapour_pressure, f.sound_speed) == (pytest.approx(1900.0), 1.0, 1300.0)
        assert {f.sources[k] for k in given} == {"given in the case"}


@pytest.mark.parametrize("name", ["oxygen", "Oxygen", "O2", "liquid oxygen", "oxygen-enriched air", "LOX", "nitrox 40"])
def test_oxygen_is_refused(name):
    with pytest.raises(Problem) as caught:
        fluid(name, 20)
    assert str(caught.value) == (
        f'name is "{name}"; oxygen and oxygen-enriched gas are refused, for ignition decides there and not the flow: see the '
        "oxygen-service guides ASTM G88 and MNL36, ISO 15001 and those of CGA and EIGA"
    )
    assert caught.value.reason == "refused_fluid"


def test_the_examples_in_the_docstrings():
    found = doctest.testmod(p)
    assert found.failed == 0
    assert found.attempted >= 3
