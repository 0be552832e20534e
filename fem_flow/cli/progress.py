"""The progress display: on stderr, and only where that is a terminal."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager


@contextmanager
def progress() -> Iterator[Callable[[str, float | None], None]]:
    """Give a function (text, share done or None) that shows what is being done; it does nothing where nobody looks."""
    if not sys.stderr.isatty():
        yield lambda text, share=None: None
        return
    from rich.console import Console
    from rich.progress import Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

    columns = SpinnerColumn(), TimeElapsedColumn(), TextColumn("{task.description}", markup=False)
    with Progress(*columns, console=Console(stderr=True), transient=True) as display:
        task = display.add_task("", total=None)
        yield lambda text, share=None: display.update(task, description=text)
