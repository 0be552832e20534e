"""The names of a drawing as gmsh holds them: physical groups on curves and surfaces."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from fem_flow.errors import GeometryError


@contextmanager
def watched_names(gmsh) -> Iterator[None]:
    """While a script draws, refuse a name on something that does not exist; gmsh itself drops it without a word.

    Raises
    ------
    GeometryError : reason ``"no_such_curve"`` or ``"no_such_surface"``
    """
    plain = gmsh.model.addPhysicalGroup

    def add(dim, tags, tag=-1, name=""):
        existing = {t for _, t in gmsh.model.getEntities(dim)}
        for t in (int(t) for t in tags):
            if t not in existing:
                kind = {1: "curve", 2: "surface"}.get(dim, "entity")
                raise GeometryError(
                    f"the name {name} is given to {kind} {t}, which does not exist; name things after the last Boolean, which"
                    " renumbers them, and after gmsh.model.occ.synchronize()",
                    reason=f"no_such_{kind}",
                    details={"name": name, kind: t},
                )
        return plain(dim, tags, tag, name)

    gmsh.model.addPhysicalGroup = staticmethod(add)
    try:
        yield
    finally:
        gmsh.model.addPhysicalGroup = staticmethod(plain)


def curve_names(gmsh, known: set[int]) -> dict[int, str]:
    """Name of each named curve, from the physical groups.

    Parameters
    ----------
    known : the curves that bound the fluid or lie in it

    Raises
    ------
    GeometryError : a group without a name or on a loose curve, or a curve with two names
    """
    names: dict[int, str] = {}
    for _, group in gmsh.model.getPhysicalGroups(1):
        name = gmsh.model.getPhysicalName(1, group)
        if not name:
            raise GeometryError(
                f"a group of curves (number {group}) has no name; give addPhysicalGroup a name", reason="unnamed_group"
            )
        for tag in (int(t) for t in gmsh.model.getEntitiesForPhysicalGroup(1, group)):
            if tag not in known:
                raise GeometryError(
                    f"the name {name} is given to a curve that is no part of the fluid region",
                    reason="loose_curve",
                    details={"name": name, "curve": tag},
                )
            if names.get(tag, name) != name:
                raise GeometryError(
                    f"one piece of the outline carries two names, {names[tag]} and {name}; each piece needs exactly one",
                    reason="two_names",
                    details={"names": [names[tag], name], "curve": tag},
                )
            names[tag] = name
    return names


def regions(gmsh, surfaces: tuple[int, ...]) -> dict[str, tuple[int, ...]]:
    """Surfaces of each named region."""
    found: dict[str, tuple[int, ...]] = {}
    for _, group in gmsh.model.getPhysicalGroups(2):
        name = gmsh.model.getPhysicalName(2, group)
        tags = tuple(int(t) for t in gmsh.model.getEntitiesForPhysicalGroup(2, group))
        if name:
            found[name] = found.get(name, ()) + tags
    return found
