"""Part scripts of the verification cases; they are drawn and meshed like any user's part."""

from __future__ import annotations

from pathlib import Path


def part(name: str) -> str:
    """Path of a verification part, as a case's ``script`` takes it."""
    return str(Path(__file__).parent / f"{name}.py")
