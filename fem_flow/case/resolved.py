"""A case checked against its part: SI floats and plain words, ready to be solved."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Fluid:
    """A constant-property fluid in SI.

    Attributes
    ----------
    name : as the report prints it
    density : kg/m^3
    viscosity : Pa s
    temperature : K, or None where the user gave the properties
    heat_capacity : J/(kg K), or None if unknown
    vapour_pressure : Pa absolute, or None if unknown
    sound_speed : m/s, or None if unknown
    is_gas : whether the checks for gases apply
    sources : property name -> where its value is from
    """

    name: str
    density: float
    viscosity: float
    temperature: float | None = None
    heat_capacity: float | None = None
    vapour_pressure: float | None = None
    sound_speed: float | None = None
    is_gas: bool = False
    sources: dict[str, str] | None = None


@dataclass(frozen=True)
class PortCondition:
    """What is known at a port, in SI.

    ``what`` is ``"flow"`` (m^3/s of the whole part, positive into the passage), ``"velocity"`` (section mean, m/s,
    positive into the passage), ``"static_pressure"`` or ``"total_pressure"`` (Pa, counted from ambient) or ``"closed"``.
    """

    what: str
    value: float = 0.0


@dataclass(frozen=True)
class WallCondition:
    """What a wall does: ``"rest"``, ``"sliding"`` (value in m/s, positive towards +x, then +y) or ``"slip"``."""

    what: str = "rest"
    value: float = 0.0


@dataclass(frozen=True)
class Accuracy:
    """What the user wants of the error bars.

    Attributes
    ----------
    target : share of the figure's own size (0.01 for "1 %"), or an absolute value in the figure's SI unit
    relative : which of the two
    of : ``(quantity, names)`` pairs; names is () for all of that quantity
    unknowns : never go above this many
    """

    target: float
    relative: bool
    of: tuple[tuple[str, tuple[str, ...]], ...]
    unknowns: int = 400_000


@dataclass(frozen=True)
class ResolvedCase:
    """Everything needed to draw, mesh and solve; nothing here is a string with a unit.

    Attributes
    ----------
    title : str
    values : the part's parameters, floats in the script's unit (angles rad), ints, bools, words
    kind : ``"planar"`` or ``"axisymmetric"``
    depth : m (planar), else None
    fluid : Fluid
    inertia : bool
    ambient : Pa absolute, or None
    ports : port name -> PortCondition, in the part's order
    walls : wall name -> WallCondition, only those the user mentioned
    legs : port -> straight length in m, or None if the part declares none
    accuracy : Accuracy or None where a mesh size was given without an accuracy
    mesh_size, mesh_near_walls : m, or None
    filled : the case as a plain dict with every default filled in, same keys as the TOML file
    """

    title: str
    values: dict
    kind: str
    depth: float | None
    fluid: Fluid
    inertia: bool
    ambient: float | None
    ports: dict[str, PortCondition]
    walls: dict[str, WallCondition]
    legs: dict[str, float] | None
    accuracy: Accuracy | None
    mesh_size: float | None
    mesh_near_walls: float | None
    filled: dict
