"""What can go wrong for a user, as three exceptions with a sentence and a machine-readable reason."""

from __future__ import annotations


class FemFlowError(Exception):
    """Base of the errors that a user or a loop over designs is expected to catch.

    Attributes
    ----------
    reason : a short word for programs, such as ``"unknown_key"`` or ``"zero_gap"``
    details : plain data that goes with the reason (names, values, places in metres)
    """

    def __init__(self, sentence: str, *, reason: str, details: dict | None = None):
        super().__init__(sentence)
        self.reason = reason
        self.details = dict(details or {})

    def __reduce__(self):
        return _rebuild, (type(self), str(self), self.reason, self.details)


class CaseError(FemFlowError, ValueError):
    """What the user asked for is not a case that can be run."""


class GeometryError(FemFlowError, ValueError):
    """The part cannot be drawn or meshed with these dimensions."""


class NoSteadySolution(FemFlowError, RuntimeError):
    """No steady flow was found; the sentence says what was tried and what to try next."""


def _rebuild(kind, sentence, reason, details):
    return kind(sentence, reason=reason, details=details)
