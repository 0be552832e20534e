"""Rows of the verification table."""

from __future__ import annotations

from dataclasses import asdict, dataclass


@dataclass(frozen=True)
class Row:
    """One comparison.

    Attributes
    ----------
    name : name of the check, as ``fem-flow verify NAME`` takes it
    quantity : what is compared
    computed, published : values in the same unit
    tolerance : largest difference that passes; relative, or absolute where ``absolute``
    source : where the published value stands
    absolute : whether ``tolerance`` and ``difference`` are in the unit of the values
    seconds : what the whole check took, once it was run
    """

    name: str
    quantity: str
    computed: float
    published: float
    tolerance: float
    source: str
    absolute: bool = False
    seconds: float | None = None

    @property
    def difference(self) -> float:
        """Relative to the published value, or absolute where the row says so."""
        gap = self.computed - self.published
        return gap if self.absolute else gap / self.published

    @property
    def passed(self) -> bool:
        return bool(abs(self.difference) <= self.tolerance)

    def to_dict(self) -> dict:
        """Plain data for --json, with difference and passed."""
        plain = {k: v.item() if hasattr(v, "item") else v for k, v in asdict(self).items()}
        return {**plain, "difference": float(self.difference), "passed": self.passed}
