"""A script run by itself: ``python geometries/NAME.py --dimension VALUE -o part.msh``."""

import subprocess
import sys

import pytest

from fem_flow.part.find import find_script, shipped


def run(name, *arguments, cwd):
    command = [sys.executable, str(find_script(name, ".")), *arguments]
    return subprocess.run(command, capture_output=True, text=True, timeout=60, cwd=cwd)


def test_a_mesh_is_written_with_its_names(tmp_path):
    done = run("poppet_valve", "--lift", "2 mm", "--scale", "2", "-o", "valve.msh", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (0, "")
    assert "narrowest gap 1.414 mm" in done.stderr
    assert done.stderr.endswith("written to valve.msh\n")
    code = (
        "import gmsh\n"
        "gmsh.initialize([], readConfigFiles=False, interruptible=False)\n"
        "gmsh.option.setNumber('General.Terminal', 0)\n"
        "gmsh.open('valve.msh')\n"
        "print(*sorted(gmsh.model.getPhysicalName(d, t) for d, t in gmsh.model.getPhysicalGroups()))\n"
        "print(*sorted({int(k) for k in gmsh.model.mesh.getElementTypes()}))\n"
    )
    read = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60, cwd=tmp_path)
    assert read.stdout == "axis bore chamber fluid inlet outlet outlet_bore poppet seat stem throat\n8 9\n", read.stderr


@pytest.mark.parametrize("name", shipped())
def test_help_lists_every_dimension(name, tmp_path):
    done = run(name, "--help", cwd=tmp_path)
    assert done.returncode == 0
    assert f"python {name}.py" in done.stdout
    assert done.stdout.count("(default: ") >= 7


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (["--lift", "0.7"], '--lift is "0.7" without a unit; write it as text with a unit, for example lift = "0.7 mm"'),
        (["--lift", "0 mm"], "the valve is closed (lift = 0 mm) and nothing can flow; give a lift above 0"),
    ],
)
def test_a_mistake_is_one_sentence(arguments, sentence, tmp_path):
    done = run("poppet_valve", *arguments, cwd=tmp_path)
    assert (done.returncode, done.stdout, done.stderr) == (2, "", sentence + "\n")


def test_switches_counts_and_words(tmp_path):
    done = run("sudden_expansion", "--half", "true", "--shape", "planar", "--scale", "2", cwd=tmp_path)
    assert done.returncode == 0
    assert "symmetry (symmetry)" in done.stderr
    done = run("manifold", "--branches", "2", "--scale", "2", cwd=tmp_path)
    assert "outlet_2 (port)" in done.stderr
    assert "outlet_3" not in done.stderr
    done = run("manifold", "--branches", "2.5", cwd=tmp_path)
    assert done.stderr == "--branches is 2.5; it is a count, write a whole number, for example branches = 4\n"


def test_a_file_that_cannot_be_written(tmp_path):
    done = run("sudden_expansion", "--scale", "2", "-o", "nowhere/part.msh", cwd=tmp_path)
    assert done.returncode == 2
    assert done.stderr.startswith("the mesh cannot be written to nowhere/part.msh: ")
    assert done.stderr.endswith("; give a file that ends in .msh\n")
    assert done.stderr.count("\n") == 1
