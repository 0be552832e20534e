"""The fluid library, and the fluid of a case from its ``[fluid]`` table.

A new fluid is one function from temperature to properties and one row in ``LIBRARY``.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from fem_flow.case import properties as p
from fem_flow.case.resolved import Fluid
from fem_flow.case.words import Problem, choice
from fem_flow.units import read

ATMOSPHERE = 101325.0
_MEMORY = "value from memory"


@dataclass(frozen=True)
class Entry:
    """A fluid of the library: ``build(degC, share of glycerol or None, ambient in Pa) -> Fluid``, from `low` to `high` degC."""

    low: float
    high: float
    build: Callable[[float, float | None, float], Fluid]


def _water(t: float, _share, _ambient) -> Fluid:
    sources = {
        "density": "Kell, J. Chem. Eng. Data 20 (1975) 97",
        "viscosity": "IAPWS SR6-08(2011)",
        "vapour_pressure": "Wagner & Pruss, J. Phys. Chem. Ref. Data 31 (2002) 387",
        "heat_capacity": _MEMORY,
        "sound_speed": f"Marczak, J. Acoust. Soc. Am. 102 (1997) 2776, {_MEMORY}",
    }
    return Fluid(
        "water", p.water_density(t), p.water_viscosity(t), heat_capacity=p.water_heat_capacity(t),
        vapour_pressure=p.water_vapour_pressure(t), sound_speed=p.water_sound_speed(t), sources=sources,
    )  # fmt: skip


def _dry_air(t: float, _share, ambient: float) -> Fluid:
    if not 1e3 <= ambient <= 2e6:
        raise Problem(
            f"is dry air, a gas known from 0.01 to 20 bar, but ambient is {ambient / 1e5:g} bar; give density and viscosity",
            "out_of_range",
        )
    sources = {
        "density": f"ideal gas at {ambient / 1e5:g} bar absolute",
        "viscosity": "Sutherland's formula, US Standard Atmosphere 1976",
        "heat_capacity": _MEMORY,
        "sound_speed": "sqrt(1.4 R T)",
    }
    return Fluid(
        "dry air", p.air_density(t, ambient), p.air_viscosity(t), heat_capacity=1006.0, sound_speed=p.air_sound_speed(t),
        is_gas=True, sources=sources,
    )  # fmt: skip


def _oil(grade: int, nu100: float) -> Callable:
    def build(t: float, _share, _ambient) -> Fluid:
        density = p.oil_density(t)
        sources = {
            "density": "870 kg/m^3 at 15 degC less 0.65 a kelvin, common practice",
            "viscosity": f"ASTM D341, {grade} mm^2/s at 40 degC (ISO 3448), {nu100} mm^2/s at 100 degC (data sheets, memory)",
            "heat_capacity": f"common practice for mineral oil, {_MEMORY}",
        }
        return Fluid(f"ISO VG {grade}", density, density * p.walther(t, grade, nu100), heat_capacity=1900.0, sources=sources)

    return build


def _glycerol_water(t: float, share: float | None, _ambient) -> Fluid:
    if share is None:
        raise Problem('is glycerol-water, which needs the share of glycerol by mass, for example glycerol = "60 %"', "missing")
    sources = {
        "density": "Volk & Kaehler, Exp. Fluids 59 (2018) 75, fitted for 15 to 30 degC",
        "viscosity": "Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285",
    }
    name = f"glycerol-water, {100 * share:.4g} % glycerol by mass"
    return Fluid(name, p.glycerol_water_density(t, share), p.glycerol_water_viscosity(t, share), sources=sources)


LIBRARY: dict[str, Entry] = {
    "water": Entry(0.01, 99.9, _water),
    "dry air": Entry(-50.0, 200.0, _dry_air),
    "ISO VG 32": Entry(0.0, 100.0, _oil(32, 5.4)),
    "ISO VG 46": Entry(0.0, 100.0, _oil(46, 6.8)),
    "ISO VG 68": Entry(0.0, 100.0, _oil(68, 8.7)),
    "glycerol-water": Entry(0.0, 100.0, _glycerol_water),
}

_OXYGEN = ("oxygen", "o2", "lox", "nitrox")


def fluid_of(given: dict, ambient: float | None) -> Fluid:
    """The fluid of a ``[fluid]`` table.

    Parameters
    ----------
    given : keys of the table as text, each already checked by itself
    ambient : Pa absolute or None; the density of a gas of the library is at it, or at 101325 Pa

    Raises
    ------
    Problem where the keys do not make a fluid, the name is unknown, or the temperature is outside the range
    """
    fluid = _named(given, ATMOSPHERE if ambient is None else ambient) if "name" in given else _by_properties(given)
    extra = {k: read(given[k], d, k) for k, d in _OPTIONAL.items() if k in given}
    return replace(fluid, **extra, sources={**(fluid.sources or {}), **dict.fromkeys(extra, "given in the case")})


_OPTIONAL = {"heat_capacity": "heat capacity", "vapour_pressure": "pressure", "sound_speed": "velocity"}


def _named(given: dict, ambient: float) -> Fluid:
    name = given["name"]
    words = name.casefold().replace("-", " ").replace("_", " ").split()
    if any(w.startswith("oxygen") or w in _OXYGEN for w in words):
        raise Problem(
            f'name is "{name}"; oxygen and oxygen-enriched gas are refused, for ignition decides there and not the flow: see '
            "the oxygen-service guides ASTM G88 and MNL36, ISO 15001 and those of CGA and EIGA",
            "refused_fluid",
        )
    both = [k for k in ("density", "viscosity", "kinematic_viscosity") if k in given]
    if both:
        raise Problem(
            f"has name and {both[0]}; take a fluid of the library (name, temperature) or give density and viscosity",
            "contradiction",
        )
    known = {k.casefold(): k for k in LIBRARY}
    key = known.get(" ".join(name.casefold().split()))
    if key is None:
        raise Problem(
            f'name is "{name}", which is not in the fluid library{choice(name, LIBRARY, "it has")}',
            "unknown_fluid",
            known=list(LIBRARY),
        )
    entry = LIBRARY[key]
    if "glycerol" in given and key != "glycerol-water":
        raise Problem(f"has glycerol, which goes with glycerol-water and not with {key}", "contradiction")
    if "temperature" not in given:
        raise Problem(f'has no temperature; {key} needs one, for example temperature = "40 degC"', "missing")
    kelvin = read(given["temperature"], "temperature", "temperature")
    celsius = round(kelvin - p.ZERO_CELSIUS, 9)
    if not entry.low <= celsius <= entry.high:
        raise Problem(
            f'temperature is "{given["temperature"]}"; {key} is known from {entry.low:g} to {entry.high:g} degC, and '
            "nothing is extrapolated",
            "out_of_range",
            low=entry.low,
            high=entry.high,
        )
    share = read(given["glycerol"], "share", "glycerol") if "glycerol" in given else None
    return replace(entry.build(celsius, share, ambient), temperature=kelvin)


def _by_properties(given: dict) -> Fluid:
    for key in ("temperature", "glycerol"):
        if key in given:
            raise Problem(
                f'has {key} but no name; {key} is for fluids of the library, for example name = "ISO VG 46"', "contradiction"
            )
    if "density" not in given:
        raise Problem('says no fluid; give name and temperature (name = "ISO VG 46"), or density and viscosity', "missing")
    if "viscosity" in given and "kinematic_viscosity" in given:
        raise Problem("has both viscosity and kinematic_viscosity; keep one of them", "contradiction")
    density = read(given["density"], "density", "density")
    if "viscosity" in given:
        viscosity = read(given["viscosity"], "viscosity", "viscosity")
    elif "kinematic_viscosity" in given:
        viscosity = density * read(given["kinematic_viscosity"], "kinematic viscosity", "kinematic_viscosity")
    else:
        raise Problem('has density but no viscosity; give viscosity = "40 mPa*s" or kinematic_viscosity = "46 cSt"', "missing")
    sources = {"density": "given in the case", "viscosity": "given in the case"}
    # no liquid of engineering use is lighter than 50 kg/m^3, and no gas near ambient pressure is heavier
    return Fluid("as given", density, viscosity, is_gas=density < 50.0, sources=sources)
