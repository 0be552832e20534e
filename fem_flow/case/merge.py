"""How the changes of ``Case.with_`` are laid over the keys of a case."""

from __future__ import annotations

_GIVEN = ("density", "viscosity", "kinematic_viscosity")


def merged(old: dict, changes: dict) -> dict:
    """Keys of the changed case.

    A table is merged, a port or a wall replaced as a whole, and None takes a key (or a port, or a table) away.
    """
    new = dict(old)
    for name, change in changes.items():
        if name in ("part", "fluid", "model", "ports", "walls", "accuracy", "mesh") and isinstance(change, dict):
            base = _kept(old.get("fluid", {}), change) if name == "fluid" else old.get(name, {})
            new[name] = {k: v for k, v in {**base, **change}.items() if v is not None}
        elif change is not None:
            new[name] = change  # not a table: the schema says what is wrong with it
        elif name in ("accuracy", "mesh", "title"):
            new.pop(name, None)
    return new


def _kept(fluid: dict, change: dict) -> dict:
    """What stays of the old fluid: a fluid of the library and one given by its properties do not mix."""
    given = [k for k in _GIVEN if change.get(k) is not None]
    if change.get("name") is not None:
        if "name" not in fluid:
            return {}
        same = str(change["name"]).casefold() == fluid["name"].casefold()
        return fluid if same else {k: v for k, v in fluid.items() if k == "temperature"}
    if given and "name" in fluid:
        return {}
    if "viscosity" in given or "kinematic_viscosity" in given:
        return {k: v for k, v in fluid.items() if k not in ("viscosity", "kinematic_viscosity")}
    return fluid
