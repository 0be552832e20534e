"""The preview drawing: names without overlaps, the whole sheet used, corners and gap marked."""

import itertools

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.show.drawing import SIZE, WIDTH, _Note, _Paper, closed_rings, preview_picture

OUTLINES = {
    "nozzle": synthetic.nozzle()[1],
    "slot": synthetic.slot()[1],
    "thin": synthetic.slot(0.12, 0.004)[1],
    "tall": synthetic.upright()[1],
    "ring": synthetic.ring()[1],
    "step": synthetic.stepped(),
    "planar step": synthetic.stepped("planar"),
    "comb": synthetic.comb(),
    "box": synthetic.box()[1],
}


def arranged(outline):
    paper = _Paper(outline, "title")
    names = {c.name: c.role for c in outline.curves if c.role in ("port", "wall", "section")}
    notes = [_Note(n, n if n != "inlet" else "inlet\n12 L/min, Re 840", r, outline) for n, r in names.items()]
    notes.append(_Note("", "narrowest gap 0.6 mm", "gap", outline))
    paper.arrange(notes)
    return paper, notes


def rectangle(note):
    (x, y), w, h = note.at, note.length, note.lines * SIZE * 1.1
    left = {"left": x - w, "right": x}.get(note.side, x - w / 2)
    low = {"top": y, "bottom": y - h}.get(note.side, y - h / 2)
    return left, low, left + w, low + h


@pytest.mark.parametrize("name", OUTLINES)
def test_names_do_not_overlap_one_another_or_the_part_and_stay_on_the_sheet(name):
    paper, notes = arranged(OUTLINES[name])
    (x0, y0), (x1, y1) = paper.px(np.array(paper.box).reshape(2, 2))
    for note in notes:
        a, b, c, d = rectangle(note)
        assert min(a, b, WIDTH - c, paper.height - d) >= 0, note.text
        assert c <= x0 or a >= x1 or d <= y0 or b >= y1, note.text
    for one, two in itertools.combinations(notes, 2):
        a, b = rectangle(one), rectangle(two)
        assert a[2] <= b[0] or b[2] <= a[0] or a[3] <= b[1] or b[3] <= a[1], (one.text, two.text)


@pytest.mark.parametrize("name", OUTLINES)
def test_equal_aspect_and_a_large_part(name):
    paper, _ = arranged(OUTLINES[name])
    unit = paper.px([(paper.box[0] + 1e-3, paper.box[1] + 1e-3)])[0] - paper.px([paper.box[:2]])[0]
    assert unit[0] == pytest.approx(unit[1])
    assert max(paper.w * paper.scale / WIDTH, paper.h * paper.scale / paper.height) > 0.45


def test_the_picture_and_its_caption(tmp_path):
    from PIL import Image

    made = preview_picture(synthetic.stepped(), tmp_path / "new" / "preview.png", {"inlet": "inlet\n$5 & <b>"}, "Step, $2")
    assert made.caption == (
        "Step, $2: the fluid is tinted, walls are thick, ports are blue and dashed. Full section of the axisymmetric part; the "
        "chain line is its axis. Narrowest gap 8 mm. 1 sharp re-entrant corner is marked: wall shear has no limit there."
    )
    image = np.asarray(Image.open(made.path).convert("RGB")).astype(float)
    assert image.shape[1] == 1800
    assert image.std() > 10


def test_pieces_join_to_closed_rings_whatever_their_order_and_direction():
    square = np.array([[0, 0], [1, 0], [1, 1], [0, 1]], float)
    pieces = [square[[0, 1]], square[[3, 2]], square[[2, 1]], square[[3, 0]]]
    rings = closed_rings(pieces)
    assert len(rings) == 1
    x, y = rings[0].T
    assert abs(0.5 * np.sum(x[:-1] * y[1:] - x[1:] * y[:-1])) == pytest.approx(1.0)
    hole = 0.25 + 0.5 * square[[0, 1, 2, 3, 0]]
    assert len(closed_rings([*pieces, hole])) == 2
    assert closed_rings([]) == []
