"""The schema of a case file as frozen pydantic models; keys exactly those of the TOML.

Here every value is checked by itself: type, unit, plausible size. What needs the part (its parameters, ports, kind) is checked
in ``case/check.py``. Whatever is wrong comes out as a ``CaseError`` with one sentence.
"""

from __future__ import annotations

import os
from pathlib import Path
from typing import Annotated, Any

from pydantic import BaseModel, BeforeValidator, ConfigDict, PrivateAttr, ValidationError, model_validator

from fem_flow.case import read
from fem_flow.case.values import Fixed, flag, flow, not_built, plain, quantity, share, text, texts, velocity, whole
from fem_flow.case.words import Problem, nearest


def _key(check) -> Any:
    return Annotated[Any, BeforeValidator(lambda value, info: None if value is None else check(value, info.field_name))]


class _Table(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid")

    def given(self) -> dict[str, Any]:
        """The keys that were given, in the order of the schema."""
        return {k: v for k, v in self.model_dump().items() if v is not None}

    def __repr_args__(self):
        return self.given().items()


class Part(_Table):
    """``[part]``: the script, and every further key a parameter of it."""

    model_config = ConfigDict(frozen=True, extra="allow")
    script: _key(text("poppet_valve")) = None
    file: _key(text("gallery.dxf")) = None
    unit: _key(not_built("; it goes with file, and a script says its own unit")) = None
    kind: _key(not_built("; it goes with file, and a script says its own kind")) = None
    inside: _key(not_built("; it goes with file")) = None

    @model_validator(mode="after")
    def _one_source(self):
        if self.script is not None and self.file is not None:
            raise Problem("has both script and file; keep one of them", "contradiction")
        if self.file is not None:
            raise Problem('has file, which is known but not built in this version; give script = "..." instead', "not_built")
        if self.script is None:
            near = next((k for k in self.parameters if nearest(k, ["script"])), None)
            meant = f"; did you mean script where it says {near}?" if near else ""
            raise Problem(f'needs script = "...", the name of a shipped part or the path of a script{meant}', "missing")
        return self

    @property
    def parameters(self) -> dict[str, Any]:
        """What is given of the part's own parameters, as written."""
        return dict(self.__pydantic_extra__ or {})


class FluidTable(_Table):
    """``[fluid]``: a fluid of the library at a temperature, or its properties."""

    name: _key(text("ISO VG 46")) = None
    temperature: _key(quantity("temperature", "40 degC")) = None
    glycerol: _key(share("60 %", low=0.0, high=1.0)) = None
    density: _key(quantity("density", "870 kg/m^3", positive=True)) = None
    viscosity: _key(quantity("viscosity", "40 mPa*s", positive=True)) = None
    kinematic_viscosity: _key(quantity("kinematic viscosity", "46 cSt", positive=True)) = None
    heat_capacity: _key(quantity("heat capacity", "1900 J/(kg*K)", positive=True)) = None
    vapour_pressure: _key(quantity("pressure", "2340 Pa", positive=True)) = None
    sound_speed: _key(quantity("velocity", "1480 m/s", positive=True)) = None
    power_law: _key(not_built()) = None
    carreau: _key(not_built()) = None
    cross: _key(not_built()) = None
    bingham: _key(not_built()) = None
    casson: _key(not_built()) = None


class ModelTable(_Table):
    """``[model]``: which equations, and what the drawing does not say."""

    inertia: _key(flag("true, or false for Stokes flow")) = None
    ambient: _key(
        quantity("pressure", "1.01325 bar", positive=True, why="; it is the absolute pressure of the surroundings")
    ) = None
    depth: _key(quantity("length", "25 mm", positive=True)) = None
    cover_plates: _key(not_built()) = None


class Port(_Table):
    """``[ports.NAME]``: one condition."""

    flow_in: _key(flow("flow_out")) = None
    flow_out: _key(flow("flow_in")) = None
    velocity_in: _key(velocity("velocity_out")) = None
    velocity_out: _key(velocity("velocity_in")) = None
    static_pressure: _key(quantity("pressure", "0 bar")) = None
    total_pressure: _key(quantity("pressure", "2 bar")) = None
    closed: _key(flag("true", only=True, instead="give the port another condition instead")) = None
    line: _key(not_built()) = None
    profile: _key(not_built()) = None
    leg: _key(not_built()) = None

    @model_validator(mode="after")
    def _one_condition(self):
        given = list(self.given())
        if not given:
            conditions = "flow_in, flow_out, velocity_in, velocity_out, static_pressure, total_pressure or closed = true"
            raise Problem(f"has no condition; give one of {conditions}", "missing")
        if len(given) > 1:
            raise Problem(f"has {' and '.join(given)}; a port takes one condition", "contradiction")
        return self


class Wall(_Table):
    """``[walls.NAME]``: a wall that slides along itself, or slips."""

    velocity: _key(quantity("velocity", "0.1 m/s")) = None
    slip: _key(flag("true", only=True, instead="leave the wall out, then it is a no-slip wall at rest")) = None
    rotation: _key(not_built()) = None
    centre: _key(not_built()) = None

    @model_validator(mode="after")
    def _one_condition(self):
        given = list(self.given())
        if not given:
            raise Problem('says nothing; give velocity = "0.1 m/s" or slip = true, or leave the wall out (at rest)', "missing")
        if len(given) > 1:
            raise Problem(f"has {' and '.join(given)}; a wall takes one condition", "contradiction")
        return self


class AccuracyTable(_Table):
    """``[accuracy]``: how small the error bars shall be, and of what."""

    target: _key(text("1 %", bare="1 %")) = None
    of: _key(texts('["total_pressure_drop inlet outlet"]')) = None
    unknowns: _key(whole("400_000", low=1000)) = None


class MeshTable(_Table):
    """``[mesh]``: sizes for those who must."""

    size: _key(quantity("length", "0.5 mm", positive=True)) = None
    near_walls: _key(quantity("length", "0.1 mm", positive=True)) = None


class Case(_Table):
    """One evaluation: a part, a fluid, what is known at its ports. Frozen; ``with_`` gives a changed copy.

    ``Case.read("poppet.toml")``, or ``Case(part={...}, fluid={...}, ports={...})`` with the same keys as the file. Paths in it
    count from ``folder``: the file's, or the current one. Raises ``CaseError`` where something is wrong.
    """

    title: _key(text("Poppet check valve")) = None
    part: Part
    fluid: FluidTable
    model: ModelTable = ModelTable()
    ports: dict[str, Port] = {}
    walls: dict[str, Wall] = {}
    accuracy: AccuracyTable | None = None
    mesh: MeshTable | None = None
    _folder: Path = PrivateAttr(default_factory=Path.cwd)
    _source: str | None = PrivateAttr(default=None)

    def __init__(self, **keys):
        self._fill(keys, None)

    def _fill(self, keys: dict, source: str | None) -> None:
        data = plain(keys)
        try:
            BaseModel.__init__(self, **data)
        except ValidationError as errors:
            raise read.one_sentence(errors, type(self), data, source) from None
        for name in ("ports", "walls"):
            self.__dict__[name] = Fixed(getattr(self, name))

    @classmethod
    def read(cls, path: str | os.PathLike) -> Case:
        """Read a case file (TOML, UTF-8); raises ``CaseError`` with file, key and what to write instead."""
        path = Path(path)
        return cls._make(read.load(path), path.resolve().parent, path.name)

    @classmethod
    def _make(cls, keys: dict, folder: Path, source: str | None = None) -> Case:
        case = cls.__new__(cls)
        case._fill(keys, source)
        case._folder, case._source = folder, source
        return case

    @property
    def folder(self) -> Path:
        """Where relative paths of the case count from."""
        return self._folder

    @property
    def source(self) -> str | None:
        """Name of the file it was read from, or None."""
        return self._source

    def __eq__(self, other) -> bool:
        return isinstance(other, Case) and (self.to_dict(), self.folder) == (other.to_dict(), other.folder)

    __hash__ = None

    def __repr_args__(self):
        return self.to_dict().items()

    def to_dict(self) -> dict:
        """The keys as given, as plain data like a parsed file."""
        part = {"script": self.part.script, **self.part.parameters}
        data = {"title": self.title, "part": part, "fluid": self.fluid.given(), "model": self.model.given()}
        data["ports"] = {name: port.given() for name, port in self.ports.items()}
        data["walls"] = {name: wall.given() for name, wall in self.walls.items()}
        data["accuracy"] = self.accuracy.given() if self.accuracy else None
        data["mesh"] = self.mesh.given() if self.mesh else None
        return {k: v for k, v in data.items() if v is not None and (v != {} or k not in ("model", "ports", "walls"))}

    def to_toml(self) -> str:
        """The case as the text of a case file."""
        from fem_flow.case.write import case_toml

        return case_toml(self.to_dict(), header="")

    def with_(
        self, *, title=..., part=None, fluid=None, model=None, ports=None, walls=None, accuracy=..., mesh=..., **parameters
    ) -> Case:
        """A changed copy; the original is untouched.

        Bare keywords are parameters of the part: ``case.with_(lift="1.5 mm")``. A table is merged into the old one, but a port
        or wall named in `ports` or `walls` gets a wholly new condition. None takes a key away, so that its default holds.
        """
        from fem_flow.case.merge import merged

        keys = {"part": {**(part or {}), **parameters}, "fluid": fluid, "model": model, "ports": ports, "walls": walls}
        keys |= {k: v for k, v in (("title", title), ("accuracy", accuracy), ("mesh", mesh)) if v is not ...}
        return type(self)._make(merged(self.to_dict(), plain(keys, keep_none=True)), self.folder)
