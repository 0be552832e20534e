"""Imports run one way: no room knows the rooms to its right, and no module is part of a cycle."""

import ast
from graphlib import CycleError, TopologicalSorter
from importlib.util import resolve_name
from pathlib import Path

import pytest

import fem_flow

ORDER = ["errors", "units", "case", "part", "flow", "measure", "trust", "show", "result", "job", "series", "verify", "cli"]
PACKAGE = Path(fem_flow.__file__).parent


def module_name(path: Path, package: Path) -> str:
    parts = path.relative_to(package.parent).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def import_graph(package: Path) -> dict[str, set[str]]:
    """Module -> modules of the package that it imports, anywhere in its text, inside functions too."""
    texts = {module_name(p, package): p for p in package.rglob("*.py") if "geometries" not in p.relative_to(package).parts}
    lazy = dict(fem_flow._ROOMS) if package == PACKAGE else {}
    graph = {}
    for name, path in texts.items():
        found = set()
        here = name if path.name == "__init__.py" else name.rpartition(".")[0]
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Import):
                found |= {nearest_module(alias.name, texts) for alias in node.names}
            elif isinstance(node, ast.ImportFrom):
                start = node.module or ""
                if node.level:
                    start = resolve_name("." * node.level + start, here)
                for alias in node.names:
                    whole = f"{start}.{alias.name}"
                    if start == package.name and alias.name in lazy and whole not in texts:
                        whole = lazy[alias.name]
                    found.add(nearest_module(whole, texts))
        graph[name] = found - {None, name}
    return graph


def nearest_module(name: str, known) -> str | None:
    """The module of the package that an imported name lies in, or None for other packages."""
    while name and name not in known:
        name = name.rpartition(".")[0]
    return name or None


def room(module: str) -> str:
    """The room of a module; the package itself and ``python -m`` are not rooms."""
    return module.split(".")[1] if "." in module else ""


def to_the_right(graph: dict[str, set[str]]) -> list[str]:
    place = {name: k for k, name in enumerate(ORDER)}
    return sorted(
        f"{module} imports {other}"
        for module, others in graph.items()
        if room(module) not in ("", "__main__")
        for other in others
        if room(other) and place[room(other)] > place[room(module)]
    )


@pytest.fixture(scope="module")
def graph():
    return import_graph(PACKAGE)


def test_every_module_lies_in_a_known_room(graph):
    assert {room(m) for m in graph} - {"", "__main__"} <= set(ORDER)


def test_the_graph_is_looked_at(graph):
    assert len(graph) >= 60
    assert sum(len(others) for others in graph.values()) >= 150
    assert {room(m) for m in graph} >= {"case", "part", "flow", "measure", "trust", "show", "job", "verify", "cli"}
    assert "fem_flow.flow.problem" in graph["fem_flow.job"]


def test_nothing_imports_from_its_right(graph):
    assert to_the_right(graph) == []


def test_no_module_is_part_of_a_cycle(graph):
    without_root = {m: others - {"fem_flow"} for m, others in graph.items()}
    tuple(TopologicalSorter(without_root).static_order())


def test_the_package_itself_imports_nothing_of_its_own(graph):
    assert graph["fem_flow"] == set()


def test_the_lazy_names_are_those_of_their_rooms():
    for name in fem_flow.__all__:
        assert getattr(fem_flow, name) is not None
    assert set(fem_flow.__all__) <= set(dir(fem_flow))
    with pytest.raises(AttributeError, match="has no attribute 'nothing'"):
        fem_flow.nothing  # noqa: B018


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("import fem_flow.cli", ["fem_flow.case.odd imports fem_flow.cli"]),
        ("def f():\n    from fem_flow.job import run", ["fem_flow.case.odd imports fem_flow.job"]),
        ("from .. import cli", ["fem_flow.case.odd imports fem_flow.cli"]),
        ("from ..job import run", ["fem_flow.case.odd imports fem_flow.job"]),
        ("from fem_flow import errors, job", ["fem_flow.case.odd imports fem_flow.job"]),
        ("import json\nfrom . import even\nfrom fem_flow.errors import CaseError", []),
    ],
)
def test_an_import_to_the_right_would_be_seen(tmp_path, text, expected):
    package = tmp_path / "fem_flow"
    (package / "case").mkdir(parents=True)
    for name in ("__init__", "cli", "job", "errors", "case/__init__", "case/even"):
        (package / f"{name}.py").write_text("")
    (package / "case" / "odd.py").write_text(text)
    assert to_the_right(import_graph(package)) == expected


def test_a_cycle_would_be_seen(tmp_path):
    package = tmp_path / "fem_flow"
    package.mkdir()
    (package / "__init__.py").write_text("")
    (package / "units.py").write_text("def f():\n    import fem_flow.errors")
    (package / "errors.py").write_text("from fem_flow.units import f")
    with pytest.raises(CycleError):
        tuple(TopologicalSorter(import_graph(package)).static_order())
