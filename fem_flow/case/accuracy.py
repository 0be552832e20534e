"""The ``[accuracy]`` and ``[mesh]`` tables: which error bars must be how small."""

from __future__ import annotations

from itertools import combinations

from fem_flow.case.declaration import Declaration
from fem_flow.case.quantities import NOT_BUILT, QUANTITIES, QuantityKind
from fem_flow.case.resolved import Accuracy
from fem_flow.case.words import Problem, choice, located
from fem_flow.units import Dimension, convert, parse, phrase_of, read, root_of, split

TARGET = "1 %"
UNKNOWNS = 400_000
DEFAULT_OF = ("total_pressure_drop", "force_x", "force_y")


class Names:
    """The names of a part that a figure can be of."""

    def __init__(self, declaration: Declaration, kind: str, walls: tuple[str, ...], regions: tuple[str, ...] = ()):
        self.part, self.kind = declaration.name, kind
        self.ports, self.sections = tuple(declaration.ports or ()), tuple(declaration.sections)
        self.walls, self.regions = tuple(walls), tuple(regions)

    def of(self, row: QuantityKind) -> tuple[str, ...]:
        """Names that a figure of this row can be of."""
        return {
            "port or section": self.ports + self.sections,
            "port": self.ports,
            "two ports": self.ports,
            "throat": tuple(s for s in self.sections if s == "throat"),
            "wall": self.walls,
            "region": self.regions,
            "part": (),
        }[row.of]

    def has(self, row: QuantityKind) -> bool:
        """Whether this part has such a figure at all."""
        if row.planar_only and self.kind == "axisymmetric":
            return False
        if row.of == "two ports":
            return len(self.ports) >= 2
        return row.of in ("region", "part") or bool(self.of(row))


def accuracy_of(case, names: Names) -> Accuracy | None:
    """What is wanted of the error bars; None where a mesh is given and no accuracy. Raises ``CaseError``."""
    if case.accuracy is None and case.mesh is not None:
        return None
    given = case.accuracy.given() if case.accuracy else {}
    entries = given.get("of", default_of(names))
    of = []
    with located(case.source, "[accuracy] of"):
        for entry in entries:
            figure = _figure(entry, names)
            if figure in of:
                raise Problem(f'names "{entry}" twice', "contradiction")
            of.append(figure)
    with located(case.source, "[accuracy] target"):
        target, relative = _target(given.get("target", TARGET), tuple(of), "of" in given)
    return Accuracy(target, relative, tuple(of), given.get("unknowns", UNKNOWNS))


def default_of(names: Names) -> tuple[str, ...]:
    """What the default accuracy is of: total pressure drops and forces, as far as the part has them."""
    return tuple(q for q in DEFAULT_OF if names.has(QUANTITIES[q]))


def _figure(entry: str, names: Names) -> tuple[str, tuple[str, ...]]:
    quantity, *of = entry.split()
    if quantity in NOT_BUILT:
        raise Problem(f"names {quantity}, which is known but not built in this version", "not_built")
    row = QUANTITIES.get(quantity)
    if row is None:
        raise Problem(f"names {quantity}, which is no figure of a result{choice(quantity, QUANTITIES)}", "unknown_quantity")
    if not names.has(row):
        why = (
            f"an {names.kind} part has none"
            if row.planar_only and names.kind == "axisymmetric"
            else f"{names.part} has no such figure"
        )
        raise Problem(f"names {quantity}, but {why}", "unknown_quantity")
    if not of:
        return quantity, ()
    if row.of == "part":
        raise Problem(f'names "{entry}"; {quantity} is of the whole part and takes no name', "bad_value")
    known = names.of(row)
    for name in of:
        if name not in known:
            what = {"port or section": "port or section", "two ports": "port", "throat": "throat"}.get(row.of, row.of)
            raise Problem(
                f'names "{entry}", but {name} is no {what} of {names.part}{choice(name, known, "it has")}',
                "unknown_name",
                known=list(known),
            )
    wanted = 2 if row.of == "two ports" else 1
    if len(set(of)) != wanted or len(of) != wanted:
        pair = next(combinations(known, 2)) if wanted == 2 else known[:1]
        count = "two different ports" if wanted == 2 else "one name"
        raise Problem(f'names "{entry}"; {quantity} is of {count}, for example "{" ".join((quantity, *pair))}"', "bad_value")
    if wanted == 2:  # each pair exists once, in the order of the part's ports
        of.sort(key=known.index)
    return quantity, tuple(of)


def _target(text: str, of: tuple, named: bool) -> tuple[float, bool]:
    """The target as a share (True) or in the figures' unit (False)."""
    parts = split(text)
    units = list(dict.fromkeys(QUANTITIES[quantity].unit for quantity, _ in of))
    if parts and parts[1] and root_of(parts[1]) == ():
        share = read(text, "share", "target")
        if not 0 < share < 1:
            raise Problem(f'is "{text}", but must be above 0 % and below 100 %, for example target = "1 %"', "out_of_range")
        return share, True
    if parts and not parts[1] and units == ["1"]:
        return _positive(parts[0], text), False
    if parts and parts[1] and not named and root_of(parts[1]) is not None:
        raise Problem(
            f'is "{text}", an absolute one; name in of the figures it is for, for example of = ["total_pressure_drop"]',
            "missing",
        )
    if len({root_of(unit) for unit in units}) > 1:
        parse(text, tuple(Dimension(u, phrase_of(root_of(u), u), "1 %") for u in units), "target", "1 %")
        raise _mixed(text, units)
    unit = units[0] if units else "1"
    example = "1 %" if unit == "1" else f"20 {unit}"
    parse(text, (Dimension(unit, phrase_of(root_of(unit), unit), example),), "target", example)
    if len(units) > 1:
        raise _mixed(text, units)
    return _positive(convert(*parts, unit), text), False


def _mixed(text: str, units: list[str]) -> Problem:
    different = f"the figures in of have different units ({', '.join(units)})"
    return Problem(f'is "{text}", but {different}; write a percentage or name figures of one unit', "wrong_unit")


def _positive(value: float, text: str) -> float:
    if value <= 0:
        raise Problem(f'is "{text}", but must be above zero, for example target = "1 %"', "bad_value")
    return value
