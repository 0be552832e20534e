"""Straight passages against their closed formulas."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

import numpy as np

from fem_flow.case.model import Case
from fem_flow.job import run
from fem_flow.result import Result
from fem_flow.verify.parts import part
from fem_flow.verify.table import Row

SHAH_LONDON = "exact; formula of {} flow, as in Shah & London, Laminar Flow Forced Convection in Ducts (1978)"
FLOW, LENGTH, DEPTH, MU = 1e-6, 4e-3, 25e-3, 1e-3
"""60 mL/min in m^3/s, m, m (of the slot), Pa s."""


def case(shape: str) -> Case:
    """60 mL/min of a liquid like water through 4 mm of the verification part ``straight`` ("slot", "tube", "annulus")."""
    return Case(
        title=f"Straight {shape}",
        part={"script": part("straight"), "shape": shape},
        fluid={"density": "1000 kg/m^3", "viscosity": "1 mPa*s"},
        model={"depth": "25 mm"} if shape == "slot" else {},
        ports={"inlet": {"flow_in": "60 mL/min"}, "outlet": {"static_pressure": "0 bar"}},
        accuracy={"target": "0.001 %", "of": ["total_pressure_drop"]},
    )


def _of(result: Result, quantity: str, *of: str) -> float:
    return float(result[quantity, *of])


def slot() -> Iterator[Row]:
    """Plane Poiseuille flow in a gap of 1 mm."""
    result, gap = run(case("slot")), 1e-3
    drop, shear = 12 * MU * FLOW * LENGTH / (DEPTH * gap**3), 6 * MU * FLOW / (DEPTH * gap**2)
    row = partial(Row, "slot", tolerance=1e-9, source=SHAH_LONDON.format("plane Poiseuille"))
    yield row("total pressure drop, Pa", _of(result, "total_pressure_drop", "inlet", "outlet"), drop)
    yield row("wall shear, Pa", _of(result, "wall_shear_mean", "outer"), shear)
    yield row("kinetic-energy coefficient", _of(result, "kinetic_energy_coefficient", "inlet"), 54 / 35)


def tube() -> Iterator[Row]:
    """Hagen-Poiseuille flow in a bore of 2 mm."""
    result, radius = run(case("tube")), 1e-3
    drop, shear = 8 * MU * LENGTH * FLOW / (np.pi * radius**4), 4 * MU * FLOW / (np.pi * radius**3)
    row = partial(Row, "tube", tolerance=1e-9, source=SHAH_LONDON.format("Hagen-Poiseuille"))
    yield row("total pressure drop, Pa", _of(result, "total_pressure_drop", "inlet", "outlet"), drop)
    yield row("wall shear, Pa", _of(result, "wall_shear_mean", "outer"), shear)
    yield row("kinetic-energy coefficient", _of(result, "kinetic_energy_coefficient", "inlet"), 2.0)


def annulus() -> Iterator[Row]:
    """Concentric annulus of radii 1 and 2 mm; its profile has a logarithm, so it is exact in the limit only."""
    result, a, b = run(case("annulus")), 1e-3, 2e-3
    gradient = 8 * MU * FLOW / (np.pi * (b**4 - a**4 - (b**2 - a**2) ** 2 / np.log(b / a)))
    shear = gradient / 4 * ((b**2 - a**2) / (a * np.log(b / a)) - 2 * a)
    row = partial(Row, "annulus", source=SHAH_LONDON.format("annular"))
    drop = _of(result, "total_pressure_drop", "inlet", "outlet")
    yield row("total pressure drop, Pa", drop, gradient * LENGTH, tolerance=1e-7)
    yield row("wall shear on the inner wall, Pa", _of(result, "wall_shear_mean", "inner"), shear, tolerance=1e-5)
