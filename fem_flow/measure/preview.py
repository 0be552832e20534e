"""Areas and Reynolds numbers of ports and sections before anything is solved."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fem_flow.case.resolved import ResolvedCase
from fem_flow.flow.sections import distinct_lines
from fem_flow.part.mesh import Outline


def port_table(outline: Outline, case: ResolvedCase) -> Iterator[dict]:
    """One row a port or section; the flow is known where it is given or follows from the only other open port."""
    given = {}
    rows = {}
    for role, names in (("port", tuple(case.ports)), ("section", outline.names("section"))):
        for name in names:
            rows[name] = {"name": name, "role": role, **_geometry(outline, case, name)}
    for name, condition in case.ports.items():
        if condition.what == "flow":
            given[name] = condition.value
        elif condition.what == "velocity":
            given[name] = condition.value * rows[name]["area"]
        elif condition.what == "closed":
            given[name] = 0.0
    unknown = [name for name in case.ports if name not in given]
    if len(unknown) == 1:
        given[unknown[0]] = -sum(given.values())
    entering = sum(q for q in given.values() if q > 0)
    single = len([q for q in given.values() if q > 0]) == 1 and len([q for q in given.values() if q < 0]) == 1
    for name, row in rows.items():
        flow = given.get(name, entering if row["role"] == "section" and single and len(given) == len(case.ports) else None)
        speed = None if flow is None else flow / row["area"]
        fluid = case.fluid
        reynolds = None if speed is None else fluid.density * abs(speed) * row["hydraulic_diameter"] / fluid.viscosity
        yield {**row, "flow_rate": flow, "mean_velocity": speed, "reynolds_number": reynolds}


def _geometry(outline, case, name):
    curves = [c for c in outline.curves if c.name == name]
    length = area = 0.0
    for curve in curves:
        steps = np.linalg.norm(np.diff(curve.points, axis=0), axis=1)
        middle = 0.5 * (curve.points[1:, 1] + curve.points[:-1, 1])
        length += steps.sum()
        area += (steps * (case.depth if case.kind == "planar" else 2 * np.pi * middle)).sum()
    lines = [c.points[[0, -1]] for c in outline.curves if c.role == "symmetry"]
    size = 1e-6 * max(outline.box[2] - outline.box[0], outline.box[3] - outline.box[1])
    touches = any(_distance(p, *line) < size for c in curves for p in (c.points[0], c.points[-1]) for line in lines)
    images = 2 ** len(distinct_lines(*np.array(lines).transpose(1, 0, 2), size)) if lines else 1
    return {"area": float(images * area), "hydraulic_diameter": float(2 * length * (2 if touches else 1))}


def _distance(point, start, end):
    along = end - start
    share = np.clip((point - start) @ along / (along @ along), 0.0, 1.0)
    return np.linalg.norm(point - start - share * along)
