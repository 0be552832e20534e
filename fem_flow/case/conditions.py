"""What is known at ports and walls, in SI, and whether that makes one flow."""

from __future__ import annotations

from fem_flow.case.declaration import Declaration
from fem_flow.case.resolved import Fluid, PortCondition, WallCondition
from fem_flow.case.words import choice, refuse
from fem_flow.units import DIMENSIONS, parse, quoted, read


def port_conditions(case, declaration: Declaration, fluid: Fluid, ambient: float | None) -> dict[str, PortCondition]:
    """Condition of every port, in the part's order; raises ``CaseError`` for an unknown port and one without a condition."""
    names = declaration.ports or ()
    for name in case.ports:
        if name not in names:
            has = choice(name, names, "it has") if names else "; it has no ports"
            raise refuse(
                case.source, f"[ports.{name}]", f"is not a port of {declaration.name}{has}", "unknown_port", known=list(names)
            )
    for name in names:
        if name not in case.ports:
            raise refuse(
                case.source,
                f"[ports.{name}]",
                f"is missing: every port of {declaration.name} needs a condition, such as "
                'static_pressure = "0 bar" or closed = true',
                "missing",
                known=list(names),
            )
    return {name: _port(case, name, fluid, ambient) for name in names}


def _port(case, name: str, fluid: Fluid, ambient: float | None) -> PortCondition:
    ((key, text),) = case.ports[name].given().items()
    if key == "closed":
        return PortCondition("closed")
    sign = -1.0 if key.endswith("_out") else 1.0
    if key.startswith("flow"):
        value, dimension = parse(text, (DIMENSIONS["volume flow"], DIMENSIONS["mass flow"]), key)
        return PortCondition("flow", sign * value / (fluid.density if dimension.unit == "kg/s" else 1.0))
    if key.startswith("velocity"):
        return PortCondition("velocity", sign * read(text, "velocity", key))
    value = read(text, "pressure", key)
    if ambient is not None and ambient + value < 0:
        raise refuse(
            case.source,
            f"[ports.{name}] {key}",
            f"is {quoted(text)} against an ambient of {case.model.ambient}, which is below zero "
            "absolute; port pressures are counted from ambient",
            "below_vacuum",
            absolute=ambient + value,
        )
    return PortCondition(key, value)


def wall_conditions(case, declaration: Declaration, walls: tuple[str, ...]) -> dict[str, WallCondition]:
    """Condition of the walls that the case mentions; `walls` are those of the drawn outline."""
    found = {}
    for name, wall in case.walls.items():
        if name not in walls:
            if name in ("axis", "symmetry") or name in (declaration.ports or ()):
                what = "a port" if name in (declaration.ports or ()) else f"the part's {name}"
                raise refuse(
                    case.source,
                    f"[walls.{name}]",
                    f"is {what} and no wall of {declaration.name}{choice('', walls, 'its walls are')}",
                    "unknown_wall",
                    known=list(walls),
                )
            raise refuse(
                case.source,
                f"[walls.{name}]",
                f"is not a wall of {declaration.name}{choice(name, walls, 'it has')}",
                "unknown_wall",
                known=list(walls),
            )
        if wall.slip:
            found[name] = WallCondition("slip")
        else:
            speed = read(wall.velocity, "velocity", "velocity")
            found[name] = WallCondition("sliding", speed) if speed else WallCondition("rest")
    return found


def check_levels(case, ports: dict[str, PortCondition], walls: dict[str, WallCondition]) -> None:
    """Refuse conditions that leave the pressure level open, contradict each other, or move nothing."""
    moving = any(w.what == "sliding" for w in walls.values())
    opened = {name: c for name, c in ports.items() if c.what != "closed"}
    given = [name for name, c in opened.items() if c.what in ("flow", "velocity")]
    pressed = {name: c.value for name, c in opened.items() if name not in given}

    def refusal(predicate, reason):
        return refuse(case.source, "[ports]", predicate, reason)

    if not opened and not moving:
        if ports:
            what = (
                'closes every port and no wall moves, so nothing would flow; open a port, for example static_pressure = "0 bar"'
            )
        else:
            what = 'is empty and no wall moves, so nothing would flow; let one slide: [walls.NAME] velocity = "0.1 m/s"'
        raise refusal(what, "nothing_flows")
    if given and len(opened) == 1:
        what = f"leaves only {given[0]} open, whose flow could not leave; open another port"
        raise refusal(f'{what}, for example static_pressure = "0 bar"', "no_way_out")
    if given and not pressed:
        what = f'gives no pressure anywhere; write [ports.{given[-1]}] static_pressure = "0 bar" instead of its flow'
        raise refusal(f"{what}, which then follows from the others", "no_pressure_level")
    if pressed and not given and not moving:
        if len(opened) == 1:
            raise refusal(f"leaves only {next(iter(pressed))} open, so nothing would flow; open another port", "nothing_flows")
        if len(set(pressed.values())) == 1:
            what = "gives the same pressure everywhere, so nothing would flow; change one pressure or give a flow"
            raise refusal(what, "nothing_flows")
