"""Sphere at rest on the axis of a tube in creeping flow."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.case.model import Case
from fem_flow.job import run
from fem_flow.verify.parts import part
from fem_flow.verify.table import Row

K2 = {0.2: 1.63478639, 0.5: 4.99533861, 0.8: 47.62023397}
"""Sphere diameter over bore -> F / (6 pi mu a V), V the axial velocity of the undisturbed flow; 8 digits."""
PRINTED = {0.2: "1.635", 0.5: "5.004", 0.8: "47.301"}
SOURCE = "P7 triangles, 8 digits; table of Haberman & Sayre, DTMB Report 1143 (1958), has {} (from memory)"
FORMULA = "rational formula of Haberman & Sayre, DTMB Report 1143 (1958), good to 0.1 % up to 0.3 of the bore"


def case(ratio: float) -> Case:
    """Bore 2 mm, axial velocity 1 m/s, viscosity 1 Pa s; ``ratio`` is sphere diameter over bore."""
    return Case(
        title=f"Sphere of {ratio:g} of the bore in a tube",
        part={"script": part("sphere_in_tube"), "tube": "2 mm", "sphere": f"{2 * ratio:g} mm", "reach": "6 mm"},
        fluid={"density": "1000 kg/m^3", "viscosity": "1 Pa*s"},
        model={"inertia": False},
        ports={"inlet": {"velocity_in": "0.5 m/s"}, "outlet": {"static_pressure": "0 Pa"}},
        accuracy={"target": "0.02 %", "of": ["force_x sphere"]},
    )


def drag_factor(ratio: float) -> float:
    """F = 6 pi mu a V K2: the computed K2."""
    return float(run(case(ratio))["force_x", "sphere"]) / (6 * np.pi * 1.0 * ratio * 1e-3 * 1.0)


def haberman_sayre(ratio: float) -> float:
    """Their rational formula for K2."""
    x = ratio
    return (1 - 2 / 3 * x**2 - 0.20217 * x**5) / (1 - 2.1050 * x + 2.0865 * x**3 - 1.7068 * x**5 + 0.72603 * x**6)


def sphere() -> Iterator[Row]:
    """Drag factor at 0.2, 0.5 and 0.8 of the bore."""
    found = {ratio: drag_factor(ratio) for ratio in K2}
    yield Row("sphere", "drag factor at 0.2 of the bore, formula", found[0.2], haberman_sayre(0.2), 1e-3, FORMULA)
    for ratio, factor in K2.items():
        yield Row("sphere", f"drag factor at {ratio:g} of the bore", found[ratio], factor, 1e-4, SOURCE.format(PRINTED[ratio]))
