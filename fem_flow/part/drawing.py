"""The parent's side of the drawing process.

gmsh keeps global state, takes over Ctrl-C and can crash, and a script can do anything: so both run in a process of their own.
It is a plain child process, not one of ``multiprocessing``: a user's script needs no ``__main__`` guard for it.
"""

from __future__ import annotations

import atexit
import os
import queue
import signal
import subprocess
import sys
import tempfile
import threading
import weakref
from collections.abc import Mapping, Sequence
from pathlib import Path

from fem_flow.case.declaration import Declaration
from fem_flow.errors import FemFlowError, GeometryError
from fem_flow.part.mesh import MeshData, Outline
from fem_flow.part.worker import receive, send

DESIGNS_PER_PROCESS = 100
"""A drawing process is replaced after this many designs, so that what gmsh or a script leaks does not add up."""

START_LIMIT = 60.0
"""Seconds that a new process may take on top of the time limit."""


class Drawing:
    """A part in the drawing process: its declaration, its outline and its meshes.

    Use it as a context manager. The process behind it is taken from a pool of one and given back on leaving, so that a loop
    of a thousand designs starts gmsh ten times and not a thousand times (``DESIGNS_PER_PROCESS``); a second ``Drawing`` open at
    the same time, in another thread say, gets a process of its own. While one ``Drawing`` is open its design stays
    drawn, so that it can be meshed again at other sizes.

    Parameters
    ----------
    path : the part script
    time_limit : seconds that one request may take

    Raises
    ------
    GeometryError : from every method: the script failed, the drawing or its names are wrong, the mesh is bad, or the process
        crashed (reason ``"drawing_crashed"``) or took too long (reason ``"time_limit"``)
    """

    def __init__(self, path: str | Path, time_limit: float = 120.0):
        self.path = Path(path).resolve()
        self.time_limit = time_limit
        self._process: _Process | None = None
        self._values: dict | None = None

    def __enter__(self) -> Drawing:
        return self

    def __exit__(self, kind, error, trace) -> None:
        self.close()

    def declare(self, values: Mapping | None = None) -> Declaration:
        """What the script declares; with ``values`` also the kind, ports and legs that depend on them."""
        return self._ask("declare", path=str(self.path), values=None if values is None else dict(values))

    def draw(self, values: Mapping) -> Outline:
        """Draw the part with these values (every parameter; lengths in the script's unit, angles in radians)."""
        self._values = dict(values)
        if self._process is not None and not self._process.usable:
            self.close()
        return self._ask("draw", path=str(self.path), values=self._values)

    def mesh(
        self,
        scale: float = 1.0,
        size: float | None = None,
        near_walls: float | None = None,
        max_cells: int | None = None,
        grade_at: Sequence[tuple[float, float]] = (),
    ) -> MeshData:
        """Mesh the part as drawn last.

        Parameters
        ----------
        scale : multiplies the whole size field: 2 is the same mesh, graded alike, twice as coarse
        size : m, cap of the size anywhere (before ``scale``)
        near_walls : m, size at the walls instead of the automatic one (before ``scale``)
        max_cells : refuse early (reason ``"too_many_cells"``) where more triangles than this would be needed
        grade_at : places (x, y), m, to grade the mesh into as into a sharp corner
        """
        if self._values is None:
            raise GeometryError("nothing is drawn yet", reason="not_drawn")
        if self._process is None or not self._process.ours:
            self.draw(self._values)
        how = {"scale": scale, "size": size, "near_walls": near_walls, "max_cells": max_cells, "grade_at": tuple(grade_at)}
        return self._ask("mesh", **how)

    def close(self) -> None:
        """Give the process back; it is kept for the next ``Drawing`` while it is young."""
        process, self._process = self._process, None
        if process is not None:
            _give_back(process)

    def _ask(self, what, **arguments):
        if self._process is None or not self._process.ours:
            self._process = _take()
        self._process.designs += what == "draw"
        try:
            return self._process.ask(what, arguments, self.time_limit, self.path.name)
        except FemFlowError as error:
            if error.reason in ("drawing_crashed", "time_limit"):
                self._process = None
            raise
        except BaseException:
            self._process = None
            raise


def declare_many(paths: Sequence[str | Path], time_limit: float = 120.0) -> list[Declaration]:
    """Declarations of several scripts, from one process; what depends on parameters is None."""
    process = _take()
    try:
        found = process.ask("declare_many", {"paths": [str(p) for p in paths]}, time_limit, "the shipped parts")
    except FemFlowError as error:
        if error.reason not in ("drawing_crashed", "time_limit"):
            _give_back(process)
        raise
    _give_back(process)
    return found


class _Process:
    """One drawing process. It is killed and waited for whenever a request does not end with an answer."""

    def __init__(self):
        root = str(Path(__file__).resolve().parents[2])
        given = [p for p in os.environ.get("PYTHONPATH", "").split(os.pathsep) if p]
        paths = list(dict.fromkeys([*given, root, *(p for p in sys.path if p)]))
        self.log = tempfile.TemporaryFile("a+b")  # noqa: SIM115, closed in end()
        self.designs = 0
        self.owner = os.getpid()
        self.child = subprocess.Popen(
            [sys.executable, "-P", "-X", "faulthandler", "-m", "fem_flow.part.worker"],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=self.log,
            bufsize=0,  # no buffer, no lock: a forked child can close these streams while a thread reads them
            env={**os.environ, "PYTHONPATH": os.pathsep.join(paths)},
            start_new_session=True,
        )
        self._answers: queue.SimpleQueue = queue.SimpleQueue()
        self._reader = threading.Thread(target=self._read, daemon=True)
        self._reader.start()
        self._young = True
        _all.add(self)

    def _read(self):
        stream = self.child.stdout
        while True:
            try:
                self._answers.put(receive(stream))
            except Exception:
                self._answers.put(None)
                return

    def ask(self, what, arguments, time_limit, name):
        """One request and its answer."""
        limit = time_limit + (START_LIMIT if self._young else 0.0)
        self._young = False
        try:
            self.log.truncate(0)
            try:
                send(self.child.stdin, (what, arguments))
                answer = self._answers.get(timeout=limit)
            except (BrokenPipeError, OSError):
                answer = None
            except queue.Empty:
                raise GeometryError(
                    f"drawing or meshing {name} took longer than {time_limit:g} s and was stopped",
                    reason="time_limit",
                    details={"seconds": time_limit},
                ) from None
            if answer is None:
                raise self._crash(name)
        except BaseException:
            self.end()
            raise
        state, result = answer
        if state == "error":
            raise result
        return result

    def _crash(self, name):
        try:
            code = self.child.wait(timeout=5)
        except subprocess.TimeoutExpired:
            code = None
        if code is not None and code < 0:
            how = f"was ended by the system ({signal.Signals(-code).name})"
        else:
            how = f"ended by itself (exit code {code})"
        self.log.seek(0)
        log = self.log.read()[-4000:].decode(errors="replace")
        return GeometryError(
            f"the process that draws {name} {how}; other dimensions may work, and a script of your own can be tried alone:"
            f" python {name} -o part.msh",
            reason="drawing_crashed",
            details={"exit_code": code, "log": log},
        )

    def end(self):
        """Kill the process, wait for it, close its streams."""
        if self.ours:
            if self.child.poll() is None:
                self.child.kill()
            self.child.wait()
            self._reader.join(timeout=5)
        else:
            self.child.returncode = 0  # not a child of this process
        for stream in (self.child.stdin, self.child.stdout, self.log):
            try:
                stream.close()
            except OSError:
                pass

    @property
    def ours(self):
        """Whether this process started it, and not the one that this was forked from."""
        return os.getpid() == self.owner

    @property
    def usable(self):
        """Whether it may be given a further design."""
        return self.ours and self.child.poll() is None and self.designs < DESIGNS_PER_PROCESS


_idle: list[_Process] = []
_all: weakref.WeakSet[_Process] = weakref.WeakSet()
_lock = threading.Lock()


def _take() -> _Process:
    with _lock:
        process = _idle.pop() if _idle else None
    if process is None or not process.usable:
        if process is not None:
            process.end()
        process = _Process()
    return process


def _give_back(process: _Process) -> None:
    if process.usable:
        with _lock:
            if not _idle:
                _idle.append(process)
                return
    process.end()


@atexit.register
def close_idle() -> None:
    """End the waiting drawing process, if there is one."""
    with _lock:
        waiting, _idle[:] = list(_idle), []
    for process in waiting:
        process.end()


def _forget_after_fork() -> None:
    """A forked child must not talk to its parent's drawing process, nor keep it alive."""
    global _lock
    _lock = threading.Lock()
    for process in list(_all):
        process.end()
    _idle.clear()


if hasattr(os, "register_at_fork"):
    os.register_at_fork(after_in_child=_forget_after_fork)
