"""A result folder that appears whole or not at all."""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from itertools import count
from pathlib import Path

from fem_flow.errors import CaseError

MARKS = {"result.json": "fem_flow.result/", "preview.json": "fem_flow.preview/"}
"""The file that makes a folder ours, and how its ``schema`` begins."""

UNFINISHED, REPLACED = ".fem_flow-unfinished-", ".fem_flow-replaced-"
_serial = count()


def default_folder(case: Path) -> Path:
    """The folder a case file's result goes to: its name without ``.toml``, beside it."""
    return case.with_suffix("")


def is_ours(folder: Path) -> bool:
    """Whether a folder holds a result or a preview of this program."""
    return any(_schema(folder / name).startswith(begins) for name, begins in MARKS.items())


def check_folder(folder: Path) -> None:
    """Refuse, before anything is computed, a folder that a result must not replace.

    Raises
    ------
    CaseError
        the folder exists and is no result of ours (``reason`` "folder_in_use"), or cannot be made ("folder_not_writable")
    """
    folder = Path(folder)
    said = {"folder": str(folder)}
    try:
        if folder.exists() and not folder.is_dir():
            sentence = f"{folder} is a file, so no result folder can be made there; name a folder with -o"
            raise CaseError(sentence, reason="folder_in_use", details=said)
        if folder.exists() and any(folder.iterdir()) and not is_ours(folder):
            sentence = f"{folder} exists and is no result of fem-flow; name another folder with -o, or remove it"
            raise CaseError(sentence, reason="folder_in_use", details=said)
    except OSError as error:
        raise _not_writable(folder, error.strerror) from None
    above = next(place for place in folder.resolve().parents if place.exists())
    if not above.is_dir():
        raise _not_writable(folder, f"{above} is a file")
    if not os.access(above, os.W_OK | os.X_OK):
        raise _not_writable(folder, f"{above} may not be written to")


@contextmanager
def result_folder(folder: Path) -> Iterator[Path]:
    """Give an empty folder to write into; when the block ends well it takes the place of `folder`, else it vanishes.

    The old result stays complete until the new one is; files there that the new one does not write are kept. What a killed
    process left behind is cleared away by the next run: its unfinished folder, or the result that it was about to replace.

    Raises
    ------
    CaseError : as `check_folder`
    """
    target = Path(folder).resolve()
    _tidy(target)
    check_folder(folder)
    mine = f"{os.getpid()}-{next(_serial)}"
    place, old = (target.with_name(target.name + kind + mine) for kind in (UNFINISHED, REPLACED))
    try:
        place.mkdir(parents=True)
    except OSError as error:
        raise _not_writable(Path(folder), error.strerror) from None
    try:
        yield place
        if target.exists():
            _keep_others(target, place)
            target.rename(old)
        place.rename(target)
    except BaseException:
        if old.exists() and not target.exists():
            old.rename(target)
        shutil.rmtree(place, ignore_errors=True)
        raise
    finally:
        shutil.rmtree(old, ignore_errors=True)


def _schema(path: Path) -> str:
    try:
        content = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return ""
    return str(content.get("schema", "")) if isinstance(content, dict) else ""


def _not_writable(folder: Path, why: str) -> CaseError:
    sentence = f"{folder} cannot be written ({why}); name another folder with -o"
    return CaseError(sentence, reason="folder_not_writable", details={"folder": str(folder)})


def _keep_others(old: Path, new: Path) -> None:
    for item in old.iterdir():
        if (new / item.name).exists():
            continue
        if item.is_dir() and not item.is_symlink():
            shutil.copytree(item, new / item.name, symlinks=True, copy_function=_link)
        else:
            _link(item, new / item.name)


def _link(source, target) -> None:
    try:
        os.link(source, target, follow_symlinks=False)
    except (OSError, NotImplementedError):
        shutil.copy2(source, target, follow_symlinks=False)


def _tidy(target: Path) -> None:
    """Clear away what killed processes left beside a result folder."""
    if not target.parent.is_dir():
        return
    for kind in (REPLACED, UNFINISHED):
        begins = target.name + kind
        for left in [p for p in target.parent.iterdir() if p.name.startswith(begins)]:
            process = left.name.removeprefix(begins).partition("-")[0]
            if not process.isdecimal() or _alive(int(process)):
                continue
            if kind == REPLACED and not target.exists():
                left.rename(target)
            else:
                shutil.rmtree(left, ignore_errors=True)


def _alive(process: int) -> bool:
    """Whether a process may still run; where that cannot be asked, yes."""
    if process == os.getpid() or os.name != "posix":
        return True
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True
    return True
