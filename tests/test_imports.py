"""What is cheap stays cheap: the package, its version and its help load none of the heavy libraries."""

import subprocess
import sys

import pytest

HEAVY = {"gmsh", "vtk", "vtkmodules", "pyvista", "skfem", "scipy", "matplotlib", "pandas", "pint", "pydantic", "numpy"}
HEAVY |= {"meshio", "pypardiso", "jinja2"}

IMPORT = "import fem_flow; fem_flow.__all__"
COMMAND = "from fem_flow.cli import main; assert main({}) == 0"


def loaded(statement: str) -> set[str]:
    """Top-level names of the modules that a fresh process has loaded after a statement."""
    code = f"import sys\n{statement}\nprint('LOADED', *{{m.partition('.')[0] for m in sys.modules}})"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60)
    assert done.returncode == 0, done.stderr
    return set(done.stdout.rpartition("LOADED")[2].split())


@pytest.mark.parametrize(
    ("statement", "unwanted"),
    [
        (IMPORT, HEAVY | {"typer", "rich"}),
        (COMMAND.format(["--version"]), HEAVY | {"typer", "rich"}),
        (COMMAND.format(["--help"]), HEAVY | {"rich"}),
        (COMMAND.format(["run", "--help"]), HEAVY - {"pydantic"}),  # typer itself reads arguments with pydantic
        ("from fem_flow import CaseError, GeometryError, NoSteadySolution, Parameter", HEAVY | {"typer", "rich"}),
    ],
)
def test_nothing_heavy_is_loaded(statement, unwanted):
    modules = loaded(statement)
    assert "fem_flow" in modules
    assert modules & unwanted == set()


def test_a_heavy_module_would_be_seen():
    assert "numpy" in loaded("import fem_flow; fem_flow.Result")
