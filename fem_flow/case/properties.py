"""Published formulas for the fluids of the library: plain functions of temperature in degrees Celsius, SI out.

Each was checked against the property tables that the tests hold; where a constant is from memory, the docstring says so.
"""

from __future__ import annotations

import math

import numpy as np

ZERO_CELSIUS = 273.15


def water_density(t: float) -> float:
    """Density of air-free water at 101325 Pa [kg/m^3], 0 to 100 degC.

    Source: Kell, J. Chem. Eng. Data 20 (1975) 97-105; constants from memory, within 1.6e-5 of
    IAPWS-95 at the 14 tabulated points.

    >>> round(water_density(20.0), 2)
    998.2
    """
    top = (((((-280.54253e-12 * t + 105.56302e-9) * t - 46.170461e-6) * t - 7.9870401e-3) * t + 16.945176) * t) + 999.83952
    return top / (1.0 + 16.879850e-3 * t)


def water_viscosity(t: float) -> float:
    """Dynamic viscosity of liquid water at 0.1 MPa [Pa s], 0 to 100 degC.

    Source: IAPWS SR6-08(2011), revised supplementary release on properties of liquid water at 0.1 MPa; constants from
    memory, within 1e-4 of IAPWS R12-08 at the 14 tabulated points.

    >>> f"{water_viscosity(20.0):.4e}"
    '1.0016e-03'
    """
    s = (t + ZERO_CELSIUS) / 300.0
    return 1e-6 * (280.68 * s**-1.9 + 511.45 * s**-7.7 + 61.131 * s**-19.6 + 0.45903 * s**-40.0)


def water_vapour_pressure(t: float) -> float:
    """Saturation pressure of water [Pa absolute], 0.01 to 100 degC.

    Source: Wagner & Pruss, J. Phys. Chem. Ref. Data 31 (2002) 387-535, eq. 2.5; constants from memory, within
    1e-4 of the 14 tabulated points.
    """
    kelvin, critical = t + ZERO_CELSIUS, 647.096
    x = 1.0 - kelvin / critical
    a = (-7.85951783, 1.84408259, -11.7866497, 22.6807411, -15.9618719, 1.80122502)
    total = sum(ai * x**n for ai, n in zip(a, (1.0, 1.5, 3.0, 3.5, 4.0, 7.5), strict=True))
    return 22.064e6 * math.exp(critical / kelvin * total)


def water_heat_capacity(t: float) -> float:
    """Isobaric specific heat capacity of liquid water [J/(kg K)], 0 to 100 degC: rounded values from memory, linear between."""
    at = (0.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0, 80.0, 90.0, 100.0)
    return float(np.interp(t, at, (4219.0, 4195.0, 4184.0, 4180.0, 4179.0, 4181.0, 4185.0, 4190.0, 4197.0, 4205.0, 4216.0)))


def water_sound_speed(t: float) -> float:
    """Speed of sound in water at atmospheric pressure [m/s], 0 to 95 degC.

    Source: Marczak, J. Acoust. Soc. Am. 102 (1997) 2776-2779; constants from memory.
    """
    return ((((2.787860e-9 * t - 1.398845e-6) * t + 3.287156e-4) * t - 5.799136e-2) * t + 5.038813) * t + 1402.385


def air_viscosity(t: float) -> float:
    """Dynamic viscosity of dry air [Pa s] by Sutherland's formula with the constants of the US Standard Atmosphere 1976."""
    kelvin = t + ZERO_CELSIUS
    return 1.458e-6 * kelvin**1.5 / (kelvin + 110.4)


AIR_CONSTANT = 287.055
"""Specific gas constant of dry air [J/(kg K)], molar mass 28.9647 g/mol; from memory."""


def air_density(t: float, pressure: float) -> float:
    """Density of dry air [kg/m^3] as an ideal gas at an absolute pressure [Pa]."""
    return pressure / (AIR_CONSTANT * (t + ZERO_CELSIUS))


def air_sound_speed(t: float) -> float:
    """Speed of sound in dry air [m/s], sqrt(gamma R T) with gamma = 1.4."""
    return math.sqrt(1.4 * AIR_CONSTANT * (t + ZERO_CELSIUS))


def walther(t: float, nu40: float, nu100: float) -> float:
    """Kinematic viscosity of a mineral oil [m^2/s] from its values [mm^2/s] at 40 and 100 degC.

    Source: ASTM D341, log10 log10(nu + 0.7) = A - B log10 T for nu above 2 mm^2/s.

    >>> round(1e6 * walther(20.0, 46.0, 6.8), 1)
    133.8
    """
    x40, x100, x = (math.log10(c + ZERO_CELSIUS) for c in (40.0, 100.0, t))
    w40, w100 = (math.log10(math.log10(nu + 0.7)) for nu in (nu40, nu100))
    w = w40 + (w100 - w40) * (x - x40) / (x100 - x40)
    return 1e-6 * (10.0**10.0**w - 0.7)


def oil_density(t: float) -> float:
    """Density of a mineral hydraulic oil [kg/m^3]: 870 at 15 degC, less 0.65 a kelvin (common practice).

    Data sheets give the density at 15 degC, typically 865 to 885 kg/m^3; a round 870 without a temperature, as it is often
    used in hydraulics, is within 2 % of this from 0 to 40 degC. Give density and viscosity where the oil's own are known.
    """
    return 870.0 - 0.65 * (t - 15.0)


def glycerol_water_viscosity(t: float, c: float) -> float:
    """Dynamic viscosity of glycerol-water [Pa s], 0 to 100 degC, c the mass share of glycerol.

    Source: Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285-3288; 1.3 % mean, up to about 5 % from measurement.
    """
    a = 0.705 - 0.0017 * t
    b = (4.9 + 0.036 * t) * a**2.5
    alpha = 1.0 - c + a * b * c * (1.0 - c) / (a * c + b * (1.0 - c))
    water = 1.790e-3 * math.exp((-1230.0 - t) * t / (36100.0 + 360.0 * t))
    glycerol = 12.100 * math.exp((-1233.0 + t) * t / (9900.0 + 70.0 * t))
    return water**alpha * glycerol ** (1.0 - alpha)


def glycerol_water_density(t: float, c: float) -> float:
    """Density of glycerol-water [kg/m^3], c the mass share of glycerol.

    Source: Volk & Kaehler, Exp. Fluids 59 (2018) 75; fitted between 15 and 30 degC (memory), used from 0 to 100 degC here.
    """
    glycerol = 1273.3 - 0.6121 * t
    water = 1000.0 * (1.0 - abs((t - 3.98) / 615.0) ** 1.71)
    share = c / glycerol / (c / glycerol + (1.0 - c) / water)  # by volume
    contraction = 1.0 + (1.78e-6 * t**2 - 1.82e-4 * t + 1.41e-2) * math.sin(math.pi * c**1.31) ** 0.81 if 0.0 < c < 1.0 else 1.0
    return contraction * (share * glycerol + (1.0 - share) * water)
