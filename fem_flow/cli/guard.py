"""Around every command: what goes to stdout, one sentence for whatever goes wrong, and the exit code."""

from __future__ import annotations

import errno
import json
import os
import platform
import signal
import sys
import tempfile
import traceback
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any, TextIO

import typer

from fem_flow import __version__
from fem_flow.errors import FemFlowError, NoSteadySolution

DONE, FAILED, WRONG_INPUT, NO_STEADY_SOLUTION, INACCURATE, INTERRUPTED = 0, 1, 2, 3, 4, 130


@dataclass(frozen=True)
class Answer:
    """What a command hands back.

    Attributes
    ----------
    data : for ``--json``: plain lists and dicts
    show : prints the same for a person
    code : exit code
    """

    data: Any
    show: Callable[[], None]
    code: int = DONE


def guarded(app: typer.Typer, arguments: list[str]) -> int:
    """Run a command; print its answer as JSON or words, or one sentence about what went wrong; return the exit code.

    With ``--json`` stdout carries one JSON document and nothing else, whatever a library writes there. An error is
    ``{"error": kind, "reason": word, "sentence": text, "details": {}}``; its sentence goes to stderr in either case.
    """
    with _output("--json" in arguments) as out, _termination():
        try:
            answer = app(arguments, prog_name="fem-flow", standalone_mode=False)
            if answer == INTERRUPTED or isinstance(answer, int):
                return _interrupted(out) if answer == INTERRUPTED else answer
            if isinstance(answer, Answer):
                _tell(answer, out)
                return answer.code
            return DONE
        except (KeyboardInterrupt, typer.Abort):
            return _interrupted(out)
        except FemFlowError as error:
            code = NO_STEADY_SOLUTION if isinstance(error, NoSteadySolution) else WRONG_INPUT
            return _complain(out, type(error).__name__, error.reason, str(error), code, error.details)
        except BrokenPipeError:
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())  # so that the flush at exit is quiet too
            return FAILED
        except Exception as error:
            if hasattr(error, "format_message"):
                return _usage(error, out)
            return _machine(error, out) or _fault(error, arguments, out)


def _tell(answer: Answer, out: TextIO | None) -> None:
    if out is None:
        answer.show()
        sys.stdout.flush()
    else:
        print(json.dumps(answer.data, indent=1, ensure_ascii=False), file=out, flush=True)


def _complain(out: TextIO | None, kind: str, reason: str, sentence: str, code: int, details: dict | None = None) -> int:
    print(sentence, file=sys.stderr)
    if out is not None:
        told = {"error": kind, "reason": reason, "sentence": sentence, "details": details or {}}
        print(json.dumps(told, indent=1, ensure_ascii=False, default=str), file=out, flush=True)
    return code


def _interrupted(out: TextIO | None) -> int:
    return _complain(out, "Interrupted", "interrupted", "Interrupted; nothing half-written was left behind.", INTERRUPTED)


def _usage(error, out: TextIO | None) -> int:
    """A mistake in the command line itself, as typer found it."""
    if out is None:
        error.show()
        return error.exit_code
    return _complain(out, "UsageError", "usage", error.format_message(), error.exit_code)


def _machine(error: Exception, out: TextIO | None) -> int | None:
    """What this machine has too little of: nobody's mistake, and no fault of the program."""
    if isinstance(error, MemoryError):
        sentence = "There is not enough memory for this; a smaller [accuracy] unknowns takes less."
        return _complain(out, "MachineError", "out_of_memory", sentence, FAILED)
    if isinstance(error, OSError) and error.errno in (errno.ENOSPC, errno.EDQUOT):
        sentence = "The disk is full; nothing half-written was left behind."
        return _complain(out, "MachineError", "disk_full", sentence, FAILED)
    return None


def _fault(error: Exception, arguments: list[str], out: TextIO | None) -> int:
    handle, log = tempfile.mkstemp(prefix="fem-flow-", suffix=".log")
    with os.fdopen(handle, "w", encoding="utf-8") as file:
        print(f"fem-flow {__version__}, Python {platform.python_version()}, {platform.platform()}", file=file)
        print("arguments:", arguments, file=file)
        traceback.print_exception(error, file=file)
    kind = type(error).__name__
    sentence = f"This is a fault of fem-flow itself ({kind}), not of your input; what happened is written in {log}"
    return _complain(out, "Fault", "fault", sentence, FAILED, {"log": log})


@contextmanager
def _output(as_json: bool) -> Iterator[TextIO | None]:
    """The stream for the JSON document, or None without ``--json``.

    Whatever else is written to stdout goes to stderr from here to the end of the process, what C libraries hold back until then
    included.
    """
    if not as_json:
        yield None
        return
    sys.stdout.flush()
    kept = os.dup(1)
    os.dup2(2, 1)
    with os.fdopen(kept, "w", encoding="utf-8") as out:
        yield out


@contextmanager
def _termination() -> Iterator[None]:
    """A request to terminate is handled like Ctrl-C, so that nothing half-written stays."""

    def stop(number, frame):
        raise KeyboardInterrupt

    before = signal.signal(signal.SIGTERM, stop)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, before)
