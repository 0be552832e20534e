"""Loading a part script and asking it for its declaration and its drawing. This executes the script."""

from __future__ import annotations

import importlib
import sys
import traceback
from collections.abc import Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from types import ModuleType, SimpleNamespace

from fem_flow.case.declaration import Declaration, Parameter
from fem_flow.errors import FemFlowError, GeometryError
from fem_flow.part.session import missing_library

KINDS = ("planar", "axisymmetric")
RESERVED_PARAMETERS = ("script", "file", "unit", "kind", "inside")
RESERVED_NAMES = ("axis", "symmetry")

METRES = {
    "m": 1.0,
    "dm": 1e-1,
    "cm": 1e-2,
    "mm": 1e-3,
    "um": 1e-6,
    "µm": 1e-6,
    "μm": 1e-6,
    "micrometer": 1e-6,
    "micrometre": 1e-6,
    "nm": 1e-9,
    "in": 0.0254,
    "inch": 0.0254,
    "mil": 2.54e-5,
    "thou": 2.54e-5,
    "ft": 0.3048,
    "foot": 0.3048,
}
"""Length of one drawing unit in metres; the inch is 25.4 mm exactly (international yard and pound agreement, 1959)."""


@dataclass(frozen=True)
class Script:
    """A loaded script: its path and its namespace."""

    path: Path
    space: dict

    @property
    def metres(self) -> float:
        """Length of one drawing unit, m."""
        return METRES[self.space["unit"]]


def load(path: str | Path) -> Script:
    """Execute a script file and check what it says of itself.

    Raises
    ------
    GeometryError : reason ``"script_failed"`` (it stopped with an error), ``"bad_script"`` (something missing or misspelt)
    """
    path = Path(path).resolve()
    module = ModuleType("fem_flow_part_" + path.stem)
    module.__file__ = str(path)
    sys.modules[module.__name__] = module
    with _running(path):
        exec(compile(path.read_bytes(), str(path), "exec"), module.__dict__)
    script = Script(path, module.__dict__)
    _check(script)
    return script


def declaration(script: Script, values: Mapping | None = None) -> Declaration:
    """What the script declares; kind, ports and legs that depend on the parameters are None without ``values``."""
    space = script.space
    says, _, sketch = (space.get("__doc__") or "").strip("\n").partition("\n")
    kind = _asked(script, "kind", values)
    ports = _asked(script, "ports", values)
    legs = _asked(script, "legs", values)
    if kind is not None and kind not in KINDS:
        raise _bad(script, f'its kind is {kind!r}; it must be "planar" or "axisymmetric"')
    ports = None if ports is None else _names(script, "ports", ports)
    if legs is not None:
        legs = _legs(script, legs, ports)
    return Declaration(
        name=script.path.stem,
        path=str(script.path),
        says=says.strip(),
        sketch=sketch.strip("\n"),
        unit=space["unit"],
        parameters=dict(space.get("parameters", {})),
        sections=_names(script, "sections", space.get("sections", ())),
        kind=kind,
        ports=ports,
        legs=legs,
    )


def draw(script: Script, values: Mapping) -> None:
    """Call the script's ``draw`` with these values; gmsh is open and its model empty."""
    with _running(script.path):
        script.space["draw"](SimpleNamespace(**values))


def _asked(script, key, values):
    said = script.space.get(key)
    if not callable(said):
        return said
    if values is None:
        return None
    with _running(script.path):
        return said(SimpleNamespace(**values))


def _check(script):
    space = script.space
    unit = space.get("unit")
    if unit not in METRES:
        known = ", ".join(k for k in METRES if k.isascii())
        said = "it says no unit" if unit is None else f"its unit {unit!r} is not known"
        raise _bad(script, f'{said}; write for example unit = "mm" (known: {known})')
    if not callable(space.get("draw")):
        raise _bad(script, "it has no function draw(p)")
    if space.get("kind") is None:
        raise _bad(script, 'it says no kind; write kind = "planar" or kind = "axisymmetric"')
    if space.get("ports") is None:
        raise _bad(script, 'it says no ports; write for example ports = ["inlet", "outlet"], or ports = [] for a closed part')
    parameters = space.get("parameters", {})
    if not isinstance(parameters, Mapping):
        raise _bad(script, "its parameters must be a dict of name: Parameter(...)")
    for name, parameter in parameters.items():
        if not isinstance(name, str) or not name.isidentifier():
            raise _bad(script, f"{name!r} cannot name a parameter; use letters, digits and underscores")
        if name in RESERVED_PARAMETERS:
            raise _bad(script, f"{name!r} cannot name a parameter; reserved are {', '.join(RESERVED_PARAMETERS)}")
        if not isinstance(parameter, Parameter):
            raise _bad(script, f'its parameter {name} must be a Parameter, for example Parameter("12 mm")')


def _names(script, key, names):
    if isinstance(names, str) or not all(isinstance(n, str) for n in names):
        raise _bad(script, f"its {key} must be a list of names")
    names = tuple(names)
    for name in names:
        if names.count(name) > 1:
            raise _bad(script, f"its {key} name {name!r} twice")
        if name in RESERVED_NAMES:
            raise _bad(script, f"{name!r} cannot be one of its {key}: the name is reserved for boundaries of that role")
    return names


def _legs(script, legs, ports):
    if not isinstance(legs, Mapping):
        raise _bad(script, "its legs must be a dict of port: straight length")
    for name in legs:
        if ports is not None and name not in ports:
            raise _bad(script, f"its legs name {name!r}, which is not one of its ports: {', '.join(ports)}")
    return {name: float(length) for name, length in legs.items()}


def _bad(script, what):
    return GeometryError(
        f"the script {script.path.name} cannot be used: {what}", reason="bad_script", details={"script": str(script.path)}
    )


@contextmanager
def _running(path: Path):
    """Run the user's code: its folder importable, its exceptions turned into sentences."""
    folder = str(path.parent)
    before = set(sys.modules)
    sys.path.insert(0, folder)
    importlib.invalidate_caches()
    try:
        yield
    except FemFlowError:
        raise
    except (Exception, SystemExit, KeyboardInterrupt) as error:
        raise _failure(path, error) from error
    finally:
        if folder in sys.path:
            sys.path.remove(folder)
        for name in set(sys.modules) - before:
            if Path(getattr(sys.modules[name], "__file__", None) or "/").parent == path.parent:
                del sys.modules[name]


def _failure(path: Path, error: BaseException) -> GeometryError:
    if isinstance(error, OSError) and ".so" in str(error):
        return missing_library(error)
    frames = traceback.extract_tb(error.__traceback__)
    own = [frame for frame in frames if frame.filename == str(path)]
    message = " ".join(str(error).split()) or "no message"
    details = {"script": str(path), "error": type(error).__name__, "message": message}
    if isinstance(error, ValueError) and own and frames[-1].filename == str(path):
        return GeometryError(message, reason="impossible_dimensions", details=details)
    line = error.lineno if isinstance(error, SyntaxError) and error.filename == str(path) else own[-1].lineno if own else None
    details["line"] = line
    where = f" in line {line}" if line else ""
    return GeometryError(
        f"the script {path.name} failed{where}: {type(error).__name__}: {message}", reason="script_failed", details=details
    )
