"""README.md and DEVELOPERS.md say what is so: their commands are the ones CI runs, and what they name exists."""

import re
import shutil
import subprocess
import tomllib
from pathlib import Path

import pytest

import fem_flow as ff
from fem_flow.cli import guard
from fem_flow.part.find import shipped

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def blocks(text: str, language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)


def section(heading: str) -> str:
    found = re.search(rf"^## {heading}\n(.*?)(?=^## |\Z)", README, re.MULTILINE | re.DOTALL)
    assert found, heading
    return found[1]


def test_ci_runs_the_two_set_up_commands_word_for_word():
    commands = blocks(section("Set-up"), "sh")
    assert len(commands) == 2
    assert all(len(command.splitlines()) == 1 for command in commands)
    if shutil.which("bash") is None:
        pytest.skip("no bash on this machine")
    shown = subprocess.run(["bash", str(ROOT / ".ci" / "run"), "--show"], capture_output=True, text=True, timeout=60)
    assert (shown.returncode, shown.stdout) == (0, "".join(commands))
    assert "pytest" in commands[1]
    assert "ruff check" in commands[1]


def test_ci_is_valid_and_stops_at_a_failure():
    text = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    assert "set -euo pipefail" in text
    assert text.count('bash -euo pipefail -c "$') == 2
    assert 'FEM_FLOW_REQUIRES="gmsh pyvista pardiso" FEM_FLOW_REQUIRE_BROWSER=1' in text


def test_the_example_of_the_set_up_is_there():
    example = re.search(r"fem-flow run (\S+)", blocks(section("Set-up"), "sh")[0])[1]
    assert ff.Case.read(ROOT / example).part.script in shipped()


def test_the_case_file_of_the_readme_is_one():
    (text,) = blocks(README, "toml")
    case = ff.Case(**tomllib.loads(text))
    assert (case.part.script, set(case.ports)) == ("poppet_valve", {"inlet", "outlet"})


def test_the_python_of_the_readme_uses_what_exists():
    (text,) = blocks(README, "python")
    compile(text, "README.md", "exec")
    used = set(re.findall(r"\bff\.(\w+)", README))
    assert used >= {"Case", "run", "CaseError", "GeometryError", "NoSteadySolution"}
    assert used <= set(ff.__all__)
    for method in re.findall(r"\bcase\.(\w+)\(", text):
        assert hasattr(ff.Case, method)
    for name in re.findall(r"\bresult\.(\w+)", text):
        assert hasattr(ff.Result, name)


def test_the_commands_of_the_readme_exist():
    from fem_flow.cli.commands import app

    built = {c.name or c.callback.__name__ for c in app.registered_commands if not c.hidden}
    assert set(re.findall(r"\bfem-flow ([a-z]+)", README)) == built
    assert set(re.findall(r"^\| `fem-flow ([a-z]+)", README, re.MULTILINE)) == built


def test_the_exit_codes_of_the_readme_are_those_of_the_program():
    names = ("DONE", "FAILED", "WRONG_INPUT", "NO_STEADY_SOLUTION", "INACCURATE", "INTERRUPTED")
    assert [int(code) for code in re.findall(r"^\| (\d+) \|", README, re.MULTILINE)] == [getattr(guard, n) for n in names]


def test_the_kinds_of_error_of_the_readme_are_those_of_the_program():
    kinds = set(re.findall(r'_complain\(out, "(\w+)"', Path(guard.__file__).read_text(encoding="utf-8")))
    kinds |= {kind.__name__ for kind in (ff.CaseError, ff.GeometryError, ff.NoSteadySolution)}
    listed = section("Commands and exit codes").partition("where `error` is one of")[2].partition(";")[0]
    assert set(re.findall(r"`(\w+)`", listed)) == kinds


@pytest.mark.parametrize(("name", "text"), [("README.md", README), ("DEVELOPERS.md", DEVELOPERS)])
def test_every_file_that_is_named_exists(name, text):
    named = set(re.findall(r"(?:fem_flow|geometries|examples|tests)/[\w./-]*[\w/]", text)) | set(
        re.findall(r"\]\(([^)#:]+)\)", text)
    )
    assert named
    missing = sorted(path for path in named if not (ROOT / path).exists())
    assert missing == ["fem_flow/geometries"] if name == "DEVELOPERS.md" else missing == []


def test_installing_is_described_as_it_is():
    licences = section("Set-up")
    assert "GPL-2.0-or-later" in licences
    assert "Intel Simplified Software License" in licences
    assert "BSD-3-Clause" in licences
    assert (ROOT / "LICENSE").read_text(encoding="utf-8").startswith("BSD 3-Clause License")
