"""Steady flow past a cylinder in a channel at Re = 20."""

from __future__ import annotations

from collections.abc import Iterator

from scipy.optimize import brentq

from fem_flow.case.model import Case
from fem_flow.job import run
from fem_flow.verify.parts import part
from fem_flow.verify.table import Row

NABH = "Nabh, thesis, Heidelberg 1998, in John & Matthies, Int. J. Numer. Meth. Fluids 37 (2001) 885"
SCHAEFER = "P8/P7 curved triangles, 6 digits; Schaefer & Turek (1996, case 2D-1) bracket it by 0.0842 and 0.0852 (from memory)"


def case(target: str = "0.02 %", unknowns: int = 150_000) -> Case:
    """rho 1, nu 1e-3, mean inflow 0.2 m/s on a height of 0.41 m, cylinder of 0.1 m."""
    return Case(
        title="Cylinder in a channel, Re 20",
        part={"script": part("cylinder_channel")},
        fluid={"density": "1 kg/m^3", "viscosity": "1 mPa*s"},
        model={"depth": "1 m"},
        ports={"inlet": {"velocity_in": "0.2 m/s"}, "outlet": {"static_pressure": "0 Pa"}},
        accuracy={"target": target, "of": ["force_x cylinder"], "unknowns": unknowns},
    )


def cylinder() -> Iterator[Row]:
    """Drag, lift, pressure difference and length of the eddy."""
    result = run(case())
    front, rear = result.fields.pressure([(0.15, 0.2), (0.25, 0.2)])
    end = brentq(lambda x: float(result.fields.velocity([(x, 0.2)])[0, 0]), 0.27, 0.45, xtol=1e-9)
    yield Row("cylinder", "drag coefficient", 500 * float(result["force_x", "cylinder"]), 5.57953523384, 1e-4, NABH)
    yield Row("cylinder", "lift coefficient", 500 * float(result["force_y", "cylinder"]), 0.010618948146, 1e-2, NABH)
    yield Row("cylinder", "pressure difference, Pa", float(front - rear), 0.11752016697, 1e-4, NABH)
    yield Row("cylinder", "length of the eddy, m", float(end) - 0.25, 0.0845789, 1e-4, SCHAEFER)
