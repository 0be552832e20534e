"""Steady laminar flow in parametric passages: numbers with units, error bars and verdicts.

``import fem_flow as ff`` costs next to nothing: each name below is loaded from its room when it is first asked for.
"""

__version__ = "0.1.0"

_ROOMS = {
    "Case": "fem_flow.case.model",
    "CaseError": "fem_flow.errors",
    "GeometryError": "fem_flow.errors",
    "NoSteadySolution": "fem_flow.errors",
    "Number": "fem_flow.measure.number",
    "Parameter": "fem_flow.case.declaration",
    "Preview": "fem_flow.result",
    "Result": "fem_flow.result",
    "alone": "fem_flow.part.alone",
    "preview": "fem_flow.job",
    "run": "fem_flow.job",
}
_CALLED = {"alone": "main"}
"""Names that are called otherwise in their room."""

__all__ = ["__version__", *_ROOMS]


def __getattr__(name: str):
    if name not in _ROOMS:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    value = getattr(import_module(_ROOMS[name]), _CALLED.get(name, name))
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
