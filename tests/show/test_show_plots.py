"""Line plots: gaps where shear is withheld, marks, names and units."""

from dataclasses import replace

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.show.plots import file_name, gaps, wall_plots


def test_gaps_reach_to_the_known_neighbours():
    arc = np.arange(6.0)
    nan = np.nan
    assert gaps(arc, np.array([1, 1, nan, nan, 1, 1.0])) == [(1.0, 4.0)]
    assert gaps(arc, np.array([nan, 1, 1, 1, 1, nan])) == [(0.0, 1.0), (4.0, 5.0)]
    assert gaps(arc, np.ones(6)) == []
    assert gaps(arc, np.full(6, nan)) == [(0.0, 5.0)]


def test_peak_and_withheld_stretch_are_said(tmp_path):
    made = wall_plots(synthetic.needle()[2], tmp_path)
    assert [p.name for p in made] == ["along_body"]
    assert made[0].path.name == "along_body.png"
    assert made[0].caption == (
        "Wall shear stress (positive where the fluid pulls towards increasing arc length) and pressure along body. The ring "
        "marks the largest value given, 17.4 kPa. Grey: withheld next to a sharp re-entrant corner, where shear has no limit."
    )


def test_a_constant_has_no_peak(slot, tmp_path):
    made = wall_plots(slot[2], tmp_path)
    assert [p.name for p in made] == ["along_floor", "along_roof"]
    assert all("ring" not in p.caption for p in made)


def test_a_wall_that_is_withheld_everywhere_still_draws(slot, tmp_path):
    wall = replace(slot[2][0], shear=np.full_like(slot[2][0].shear, np.nan))
    made = wall_plots([wall], tmp_path)
    from PIL import Image

    image = np.asarray(Image.open(made[0].path).convert("L"))
    assert image.shape[1] == 1800
    assert image.std() > 10


def test_pieces_of_a_wall_share_a_picture_and_many_walls_are_limited(slot, tmp_path):
    wall = slot[2][0]
    two = [replace(wall, piece=1, pieces=2), replace(wall, piece=2, pieces=2, shear=-wall.shear)]
    assert len(wall_plots(two, tmp_path)) == 1
    many = [replace(wall, name=f"w{k}", shear=wall.shear * (k + 1)) for k in range(5)]
    assert [p.name for p in wall_plots(many, tmp_path, most=2)] == ["along_w3", "along_w4"]


@pytest.mark.parametrize(("name", "file"), [("seat", "seat"), ("../x y", ".._x_y"), ("a/b", "a_b")])
def test_wall_names_become_file_names(name, file):
    assert file_name(name) == file
