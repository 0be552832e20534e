"""A complete, commented case file for a part, ready to run."""

from __future__ import annotations

import tomli_w

from fem_flow.case.accuracy import DEFAULT_OF, TARGET, UNKNOWNS
from fem_flow.case.declaration import Declaration, Parameter
from fem_flow.case.fluids import LIBRARY, fluid_of
from fem_flow.units import convert, root_of, split

REYNOLDS = 100.0
"""Reynolds number of a draft, on the first length among the part's parameters: laminar, and with some inertia."""


def draft(declaration: Declaration, walls: tuple[str, ...] = (), script: str | None = None) -> str:
    """Text of a case file with every parameter, its limits and meaning, that runs as it is.

    By convention the first length among a part's parameters is the size of its first port; the velocity there is chosen so that
    the Reynolds number on that length is ``REYNOLDS``. Parts smaller than 1 mm are given water, others hydraulic oil.

    Parameters
    ----------
    declaration : of the part, asked with its defaults: kind and ports are filled
    walls : names of its walls, if they are known; the first one slides where the part has no ports
    script : what ``[part] script`` says; the part's name if left out
    """
    name, size = _size(declaration)
    fluid = {"name": "water", "temperature": "20 degC"} if size < 1e-3 else {"name": "ISO VG 46", "temperature": "40 degC"}
    properties = fluid_of(fluid, None)
    speed = f"{REYNOLDS * properties.viscosity / properties.density / size:.2g} m/s"
    about = f"section mean; a Reynolds number of about {REYNOLDS:.0f} on {name}" if name else "section mean"
    blocks = [
        [_line("title", declaration.says.split(":")[0].rstrip(".") or declaration.name)],
        ["[part]", _line("script", script or declaration.name), *_parameters(declaration)],
        ["[fluid]", _line("name", fluid["name"], ", ".join(LIBRARY) + "; or density and viscosity"),
         _line("temperature", fluid["temperature"])],
        _model(declaration, size),
        *_ports(declaration, speed, about),
        *_walls(declaration, speed, walls),
        _accuracy(declaration),
    ]  # fmt: skip
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _line(key: str, value, says: str = "") -> str:
    text = tomli_w.dumps({key: value}).strip()
    return f"{text:<31} # {says}" if says else text


def _size(declaration: Declaration) -> tuple[str | None, float]:
    """Name and value [m] of the first length among the parameters."""
    for name, parameter in declaration.parameters.items():
        if isinstance(parameter.default, str) and parameter.choices is None:
            number, unit = split(parameter.default)
            if root_of(unit) == root_of("m") and number > 0:
                return name, convert(number, unit, "m")
    return None, 0.01


def _parameters(declaration: Declaration) -> list[str]:
    return [
        _line(name, p.default, "; ".join(s for s in (" ".join(p.says.split()), _limits(p)) if s))
        for name, p in declaration.parameters.items()
    ]


def _limits(parameter: Parameter) -> str:
    if parameter.choices is not None:
        return "one of " + ", ".join(parameter.choices)
    if isinstance(parameter.default, bool):
        return "true or false"
    low, high = parameter.low, parameter.high
    if low is not None and high is not None:
        return f"{low} to {high}"
    return f"at least {low}" if low is not None else f"at most {high}" if high is not None else ""


def _model(declaration: Declaration, size: float) -> list[str]:
    lines = ["[model]", _line("inertia", True, "false: Stokes flow"),
             _line("ambient", "1.01325 bar", "absolute pressure that all port pressures are counted from")]  # fmt: skip
    if declaration.kind == "planar":
        depth = f"{10e3 * size:.3g} mm"
        lines.append(_line("depth", depth, "size into the page; the flow is planar where this is large against the gaps"))
    return lines


def _ports(declaration: Declaration, speed: str, about: str) -> list[list[str]]:
    ports = declaration.ports or ()
    if not ports:
        return []
    first = [f"[ports.{_key(ports[0])}]", _line("velocity_in", speed, about),
             '# flow_in = "1 L/min"           # instead: a volume or mass flow of the whole part; or flow_out, velocity_out,',
             "#                               # static_pressure, total_pressure, or closed = true"]  # fmt: skip
    return [first, *([f"[ports.{_key(port)}]", _line("static_pressure", "0 bar")] for port in ports[1:])]


def _walls(declaration: Declaration, speed: str, walls: tuple[str, ...]) -> list[list[str]]:
    if not declaration.ports and walls:
        return [[f"[walls.{_key(walls[0])}]", _line("velocity", speed, "slides along itself")]]
    name = _key(walls[0]) if walls else "NAME"
    return [
        [f"# [walls.{name}]", '# velocity = "0.1 m/s"          # a wall that slides along itself; or slip = true. Others rest']
    ]


def _accuracy(declaration: Declaration) -> list[str]:
    of = [
        q
        for q in DEFAULT_OF
        if not ((q == "force_y" and declaration.kind == "axisymmetric") or ("drop" in q and len(declaration.ports or ()) < 2))
    ]
    listed = ", ".join(f'"{q}"' for q in of)
    return ["# [accuracy]                    # these are the defaults",
            f'# target = "{TARGET}"                # largest error bar of each figure named in `of`; "20 Pa" is absolute',
            f"# of = [{listed}]",
            f"# unknowns = {UNKNOWNS:_}            # never above this many"]  # fmt: skip


def _key(name: str) -> str:
    """A name as a TOML key, quoted where it must be."""
    return tomli_w.dumps({name: 1}).split(" = ")[0]
