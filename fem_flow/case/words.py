"""How the sentences of a ``CaseError`` are put together: file, key, what is wrong, and the nearest valid name."""

from __future__ import annotations

from contextlib import contextmanager

from fem_flow.errors import CaseError
from fem_flow.units import Problem, nearest

__all__ = ["Problem", "choice", "located", "nearest", "refuse"]


def choice(name: str, known, it_has: str = "known are") -> str:
    """End of a sentence about an unknown name: ``; known are a, b; did you mean b?``; a long list only where none is near."""
    known = [str(k) for k in known]
    near = nearest(name, known)
    listed = f"; {it_has} {', '.join(known)}" if known and (not near or len(known) <= 4) else ""
    return listed + (f"; did you mean {near}?" if near else "")


def refuse(source: str | None, where: str, predicate: str, reason: str, **details) -> CaseError:
    """The error ``poppet.toml: [part] lift is ...``; `where` is the key, `source` the name of the file if there is one."""
    sentence = " ".join(word for word in (where, predicate) if word)
    if source:
        sentence, details = f"{source}: {sentence}", {"file": source, **details}
    return CaseError(sentence, reason=reason, details={"key": key_of(where), **details})


def key_of(where: str) -> str:
    """``ports.inlet.flow_in`` from ``[ports.inlet] flow_in``."""
    return ".".join(where.replace("[", "").replace("]", "").split())


@contextmanager
def located(source: str | None, where: str):
    """Put file and key in front of a ``Problem`` that is raised inside."""
    try:
        yield
    except Problem as problem:
        raise refuse(source, where, str(problem), problem.reason, **problem.details) from None
