"""A number with everything a design review asks of it."""

from __future__ import annotations

from dataclasses import dataclass, replace

from fem_flow.case.quantities import QUANTITIES


@dataclass(frozen=True)
class Number:
    """One figure of a result.

    Attributes
    ----------
    name : what quantity it is, for example ``"total_pressure_drop"`` (``quantity`` in the JSON)
    of : what it is of: port, section, wall or region names
    value : float in ``unit``; NaN where it is withheld, and ``note`` says why
    unit : SI unit as text, ``"1"`` for a pure number
    error_bar : estimated bound of the discretisation error in ``unit``, or None
    verdict : ``"holds"``, ``"caution"`` or ``"breaks"``
    definition : only the definition
    note : why a number is withheld, or what to know about it; or None
    """

    name: str
    of: tuple[str, ...]
    value: float
    unit: str
    definition: str
    error_bar: float | None = None
    verdict: str = "holds"
    note: str | None = None

    def __float__(self) -> float:
        return float(self.value)

    @property
    def withheld(self) -> bool:
        return self.value != self.value

    @property
    def quantity(self):
        """The value as a pint quantity."""
        from fem_flow.units import registry

        return registry().Quantity(self.value, "" if self.unit == "1" else self.unit)

    def with_(self, **changes) -> Number:
        return replace(self, **changes)


def number(name: str, of: tuple[str, ...], value: float, note: str | None = None) -> Number:
    """A number with the unit and definition that the table of quantities gives its name."""
    kind = QUANTITIES[name]
    return Number(name, of, float(value), kind.unit, kind.definition, note=note)


@dataclass(frozen=True)
class Check:
    """Whether the model holds in one respect: ``verdict`` is ``"holds"``, ``"caution"`` or ``"breaks"``."""

    check: str
    of: tuple[str, ...]
    verdict: str
    says: str
    source: str
