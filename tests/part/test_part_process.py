"""The drawing process: whatever a script or gmsh does, the parent gets an answer or a GeometryError; nothing stays behind."""

import os
import signal
import subprocess
import sys
import threading
import time

import numpy as np
import pytest

from fem_flow.errors import GeometryError
from fem_flow.part import drawing as room
from fem_flow.part.drawing import Drawing, close_idle


@pytest.fixture(autouse=True)
def no_process_left():
    """Every test starts without a waiting process and leaves none but its own."""
    close_idle()
    yield
    close_idle()


def children():
    """Numbers of the living or unburied children of this process."""
    found = set()
    for entry in os.listdir("/proc"):
        if entry.isdigit():
            try:
                with open(f"/proc/{entry}/stat") as file:
                    fields = file.read().rpartition(")")[2].split()
            except OSError:
                continue
            if int(fields[1]) == os.getpid():
                found.add(int(entry))
    return found


def alive(pid):
    try:
        with open(f"/proc/{pid}/stat") as file:
            return file.read().rpartition(")")[2].split()[0] != "Z"
    except OSError:
        return False


def wait_until_gone(pid, seconds=10.0):
    end = time.monotonic() + seconds
    while alive(pid) and time.monotonic() < end:
        time.sleep(0.02)
    return not alive(pid)


def test_the_parent_never_loads_gmsh_and_keeps_its_signal_handlers(box_script):
    code = (
        "import signal, sys\n"
        "before = signal.getsignal(signal.SIGINT)\n"
        "from fem_flow.part.drawing import Drawing\n"
        f"with Drawing({str(box_script())!r}) as drawing:\n"
        "    drawing.draw({})\n"
        "    print(len(drawing.mesh().cells) > 10)\n"
        "print('gmsh' in sys.modules, signal.getsignal(signal.SIGINT) is before)\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60)
    assert (done.stdout, done.stderr) == ("True\nFalse True\n", "")


def test_a_plain_script_needs_no_main_guard(box_script, tmp_path):
    plain = tmp_path / "plain.py"
    plain.write_text(f"from fem_flow.part.drawing import Drawing\nprint(Drawing({str(box_script())!r}).draw({{}}).kind)\n")
    done = subprocess.run([sys.executable, plain], capture_output=True, text=True, timeout=60)
    assert (done.stdout, done.returncode) == ("planar\n", 0)


def test_a_script_that_prints_does_not_disturb(box_script):
    lines = (
        "    import os, sys\n    print('x' * 100_000)\n    os.write(1, b'raw')\n    sys.stdout.flush()\n"
        "    gmsh.option.setNumber('General.Terminal', 1)\n    gmsh.logger.write('loud')\n    assert sys.stdin.read() == ''\n"
    )
    path = box_script()
    path.write_text(path.read_text().replace("    bottom, right", lines + "    bottom, right"))
    with Drawing(path) as drawing:
        assert drawing.draw({}).kind == "planar"


CRASHES = {
    "import ctypes; ctypes.string_at(0)": "was ended by the system (SIGSEGV)",
    "import os; os._exit(3)": "ended by itself (exit code 3)",
    "import os; os.abort()": "was ended by the system (SIGABRT)",
}


@pytest.mark.parametrize("line", CRASHES)
def test_a_crash_is_a_geometry_error(script, box_script, line):
    bad = script(f'kind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n    {line}\n', "bad.py")
    before = children()
    with Drawing(bad) as drawing:
        with pytest.raises(GeometryError) as caught:
            drawing.draw({})
        assert str(caught.value) == (
            f"the process that draws bad.py {CRASHES[line]}; other dimensions may work, and a script of your own can be tried"
            " alone: python bad.py -o part.msh"
        )
        assert caught.value.reason == "drawing_crashed"
        assert children() == before, "the dead process is buried"
    with Drawing(box_script()) as drawing:
        assert drawing.draw({}).kind == "planar", "the next design gets a new process"


def test_a_hang_is_ended_at_the_time_limit(script, monkeypatch):
    monkeypatch.setattr(room, "START_LIMIT", 0.0)
    hang = script('kind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n    while True: pass\n')
    clock = time.monotonic()
    with Drawing(hang, time_limit=1.5) as drawing:
        with pytest.raises(GeometryError) as caught:
            drawing.draw({})
        assert str(caught.value) == "drawing or meshing own.py took longer than 1.5 s and was stopped"
        assert caught.value.reason == "time_limit"
    assert time.monotonic() - clock < 8
    assert children() == set()


def test_ctrl_c_in_the_parent_ends_the_child(script):
    """An interrupt while a script hangs: KeyboardInterrupt at once, and the drawing process is gone."""
    hang = script('kind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n    while True: pass\n')
    with Drawing(hang) as drawing:
        drawing.declare()
        child = drawing._process.child.pid
        threading.Timer(0.3, os.kill, (os.getpid(), signal.SIGINT)).start()
        with pytest.raises(KeyboardInterrupt):
            drawing.draw({})
    assert not alive(child)
    assert children() == set()


def test_a_killed_parent_takes_a_busy_child_with_it(script):
    hang = script(
        'import os\nfrom pathlib import Path\nkind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n'
        '    Path(__file__).with_suffix(".pid").write_text(str(os.getpid()))\n    while True: pass\n'
    )
    code = f"from fem_flow.part.drawing import Drawing\nDrawing({str(hang)!r}).draw({{}})"
    parent = subprocess.Popen([sys.executable, "-c", code])
    note = hang.with_suffix(".pid")
    end = time.monotonic() + 30
    while not (note.exists() and note.read_text()) and time.monotonic() < end:
        time.sleep(0.05)
    child = int(note.read_text())
    assert alive(child)
    parent.kill()
    parent.wait()
    assert wait_until_gone(child)


def test_the_process_is_reused_and_then_replaced(box_script, monkeypatch):
    monkeypatch.setattr(room, "DESIGNS_PER_PROCESS", 3)
    path, seen = box_script(), []
    for _ in range(7):
        with Drawing(path) as drawing:
            drawing.draw({})
            seen.append(drawing._process.child.pid)
    assert [seen.count(pid) for pid in dict.fromkeys(seen)] == [3, 3, 1]
    with Drawing(path) as drawing:  # the same within one Drawing
        pids = []
        for _ in range(5):
            drawing.draw({})
            pids.append(drawing._process.child.pid)
        assert len(set(pids)) in (2, 3)
        assert len(drawing.mesh().cells) > 10
    assert len(children()) <= 1


def test_a_design_stays_drawn_while_another_is_open(box_script, script):
    path = box_script()
    other = script(path.read_text().replace("4, 1)", "2, 1)"), "other.py")
    with Drawing(path) as first, Drawing(other) as second:
        first.draw({})
        second.draw({})
        assert np.ptp(first.mesh().points[:, 0]) == pytest.approx(4e-3)
        assert np.ptp(second.mesh().points[:, 0]) == pytest.approx(2e-3)
    assert len(children()) == 1, "one process is kept for the next design"


def test_it_works_in_threads(box_script):
    path, found = box_script(), []

    def work():
        with Drawing(path) as drawing:
            drawing.draw({})
            found.append(len(drawing.mesh().cells))

    threads = [threading.Thread(target=work) for _ in range(3)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(found) == 3
    assert len(set(found)) == 1


def test_a_forked_child_does_not_talk_to_its_parents_process(box_script):
    code = (
        "import os\n"
        "from fem_flow.part.drawing import Drawing\n"
        f"path = {str(box_script())!r}\n"
        "def cells():\n"
        "    with Drawing(path) as drawing:\n"
        "        drawing.draw({})\n"
        "        return len(drawing.mesh().cells)\n"
        "n = cells()\n"
        "open_one = Drawing(path)\n"
        "open_one.draw({})\n"        "pid = os.fork()\n"
        "if pid == 0:\n"
        "    again = len(open_one.mesh().cells)\n"
        "    os._exit(0 if cells() == again == n else 1)\n"
        "assert os.waitpid(pid, 0)[1] == 0\n"
        "assert cells() == len(open_one.mesh().cells) == n\n"
        "print('fine')\n"
    )
    done = subprocess.run([sys.executable, "-W", "ignore", "-c", code], capture_output=True, text=True, timeout=90)
    assert done.stdout == "fine\n", done.stderr


def test_thirty_designs_do_not_leak(box_script):
    path = box_script()

    def memory(pid):
        with open(f"/proc/{pid}/statm") as file:
            return int(file.read().split()[1]) * os.sysconf("SC_PAGE_SIZE") / 1e6

    used = []
    with Drawing(path) as drawing:
        for _ in range(30):
            drawing.draw({})
            drawing.mesh()
            used.append(memory(drawing._process.child.pid))
    assert used[-1] - used[4] < 15, f"megabytes after each design: {used}"


@pytest.mark.parametrize(
    ("error", "sentence"),
    [
        (
            'OSError("libGLU.so.1: cannot open shared object file: No such file or directory")',
            "the mesh generator gmsh needs the system library libGLU.so.1, which is not on this machine; install it with: sudo"
            " apt-get install libglu1-mesa",
        ),
        (
            'OSError("libodd.so.7: cannot open shared object file: No such file or directory")',
            "the mesh generator gmsh needs the system library libodd.so.7, which is not on this machine; install the system"
            " package that contains it",
        ),
        (
            "ImportError(\"No module named 'gmsh'\")",
            "the mesh generator gmsh cannot be imported (No module named 'gmsh'); install it with: pip install gmsh",
        ),
    ],
)
@pytest.mark.parametrize("at_top", [False, True])
def test_a_missing_library_is_one_sentence(tmp_path, monkeypatch, box_script, script, error, sentence, at_top):
    (tmp_path / "stub").mkdir()
    (tmp_path / "stub" / "gmsh.py").write_text(f"raise {error}\n")
    monkeypatch.setenv("PYTHONPATH", str(tmp_path / "stub"))
    path = box_script() if at_top else script('kind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n    import gmsh\n')
    with Drawing(path) as drawing:
        with pytest.raises(GeometryError) as caught:
            drawing.declare() if at_top else drawing.draw({})
        if at_top and error.startswith("Import"):
            assert caught.value.reason == "script_failed"
        else:
            assert (str(caught.value), caught.value.reason) == (sentence, "missing_library")


def test_meshing_before_drawing(box_script):
    with Drawing(box_script()) as drawing, pytest.raises(GeometryError) as caught:
        drawing.mesh()
    assert (str(caught.value), caught.value.reason) == ("nothing is drawn yet", "not_drawn")


def test_a_drawing_that_was_closed_draws_again(box_script):
    drawing = Drawing(box_script())
    drawing.draw({})
    drawing.close()
    assert len(drawing.mesh().cells) > 10
    drawing.close()
