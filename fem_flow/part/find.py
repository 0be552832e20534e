"""Where part scripts are: the shipped ones by name, a user's own by path."""

from __future__ import annotations

from pathlib import Path

from fem_flow.errors import CaseError
from fem_flow.units import nearest

PACKAGE = Path(__file__).resolve().parents[1]


def geometry_folders() -> tuple[Path, ...]:
    """Folders with shipped scripts: inside an installed package, or beside it in a source tree."""
    beside = PACKAGE.parent / "geometries"
    inside = PACKAGE / "geometries"
    return tuple(p for p in (inside, beside if (PACKAGE.parent / "pyproject.toml").is_file() else None) if p and p.is_dir())


def shipped() -> list[str]:
    """Names of the shipped parts, sorted."""
    return sorted({p.stem for folder in geometry_folders() for p in folder.glob("*.py") if not p.stem.startswith("_")})


def find_script(reference: str, folder: str | Path) -> Path:
    """The file behind ``[part] script``.

    Parameters
    ----------
    reference : the name of a shipped part, or a path to a script that ends in ``.py``
    folder : what a relative path counts from: the folder of the case file

    Raises
    ------
    CaseError : reason ``"unknown_part"`` (no such shipped part) or ``"no_such_script"`` (no such file)
    """
    reference = str(reference).strip()
    is_path = reference.endswith(".py") or "/" in reference or "\\" in reference
    if not is_path:
        for place in geometry_folders():
            if reference in shipped() and (place / f"{reference}.py").is_file():
                return place / f"{reference}.py"
        raise _unknown(reference, Path(folder))
    path = Path(folder) / Path(reference).expanduser()
    if path.is_file():
        return path.resolve()
    own = sorted(p.name for p in path.parent.glob("*.py")) if path.parent.is_dir() else []
    near = nearest(path.name, own)
    raise CaseError(
        f'[part] script: there is no file "{reference}" (looked for {path})' + (f"; did you mean {near}?" if near else ""),
        reason="no_such_script",
        details={"key": "part.script", "path": str(path), "suggestion": near},
    )


def _unknown(name: str, folder: Path) -> CaseError:
    known = shipped()
    near = nearest(name, known)
    parts = [f'[part] script: there is no shipped part "{name}"']
    if known:
        parts.append(f"the shipped parts are {', '.join(known)}")
    if (folder / f"{name}.py").is_file():
        parts.append(f'the script of your own is "{name}.py"')
    else:
        parts.append("a script of your own is given by its path, ending in .py")
    if near:
        parts.append(f"did you mean {near}?")
    return CaseError(
        "; ".join(parts),
        reason="unknown_part",
        details={"key": "part.script", "name": name, "known": known, "suggestion": near},
    )
