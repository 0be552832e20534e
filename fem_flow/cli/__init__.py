"""The command line. ``main`` answers ``--version`` itself; the commands and what they need are loaded when one is asked for."""

from __future__ import annotations

import sys

from fem_flow import __version__


def main(arguments: list[str] | None = None) -> int:
    """Run ``fem-flow`` with these arguments (the process's own by default) and return its exit code."""
    arguments = sys.argv[1:] if arguments is None else list(arguments)
    if arguments == ["--version"]:
        print(f"fem-flow {__version__}")
        return 0
    from fem_flow.cli.commands import app
    from fem_flow.cli.guard import guarded

    return guarded(app, arguments)
