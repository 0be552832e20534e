"""Lid-driven square cavity at Re 100, 400 and 1000: the centre lines and their extrema."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from scipy.optimize import minimize_scalar

from fem_flow.case.model import Case
from fem_flow.job import run
from fem_flow.result import Result
from fem_flow.verify.cavity_tables import TABLES, Line
from fem_flow.verify.parts import part
from fem_flow.verify.table import Row

BOTELLA = "Botella & Peyret, Computers & Fluids 27 (1998) 421: spectral, mirrored to a lid that moves to +x"
COMPUTED = "triangles of high order (P8/P7) graded into all four corners, good to about 1e-5"
MARCHI = "P9/P8 triangles, 6 digits; Marchi, Suero & Araki, J. Braz. Soc. Mech. Sci. Eng. 31 (2009) 186 extrapolate to {}"
GHIA = "Ghia, Ghia & Shin, J. Comput. Phys. 48 (1982) 387 print {} (second order, up to some per cent off)"
EXTREMA = {
    100: (-0.2140422, 0.1795727, -0.2538028),
    400: (-0.32872, 0.30383, -0.45405),
    1000: (-0.3885698, 0.3769447, -0.5270771),
}
"""Least u on x = 1/2, largest and least v on y = 1/2, in units of the lid's speed."""
SOURCES = {
    100: [MARCHI.format(text) for text in ("-0.2140417", "0.1795728", "-0.2538030")],
    400: [f"{COMPUTED}; {GHIA.format(text)}" for text in ("-0.32726", "0.30203", "-0.44993")],
    1000: [BOTELLA] * 3,
}
SIZE = {100: "20 mm", 400: "16 mm", 1000: "12 mm"}
"""Largest elements in a cavity of 1 m; they are graded into the lid's corners."""
TOLERANCE = 2e-4


def case(reynolds: int) -> Case:
    """Lid at 1 m/s on a side of 1 m, density 1 kg/m^3; the viscosity makes the Reynolds number."""
    return Case(
        title=f"Lid-driven cavity, Re {reynolds}",
        part={"script": part("cavity")},
        fluid={"density": "1 kg/m^3", "viscosity": f"{1 / reynolds!r} Pa*s"},
        model={"depth": "1 m"},
        walls={"lid": {"velocity": "1 m/s"}},
        mesh={"size": SIZE[reynolds]},
    )


def cavity(reynolds: int) -> Iterator[Row]:
    """The worst place of each table and the extrema of the velocity on the centre lines."""
    result, name = run(case(reynolds)), f"cavity_{reynolds}"
    for line in TABLES[reynolds]:
        found = centre_line(result, line.component, line.at)
        worst = int(np.argmax(np.abs(found - line.values)))
        quantity = f"{_along(line, worst)}, the worst of {len(line.at)} places"
        source = _source(reynolds, line, worst)
        yield Row(name, quantity, float(found[worst]), line.values[worst], TOLERANCE, source, absolute=True)
    names = ("least u on x = 1/2", "largest v on y = 1/2", "least v on y = 1/2")
    found = [_extreme(result, component, sign) for component, sign in (("u", 1), ("v", -1), ("v", 1))]
    for quantity, computed, published, source in zip(names, found, EXTREMA[reynolds], SOURCES[reynolds], strict=True):
        yield Row(name, quantity, computed, published, TOLERANCE, source)


def centre_line(result: Result, component: str, at) -> np.ndarray:
    """u at (1/2, y) or v at (x, 1/2), m/s; ``at`` in m."""
    at = np.atleast_1d(at)
    half = np.full_like(at, 0.5)
    if component == "u":
        return result.fields.velocity(np.stack([half, at], axis=1))[0]
    return result.fields.velocity(np.stack([at, half], axis=1))[1]


def _along(line: Line, k: int) -> str:
    return f"u at y = {line.at[k]:.4f}" if line.component == "u" else f"v at x = {line.at[k]:.4f}"


def _source(reynolds: int, line: Line, k: int) -> str:
    source = BOTELLA if reynolds == 1000 else COMPUTED
    return source if line.ghia[k] is None else f"{source}; {GHIA.format(line.ghia[k])}"


def _extreme(result: Result, component: str, sign: int) -> float:
    """Least (sign 1) or largest (sign -1) value along a centre line."""

    def value(s):
        return sign * centre_line(result, component, s)

    grid = np.linspace(0.01, 0.99, 197)
    at = grid[int(np.argmin(value(grid)))]
    near = (at - 0.01, at + 0.01)
    best = minimize_scalar(lambda s: float(value(s)[0]), bounds=near, method="bounded", options={"xatol": 1e-8})
    return sign * float(best.fun)
