"""The drawing process: reads requests from its standard input, answers on what was its standard output.

Started by ``drawing.Drawing`` as ``python -m fem_flow.part.worker``. A message is eight bytes of length and a pickle. A request
is ``(what, arguments)``; an answer ``("ok", result)`` or ``("error", exception)``. The real standard output is taken for the
messages and file descriptor 1 then leads to the log, so that neither gmsh nor a script can write between them. When the
other side is gone (end of input), the process ends at once, whatever it is doing.
"""

from __future__ import annotations

import os
import pickle
import queue
import signal
import struct
import sys
import threading
import traceback
from contextlib import ExitStack

from fem_flow.errors import FemFlowError, GeometryError
from fem_flow.part.script import declaration, load
from fem_flow.part.session import import_gmsh, session


class Worker:
    """Answers requests; keeps one drawn design at a time."""

    def __init__(self):
        self._open = ExitStack()
        self._design = None

    def declare(self, path, values=None):
        """Declaration of the script at ``path``."""
        return declaration(load(path), values)

    def declare_many(self, paths):
        """Declarations of several scripts, without values."""
        return [declaration(load(path)) for path in paths]

    def draw(self, path, values):
        """Draw a design, in place of the one before; its outline."""
        from fem_flow.part.design import Design

        self.forget()
        import_gmsh()
        script = load(path)
        gmsh = self._open.enter_context(session())
        try:
            self._design = Design(gmsh, script, values)
            return self._design.outline()
        except BaseException:
            self.forget()
            raise

    def mesh(self, **how):
        """Mesh the drawn design."""
        if self._design is None:
            raise GeometryError("nothing is drawn yet", reason="not_drawn")
        return self._design.mesh(**how)

    def forget(self):
        """Close gmsh and drop the design."""
        self._design = None
        self._open.close()


def main() -> None:
    """Serve until the input ends."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    requests = os.fdopen(os.dup(0), "rb")
    answers = os.fdopen(os.dup(1), "wb")
    nothing = os.open(os.devnull, os.O_RDONLY)
    os.dup2(nothing, 0)
    os.dup2(2, 1)
    waiting: queue.SimpleQueue = queue.SimpleQueue()
    threading.Thread(target=_receive, args=(requests, waiting), daemon=True).start()
    worker = Worker()
    while True:
        what, arguments = waiting.get()
        send(answers, _answer(worker, what, arguments))


def _answer(worker, what, arguments):
    try:
        return "ok", getattr(worker, what)(**arguments)
    except FemFlowError as error:
        return "error", error
    except BaseException as error:
        traceback.print_exc()
        words = " ".join(str(error).split())
        return "error", GeometryError(
            f"the part could not be {'meshed' if what == 'mesh' else 'drawn'}: {type(error).__name__}: {words}",
            reason="drawing_failed",
            details={"traceback": traceback.format_exc()},
        )


def _receive(stream, waiting):
    while True:
        try:
            waiting.put(receive(stream))
        except (EOFError, OSError):
            os._exit(0)


def send(stream, message) -> None:
    """Write one message."""
    data = pickle.dumps(message, protocol=pickle.HIGHEST_PROTOCOL)
    rest = memoryview(struct.pack("<Q", len(data)) + data)
    while rest:
        rest = rest[stream.write(rest) :]
    stream.flush()


def receive(stream):
    """Read one message.

    Raises
    ------
    EOFError : the other side is gone
    """
    (length,) = struct.unpack("<Q", _exactly(stream, 8))
    return pickle.loads(_exactly(stream, length))


def _exactly(stream, length):
    """So many bytes; a pipe hands them over in pieces."""
    pieces = []
    while length > 0:
        piece = stream.read(min(length, 1 << 24))
        if not piece:
            raise EOFError
        pieces.append(piece)
        length -= len(piece)
    return b"".join(pieces)


if __name__ == "__main__":
    sys.exit(main())
