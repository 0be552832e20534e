"""The command line as a process: exit codes, sentences, and stdout that holds what it should."""

import json
import os
import re
import signal
import subprocess
import sys
import time
from contextlib import contextmanager
from pathlib import Path

import pytest

from fem_flow import __version__

CASE = """
title = "Slot that widens"

[part]
script = "sudden_expansion"
outlet_leg = "20 mm"

[fluid]
density = "870 kg/m^3"
viscosity = "40 mPa*s"

[model]
inertia = false
depth = "1 m"

[ports.inlet]
velocity_in = "0.1 m/s"

[ports.outlet]
static_pressure = "0 bar"
"""
COARSE = '\n[mesh]\nsize = "5 mm"\nnear_walls = "2.5 mm"\n'
BEYOND_REACH = '\n[accuracy]\ntarget = "0.000001 %"\nunknowns = 4000\n'

COMMANDS = ["parts", "draft", "preview", "run", "verify"]
NOT_BUILT = ["curve", "series", "improve", "compare"]


def fem_flow(*arguments, before="", cwd=None, **more):
    """Run fem-flow in a process of its own; `before` is executed there first, to put something faked in place."""
    code = f"import sys\nfrom fem_flow.cli import main\n{before}\nsys.exit(main(sys.argv[1:]))"
    command = [sys.executable, "-c", code, *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, encoding="utf-8", timeout=300, cwd=cwd, **more)


def case_file(folder: Path, text: str = CASE + COARSE, name: str = "slot.toml") -> Path:
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def raising(error: str) -> str:
    """Code that makes `job.run` raise."""
    return f"""
import fem_flow.job, fem_flow.errors as errors
def run(case, progress=None):
    print("a library's word on stdout", flush=True)
    raise {error}
fem_flow.job.run = run
"""


def test_the_installed_command_is_this_one():
    from importlib.metadata import entry_points, version

    script = next(e for e in entry_points(group="console_scripts") if e.name == "fem-flow")
    assert script.value == "fem_flow.cli:main"
    assert version("fem_flow") == __version__


def test_version():
    done = fem_flow("--version")
    assert (done.returncode, done.stdout, done.stderr) == (0, f"fem-flow {__version__}\n", "")


def test_python_m():
    done = subprocess.run([sys.executable, "-m", "fem_flow", "--version"], capture_output=True, text=True, timeout=60)
    assert (done.returncode, done.stdout) == (0, f"fem-flow {__version__}\n")


def test_help_lists_what_is_built_and_nothing_else():
    done = fem_flow("--help")
    listed = re.findall(r"^  ([a-z]+)  +[A-Z]", done.stdout.partition("Commands:")[2], re.MULTILINE)
    assert (done.returncode, listed) == (0, COMMANDS)
    assert "..." not in done.stdout.partition("Commands:")[2]


@pytest.mark.parametrize("command", COMMANDS)
def test_each_command_has_help_with_an_example_and_json(command):
    done = fem_flow(command, "--help")
    assert done.returncode == 0
    assert f"Example: fem-flow {command} " in done.stdout
    assert "--json" in done.stdout


@pytest.mark.parametrize("command", NOT_BUILT)
def test_a_command_not_built_is_refused(command):
    sentence = f"{command} is known but not built in this version of fem-flow; commands are: parts, draft, preview, run, verify"
    done = fem_flow(command, "slot.toml", "--vary", "lift=1..2 mm", "-o", "out")
    assert (done.returncode, done.stdout, done.stderr) == (2, "", sentence + "\n")
    told = json.loads(fem_flow(command, "slot.toml", "--json").stdout)
    assert told == {"error": "CaseError", "reason": "not_built", "sentence": sentence, "details": {"command": command}}


WRONG = [["run"], ["rum", "slot.toml"], ["run", "a", "b"], ["run", "a", "--fast"], ["parts", "-o"]]


@pytest.mark.parametrize("arguments", WRONG)
def test_a_wrong_command_line_is_wrong_input(arguments):
    done = fem_flow(*arguments)
    assert (done.returncode, done.stdout) == (2, "")
    assert "Usage: fem-flow" in done.stderr
    told = json.loads(fem_flow(*arguments[:1], "--json", *arguments[1:]).stdout)
    assert (told["error"], told["reason"]) == ("UsageError", "usage")
    assert told["sentence"] in " ".join(done.stderr.split())


def test_parts():
    done = fem_flow("parts", "--json")
    rows = json.loads(done.stdout)
    assert [row["name"] for row in rows] >= ["manifold", "poppet_valve", "sudden_expansion"]
    assert all(row["says"] for row in rows)
    words = fem_flow("parts").stdout
    assert all(row["name"] in words for row in rows)


def test_one_part():
    done = fem_flow("parts", "sudden_expansion", "--json")
    facts = json.loads(done.stdout)
    assert list(facts) == ["name", "says", "sketch", "kind", "unit", "parameters", "ports", "sections", "walls"]
    assert (facts["kind"], facts["unit"], facts["ports"]) == ("planar", "mm", ["inlet", "outlet"])
    assert facts["sections"] == ["throat"]
    assert set(facts["walls"]) == {"step", "large_bore", "small_bore"}
    half = facts["parameters"][-1]
    assert half.pop("says").startswith("planar only")
    assert half == {"name": "half", "default": False, "low": None, "high": None, "choices": None}
    words = fem_flow("parts", "sudden_expansion").stdout
    assert facts["sketch"] in words
    for line in ("ports:    inlet, outlet", "sections: throat", f"walls:    {', '.join(facts['walls'])}"):
        assert line in words.splitlines()
    assert re.search(r"^half +false +true or false ", words, re.MULTILINE)


def test_an_unknown_part_is_wrong_input():
    done = fem_flow("parts", "sudden_expanson", "--json")
    told = json.loads(done.stdout)
    assert (done.returncode, told["reason"], told["details"]["suggestion"]) == (2, "unknown_part", "sudden_expansion")
    assert done.stderr == told["sentence"] + "\n"


def test_a_draft_goes_to_the_terminal_or_to_a_new_file(tmp_path):
    text = fem_flow("draft", "sudden_expansion").stdout
    assert 'script = "sudden_expansion"' in text
    path = tmp_path / "slot.toml"
    done = fem_flow("draft", "sudden_expansion", "-o", path)
    assert (done.returncode, done.stdout) == (0, f"case file: {path}\n")
    assert path.read_text(encoding="utf-8") == text
    path.write_text("mine")
    again = fem_flow("draft", "sudden_expansion", "-o", path)
    sentence = f"{path} exists and is left as it is; name another file with -o, or remove it\n"
    assert (again.returncode, again.stdout, again.stderr) == (2, "", sentence)
    assert path.read_text() == "mine"
    told = json.loads(fem_flow("draft", "sudden_expansion", "--json").stdout)
    assert told == {"part": "sudden_expansion", "file": None, "text": text}


def test_the_draft_of_a_script_of_ones_own_finds_it_from_where_it_lies(tmp_path):
    from fem_flow.part.find import find_script

    (tmp_path / "own").mkdir()
    (tmp_path / "cases").mkdir()
    (tmp_path / "own" / "mine.py").write_bytes(find_script("sudden_expansion", tmp_path).read_bytes())
    done = fem_flow("draft", "own/mine.py", "-o", "cases/mine.toml", cwd=tmp_path)
    assert (done.returncode, done.stderr) == (0, "")
    assert 'script = "../own/mine.py"' in (tmp_path / "cases" / "mine.toml").read_text(encoding="utf-8")
    assert fem_flow("preview", "cases/mine.toml", cwd=tmp_path).returncode == 0


def test_preview(tmp_path):
    done = fem_flow("preview", case_file(tmp_path), "--json")
    assert (done.returncode, done.stderr) == (0, "")
    told = json.loads(done.stdout)
    assert told == json.loads((tmp_path / "slot" / "preview.json").read_text(encoding="utf-8"))
    assert sorted(p.name for p in (tmp_path / "slot").iterdir()) == ["preview.json", "preview.png"]
    inlet = next(row for row in told["ports"] if row["name"] == "inlet")
    assert inlet["area"] == pytest.approx(0.01, rel=1e-9)
    assert inlet["reynolds_number"] == pytest.approx(870 * 0.1 * 0.02 / 0.04, rel=1e-9)
    words = fem_flow("preview", tmp_path / "slot.toml").stdout
    assert re.search(r"^inlet .* 43\.5 *$", words, re.MULTILINE)
    assert words.endswith(f"drawing: {tmp_path / 'slot' / 'preview.png'}\n")


def test_run_writes_beside_the_case_and_prints_its_result_as_json(tmp_path):
    done = fem_flow("run", "slot.toml", "--json", cwd=case_file(tmp_path).parent)
    assert (done.returncode, done.stderr) == (0, "")
    told = json.loads(done.stdout)
    assert told["schema"] == "fem_flow.result/1"
    assert told == json.loads((tmp_path / "slot" / "result.json").read_text(encoding="utf-8"))
    assert sorted(p.name for p in tmp_path.iterdir()) == ["slot", "slot.toml"]
    assert {p.name for p in (tmp_path / "slot").iterdir()} >= {"result.json", "fields.vtu", "report.html", "case.toml"}


def test_run_ends_with_a_table_and_says_where_the_report_is(tmp_path):
    done = fem_flow("run", case_file(tmp_path), "-o", tmp_path / "a" / "b")
    assert (done.returncode, done.stderr) == (0, "")
    assert "Total pressure drop" in done.stdout
    assert done.stdout.endswith(f"report: {tmp_path / 'a' / 'b' / 'report.html'}\n")
    assert max(map(len, done.stdout.splitlines()[:-1])) <= 80


def test_an_accuracy_out_of_reach_is_told_and_the_result_written(tmp_path):
    done = fem_flow("run", case_file(tmp_path, CASE + BEYOND_REACH), "--json")
    assert done.returncode == 4
    assert done.stderr == "The accuracy asked for was not reached; the results were written all the same.\n"
    assert json.loads(done.stdout)["mesh"]["unknowns"] > 0
    assert (tmp_path / "slot" / "report.html").is_file()


def test_a_mistake_in_the_case_is_one_sentence(tmp_path):
    done = fem_flow("run", case_file(tmp_path, CASE.replace("density", "densty")), "--json")
    told = json.loads(done.stdout)
    assert (done.returncode, told["error"], told["reason"]) == (2, "CaseError", "unknown_key")
    assert done.stderr == told["sentence"] + "\n"
    assert "did you mean density?" in told["sentence"]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["slot.toml"]


def test_a_folder_of_somebody_else_is_refused_before_anything_is_computed(tmp_path):
    path = case_file(tmp_path)
    (tmp_path / "slot").mkdir()
    (tmp_path / "slot" / "thesis.txt").write_text("years of work")
    for command in ("run", "preview"):
        done = fem_flow(command, path, before=raising("AssertionError"))
        sentence = f"{tmp_path / 'slot'} exists and is no result of fem-flow; name another folder with -o, or remove it\n"
        assert (done.returncode, done.stdout, done.stderr) == (2, "", sentence)
    assert [p.name for p in (tmp_path / "slot").iterdir()] == ["thesis.txt"]


def test_a_case_file_without_ending_needs_a_folder(tmp_path):
    done = fem_flow("run", case_file(tmp_path, name="slot"))
    sentence = f"{tmp_path / 'slot'} is a file, so no result folder can be made there; name a folder with -o\n"
    assert (done.returncode, done.stderr) == (2, sentence)


@pytest.mark.parametrize(
    ("error", "code", "kind"),
    [
        ("errors.CaseError('Too wide.', reason='wide', details={'at': 3})", 2, "CaseError"),
        ("errors.GeometryError('Too wide.', reason='wide', details={'at': 3})", 2, "GeometryError"),
        ("errors.NoSteadySolution('Too wide.', reason='wide', details={'at': 3})", 3, "NoSteadySolution"),
    ],
)
def test_errors_become_a_sentence_and_a_code(tmp_path, error, code, kind):
    done = fem_flow("run", case_file(tmp_path), "--json", before=raising(error))
    assert done.returncode == code
    assert json.loads(done.stdout) == {"error": kind, "reason": "wide", "sentence": "Too wide.", "details": {"at": 3}}
    assert done.stderr == "a library's word on stdout\nToo wide.\n"
    plain = fem_flow("run", tmp_path / "slot.toml", before=raising(error))
    assert (plain.returncode, plain.stderr) == (code, "Too wide.\n")


def test_a_fault_of_the_program_is_one_sentence_and_a_log(tmp_path):
    env = {**os.environ, "TMPDIR": str(tmp_path)}
    done = fem_flow("run", case_file(tmp_path), "--json", before=raising("ZeroDivisionError('odd')"), env=env)
    told = json.loads(done.stdout)
    log = Path(told["details"]["log"])
    sentence = f"This is a fault of fem-flow itself (ZeroDivisionError), not of your input; what happened is written in {log}"
    assert (done.returncode, told["error"], told["sentence"]) == (1, "Fault", sentence)
    assert "Traceback" not in done.stderr
    text = log.read_text(encoding="utf-8")
    assert log.parent == tmp_path
    assert f"fem-flow {__version__}" in text
    assert text.endswith("ZeroDivisionError: odd\n")


@pytest.mark.parametrize(
    ("error", "sentence"),
    [
        ("MemoryError()", "There is not enough memory for this; a smaller [accuracy] unknowns takes less."),
        ("OSError(28, 'No space left on device')", "The disk is full; nothing half-written was left behind."),
    ],
)
def test_what_the_machine_lacks_is_nobodys_fault(tmp_path, error, sentence):
    done = fem_flow("run", case_file(tmp_path), "--json", before=raising(error))
    told = json.loads(done.stdout)
    assert (done.returncode, told["error"], told["sentence"]) == (1, "MachineError", sentence)


def test_a_check_that_fails_is_told_by_the_exit_code():
    before = """
import fem_flow.verify.run as verify
from fem_flow.verify.table import Row
verify.run_checks = lambda names, say: [Row(n, "drag", 1.02, 1.0, 0.01, "a book", absolute=n == "b") for n in names]
verify.CHECKS = None
"""
    done = fem_flow("verify", "a", "b", before=before)
    assert done.returncode == 1
    assert re.search(r"^a +drag +1\.02 +1 +\+2 % +1 % +\[1\] +FAILED *$", done.stdout, re.MULTILINE)
    assert re.search(r"^b +drag +1\.02 +1 +\+0\.02 +0\.01 +\[1\] +FAILED *$", done.stdout, re.MULTILINE)
    assert done.stdout.endswith("\nPublished values:\n[1] a book\n\n2 comparisons, 2 failed\n")
    rows = json.loads(fem_flow("verify", "a", "--json", before=before).stdout)
    assert [(row["name"], row["passed"], row["source"]) for row in rows] == [("a", False, "a book")]
    passing = fem_flow("verify", "a", before=before.replace("0.01", "0.05"))
    assert (passing.returncode, passing.stdout.splitlines()[-1]) == (0, "1 comparisons, all passed")


def test_an_unknown_check_is_wrong_input():
    done = fem_flow("verify", "nothing", "--json")
    assert (done.returncode, json.loads(done.stdout)["reason"]) == (2, "unknown_check")


@pytest.mark.skipif(os.name != "posix", reason="signals are those of posix")
@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
@pytest.mark.parametrize("at", ["drawing the part", "solving on", "writing"])
def test_an_interrupted_run_leaves_nothing_behind(tmp_path, number, at):
    """The signal comes at a named stage: when the run tells that stage it waits there."""
    path = case_file(tmp_path)
    before = f"""
import contextlib, time
import fem_flow.cli.commands as commands
def say(text, share=None):
    if text.startswith({at!r}) and {at!r} != "writing":
        wait()
def wait():
    print("here", flush=True)
    time.sleep(60)
commands.progress = lambda: contextlib.nullcontext(say)
if {at!r} == "writing":
    import fem_flow.show.report as report
    report.report_html = lambda *a, **k: wait()
"""
    code = f"import sys\nfrom fem_flow.cli import main\n{before}\nsys.exit(main(['run', {str(path)!r}]))"
    with started(code) as process:
        assert process.stdout.readline() == "here\n"
        children = offspring(process.pid)
        assert children or at != "solving on"
        process.send_signal(number)
        out, err = process.communicate(timeout=30)
    assert (process.returncode, out, err) == (130, "", "Interrupted; nothing half-written was left behind.\n")
    assert [p.name for p in tmp_path.iterdir()] == ["slot.toml"]
    deadline = time.monotonic() + 10
    while (left := [pid for pid in children if Path(f"/proc/{pid}").exists()]) and time.monotonic() < deadline:
        time.sleep(0.05)
    assert left == []


@contextmanager
def started(code: str, *arguments: str):
    """A process that runs some code, ended whatever happens."""
    command = [sys.executable, "-c", code, *arguments]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True) as process:
        try:
            yield process
        finally:
            process.kill()


def offspring(process: int) -> list[int]:
    """Ids of the child processes of a process (from /proc; empty where there is none)."""
    found = []
    for status in Path("/proc").glob("[0-9]*/stat"):
        try:
            parent = int(status.read_text().rpartition(")")[2].split()[1])
        except OSError:
            continue
        if parent == process:
            found.append(int(status.parent.name))
    return found


def test_a_closed_pipe_is_quiet():
    """As in `fem-flow parts | head -0`."""
    code = "import sys\nfrom fem_flow.cli import main\nsys.exit(main(sys.argv[1:]))"
    with started(code, "draft", "sudden_expansion") as process:
        process.stdout.close()
        error = process.stderr.read()
        assert process.wait(timeout=60) == 1
    assert error == ""


@pytest.mark.skipif(os.name != "posix", reason="pseudo-terminals are those of posix")
def test_progress_is_shown_where_stderr_is_a_terminal(tmp_path):
    import pty

    code = f"""
import sys, time, fem_flow.job, fem_flow.errors as errors
from fem_flow.cli import main
def run(case, progress):
    progress("solving on [12] elements", None)
    time.sleep(0.5)
    raise errors.CaseError("Too wide.", reason="wide")
fem_flow.job.run = run
sys.exit(main(["run", {str(case_file(tmp_path))!r}, "--json"]))
"""
    ours, theirs = pty.openpty()
    env = {**os.environ, "TERM": "xterm", "COLUMNS": "100"}
    with subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, stderr=theirs, env=env) as process:
        os.close(theirs)
        seen = read_all(ours)
        told = json.loads(process.stdout.read())
    assert "solving on [12] elements" in seen
    assert seen.rstrip().endswith("Too wide.")
    assert (process.returncode, told["sentence"]) == (2, "Too wide.")


def read_all(terminal: int) -> str:
    seen = b""
    while True:
        try:
            piece = os.read(terminal, 4096)
        except OSError:  # the other end is closed
            piece = b""
        if not piece:
            os.close(terminal)
            return seen.decode("utf-8", "replace")
        seen += piece
