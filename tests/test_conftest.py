"""Skips that must not happen where everything is installed count as failures there."""

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

TESTS = {
    "test_a.py": "import pytest\ndef test_a():\n    pytest.importorskip('gmsh_that_is_not_there')\n",
    "test_b.py": "import pytest\npytest.importorskip('pyvista_that_is_not_there')\ndef test_b():\n    pass\n",
    "test_c.py": "import pytest\n@pytest.mark.skipif(True, reason='no Chromium on this machine')\ndef test_c():\n    pass\n",
    "test_d.py": "import pytest\ndef test_d():\n    pytest.skip('not on this day')\n",
    "test_e.py": "def test_e():\n    pass\n",
}


@pytest.mark.parametrize(
    ("required", "browser", "failed", "skipped"),
    [("", "", [], 4), ("gmsh pyvista pardiso", "", ["test_a", "test_b"], 2), ("gmsh", "1", ["test_a", "test_c"], 2)],
)
def test_a_skip_that_names_something_required_fails(tmp_path, required, browser, failed, skipped):
    for name, text in TESTS.items():
        (tmp_path / name).write_text(text)
    shutil.copy(Path(__file__).with_name("conftest.py"), tmp_path)
    (tmp_path / "pytest.ini").write_text("[pytest]\n")
    env = {**os.environ, "FEM_FLOW_REQUIRES": required, "FEM_FLOW_REQUIRE_BROWSER": browser}
    command = [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "--continue-on-collection-errors", "-rA"]
    done = subprocess.run(command, cwd=tmp_path, env=env, capture_output=True, text=True, timeout=60)
    lines = done.stdout.splitlines()
    wrong = sorted(line.split()[1].partition(".")[0] for line in lines if line.startswith(("FAILED ", "ERROR ")))
    assert wrong == failed, done.stdout
    assert sum(int(line.split()[1].strip("[]")) for line in lines if line.startswith("SKIPPED ")) == skipped
    assert done.returncode == int(bool(failed))
