"""What each named curve is: port, wall, axis, symmetry or section; and what is refused."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from fem_flow.case.declaration import Declaration
from fem_flow.errors import GeometryError
from fem_flow.part.cad import FLAT, Cad
from fem_flow.part.script import RESERVED_NAMES


def with_roles(cad: Cad, declared: Declaration) -> Cad:
    """Give every curve its role.

    Raises
    ------
    GeometryError : a piece of the boundary is unnamed, a declared name is missing or misplaced, the axis is not on y = 0
    """
    nameless = [c for c in cad.boundary if c.name is None]
    if nameless:
        first = nameless[0]
        many = "one piece of the boundary has" if len(nameless) == 1 else f"{len(nameless)} pieces of the boundary have"
        raise GeometryError(
            f"{many} no name, the first from {cad.place(first.xy[0])} to {cad.place(first.xy[-1])}; name every piece as a port,"
            " a wall, axis or symmetry",
            reason="unnamed_boundary",
            details={"from": (first.xy[0] * cad.metres).tolist(), "to": (first.xy[-1] * cad.metres).tolist()},
        )
    outer = tuple(dict.fromkeys(c.name for c in cad.boundary))
    inner = tuple(dict.fromkeys(c.name for c in cad.inside if c.name is not None))
    both = [n for n in outer if n in inner]
    if both:
        raise GeometryError(
            f"the name {both[0]} is given to a piece of the boundary and to a curve inside the fluid; use two names",
            reason="two_places",
            details={"name": both[0]},
        )
    for what, names, found, where in (
        ("port", declared.ports, outer, "boundary"),
        ("section", declared.sections, inner, "curve inside the fluid"),
    ):
        for name in names:
            if name not in found:
                raise GeometryError(
                    f"the script declares the {what} {name}, but no {where} in its drawing has that name; it named:"
                    f" {', '.join(outer + inner)}",
                    reason=f"missing_{what}",
                    details={"name": name},
                )
    for name in inner:
        if name in RESERVED_NAMES:
            raise GeometryError(
                f"a curve inside the fluid cannot be called {name}", reason="two_places", details={"name": name}
            )
    roles = {n: "port" if n in declared.ports else n if n in RESERVED_NAMES else "wall" for n in outer}
    boundary = tuple(replace(c, role=roles[c.name]) for c in cad.boundary)
    inside = tuple(replace(c, role="inside" if c.name is None else "section") for c in cad.inside)
    _check_lines(cad, boundary)
    return replace(cad, boundary=boundary, inside=inside)


def _check_lines(cad, boundary):
    """Axis and symmetry are straight; the axis lies on y = 0; nothing lies below it."""
    for curve in boundary:
        if curve.role in RESERVED_NAMES and not _is_straight(curve, cad.size):
            raise GeometryError(f"a curve named {curve.role} is not straight", reason="bent_" + curve.role)
    if cad.kind == "planar":
        if any(c.role == "axis" for c in boundary):
            raise GeometryError("a planar part has no axis; call the line of symmetry symmetry", reason="axis_in_planar")
        return
    flat = FLAT * cad.size
    for curve in boundary:
        lowest = curve.xy[np.argmin(curve.xy[:, 1])]
        if lowest[1] < -flat:
            raise GeometryError(
                f"the outline reaches below the axis, to {cad.place(lowest)}; an axisymmetric part lies in y >= 0",
                reason="below_axis",
                details={"at": (lowest * cad.metres).tolist()},
            )
        on_axis = np.abs(curve.xy[:, 1]).max() <= flat
        if curve.role == "axis" and not on_axis:
            raise GeometryError(f"a curve named axis leaves the line y = 0 at {cad.place(curve.xy[0])}", reason="axis_off_line")
        if on_axis and curve.role != "axis":
            raise GeometryError(
                f"the boundary {curve.name} lies on the axis y = 0; the name of that line is axis",
                reason="axis_name",
                details={"name": curve.name},
            )


def _is_straight(curve, size):
    span = curve.xy[-1] - curve.xy[0]
    off = (curve.xy - curve.xy[0]) @ np.array([-span[1], span[0]]) / max(np.linalg.norm(span), 1e-300)
    return bool(np.abs(off).max() <= 1e-6 * size)
