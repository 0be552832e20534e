"""Pictures are rendered in a process of their own, say what they show, and fail softly."""

import os
import sys

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.show import pictures as module
from fem_flow.show.pictures import PicturesUnavailable, pictures


def pixels(path):
    from PIL import Image

    return np.asarray(Image.open(path).convert("RGB")).astype(float)


def render(*args, **more):
    try:
        return pictures(*args, **more)
    except PicturesUnavailable as error:
        if os.environ.get("FEM_FLOW_REQUIRE_PICTURES"):
            raise
        pytest.skip(str(error))


@pytest.fixture(scope="module")
def drawn(nozzle, tmp_path_factory):
    return render(*nozzle, tmp_path_factory.mktemp("pictures"))


def test_four_pictures_with_content(drawn):
    assert [p.name for p in drawn] == ["speed", "pressure", "wall_shear", "mesh"]
    for picture in drawn:
        image = pixels(picture.path)
        assert image.shape[1] == 1800
        assert image.std() > 15
        assert (image == 255).all(axis=2).mean() < 0.80  # not mostly empty paper


def test_captions_say_what_is_shown_in_which_unit(drawn):
    speed, pressure, shear, mesh = (p.caption for p in drawn)
    scope = " Steady laminar 2-D axisymmetric computation."
    assert speed == "Speed with streamlines. The same flow passes between neighbouring lines." + scope
    assert pressure == "Static pressure counted from ambient, a line every 20 Pa." + scope
    assert shear == (
        "Size of the wall shear stress, drawn as a band on the outside of each wall. The ring marks the largest value "
        "(32.6 Pa on body)." + scope
    )
    assert mesh == "Mesh of 1200 quadratic triangles with curved edges. The lower half is the mirror image." + scope


def test_axisymmetric_parts_are_mirrored_to_a_full_section(drawn):
    from fem_flow.show.layout import lay_out

    layout = lay_out((0.0, -0.008, 0.05, 0.008))
    image = pixels(drawn[1].path)[::-1]
    axis = layout.strips[0].origin[1] + 0.008 * layout.scale
    for height in (20, 60, 100):
        above, below = image[round(axis + height), 60:1740], image[round(axis - height), 60:1740]
        assert np.abs(above - below).mean() < 6
        assert above.std() > 20


def test_the_png_carries_the_scope(drawn):
    from PIL import Image

    assert (
        Image.open(drawn[0].path).text["Description"].startswith("Steady laminar single-phase 2-D (axisymmetric) computation")
    )


def test_eddies_withheld_shear_and_a_tiny_gap(tmp_path):
    made = {p.name: p for p in render(*synthetic.needle(), tmp_path, names=("speed", "wall_shear"))}
    assert set(made) == {"speed", "wall_shear", "speed_gap", "wall_shear_gap"}
    assert "Grey: withheld next to a sharp re-entrant corner" in made["wall_shear"].caption
    assert made["speed_gap"].caption.startswith("The narrowest gap, 0.6 mm, enlarged. ")
    assert "The colours follow a square-root scale." in made["speed"].caption
    box = render(*synthetic.box(), tmp_path, names=("speed",))
    assert "2 recirculating zones with closed lines of their own." in box[0].caption


def test_long_parts_are_shown_in_pieces(tmp_path):
    made = render(*synthetic.upright(nx=30, ny=3), tmp_path, names=("speed", "wall_shear"))
    assert "shown in 3 pieces: left column to right column, downwards." in made[0].caption
    assert "ring" not in made[1].caption  # the shear is the same everywhere


def test_nothing_reaches_the_terminal(slot, tmp_path, capfd):
    render(*slot, tmp_path, names=("mesh",))
    assert capfd.readouterr() == ("", "")


def fake(tmp_path, monkeypatch, script):
    path = tmp_path / "python"
    path.write_text(f"#!/bin/sh\n{script}\n")
    path.chmod(0o755)
    monkeypatch.setattr(sys, "executable", str(path))


@pytest.mark.skipif(os.name != "posix", reason="uses a shell script")
def test_a_crash_of_the_graphics_library_is_a_typed_error(slot, tmp_path, monkeypatch):
    fake(tmp_path, monkeypatch, "kill -SEGV $$")
    with pytest.raises(PicturesUnavailable) as caught:
        pictures(*slot, tmp_path)
    assert str(caught.value) == (
        "The graphics library found neither a display nor an off-screen renderer on this machine. Install Mesa (on Debian and "
        "Ubuntu: apt install libegl1 libgl1-mesa-dri) and run again; the numbers are unaffected."
    )


@pytest.mark.skipif(os.name != "posix", reason="uses a shell script")
def test_other_failures_name_the_last_line(slot, tmp_path, monkeypatch):
    fake(tmp_path, monkeypatch, "echo 'ImportError: libGL.so.1 is missing' >&2; exit 1")
    with pytest.raises(PicturesUnavailable, match=r"^Rendering failed \(ImportError: libGL.so.1 is missing\)"):
        pictures(*slot, tmp_path)
    fake(tmp_path, monkeypatch, "exec sleep 5")
    with pytest.raises(PicturesUnavailable, match="took longer than 0 s"):
        pictures(*slot, tmp_path, time_limit=0.2)
    monkeypatch.setattr(sys, "executable", str(tmp_path / "missing"))
    with pytest.raises(PicturesUnavailable, match="could not be started"):
        pictures(*slot, tmp_path)


def test_the_program_itself_never_loads_the_graphics_library():
    import subprocess

    code = (
        "import sys, fem_flow.show.pictures, fem_flow.show.report, fem_flow.show.plots; "
        "print([m for m in ('vtk', 'vtkmodules', 'pyvista', 'matplotlib', 'scipy', 'jinja2') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=module._environment())
    assert done.stdout.strip() == "[]", done.stderr
