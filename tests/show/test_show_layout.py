"""Equal aspect, strips for long parts, round scales, friendly axes."""

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.show.layout import axis_unit, full_box, lay_out, length_text, root_ticks, round_length, tick_text, ticks


@pytest.mark.parametrize("aspect", [1 / 100, 1 / 30, 1 / 3, 0.9, 1.0, 1.3, 4.0, 13.0, 30.0, 100.0])
@pytest.mark.parametrize("size", [2e-5, 0.04, 3.0])
def test_every_part_fits_its_window_at_equal_aspect(aspect, size):
    box = (0.01 * size, -0.3 * size, 0.01 * size + size * aspect, 0.7 * size)
    layout = lay_out(box)
    assert 900 <= layout.width <= 2300
    assert layout.height <= 1800
    corners = np.array([[box[0], box[1]], [box[2], box[1]], [box[2], box[3]], [box[0], box[3]]])
    covered = 0.0
    for strip in layout.strips:
        px = layout.place(corners, strip)
        assert np.linalg.norm(px[1] - px[0]) / np.linalg.norm(px[2] - px[1]) == pytest.approx(aspect)
        low, high = (
            np.array([[strip.low, box[1]], [strip.high, box[3]]])
            if layout.wide
            else np.array([[box[0], strip.low], [box[2], strip.high]])
        )
        a, b = layout.place(np.array([low, high]), strip)
        assert min(*a, *((layout.width, layout.height) - b)) >= -1e-6
        covered += strip.high - strip.low
    assert covered == pytest.approx(size * max(aspect, 1.0))


def test_a_part_of_thirty_to_one_is_shown_in_three_strips_of_ten_to_one():
    wide, tall = lay_out((0, 0, 0.12, 0.004)), lay_out((0, 0, 0.004, 0.12))
    assert len(wide.strips) == len(tall.strips) == 3
    assert [s.low for s in wide.strips] == pytest.approx([0.0, 0.04, 0.08])
    assert wide.strips[0].origin[1] > wide.strips[1].origin[1] > wide.strips[2].origin[1]
    assert [s.low for s in tall.strips] == pytest.approx([0.08, 0.04, 0.0])
    assert tall.strips[0].origin[0] < tall.strips[1].origin[0] < tall.strips[2].origin[0]
    assert 0.004 * wide.scale > 150


def test_the_colour_bar_lies_outside_the_part():
    for box in [(0, 0, 4, 1), (0, 0, 1, 1), (0, 0, 1, 20), (0, 0, 40, 1)]:
        layout = lay_out(box)
        x, y, _, h = layout.bar
        (_, py), (qx, _) = layout.place(np.array([box[:2], box[2:]], float), layout.strips[-1])
        assert y + h < py or x > qx


def test_axisymmetric_parts_get_the_box_of_the_full_section():
    assert full_box(synthetic.stepped()) == (0, -0.010, 0.07, 0.010)
    assert full_box(synthetic.stepped("planar")) == (0, 0, 0.07, 0.010)


def test_round_lengths():
    assert [round_length(v) for v in (1.0, 4.99e-3, 9.9e-6, 0.0)] == pytest.approx([1.0, 2e-3, 5e-6, 0.0])


def test_ticks_are_round_and_inside():
    assert ticks(0, 1.02, 5) == pytest.approx([0, 0.25, 0.5, 0.75, 1.0])
    assert ticks(-3.1, 9.0, 6) == pytest.approx([-2.5, 0, 2.5, 5, 7.5])
    assert ticks(5.0, 5.0) == [5.0]
    assert root_ticks(73.0) == pytest.approx([0, 2, 10, 20, 50])


@pytest.mark.parametrize(
    ("value", "step", "text"),
    [
        (0.25, 0.25, "0.25"),
        (-40.0, 20.0, "−40"),
        (-0.0, 1.0, "0"),
        (1.5, 0.5, "1.5"),
        (7.5, 2.5, "7.5"),
        (0.002, 0.001, "0.002"),
    ],
)
def test_tick_text(value, step, text):
    assert tick_text(value, step) == text


@pytest.mark.parametrize(
    ("largest", "unit", "name"),
    [
        (2.0, "m/s", "m/s"),
        (0.75, "m/s", "mm/s"),
        (3e-5, "m/s", "µm/s"),
        (2e5, "Pa", "bar"),
        (2e4, "Pa", "kPa"),
        (3.0, "Pa", "Pa"),
        (0.02, "Pa", "mPa"),
        (2e5, "shear", "kPa"),
        (0.0, "Pa", "Pa"),
        (2e-4, "m", "µm"),
    ],
)
def test_axes_read_as_numbers_of_at_least_one(largest, unit, name):
    factor, found = axis_unit(largest, unit)
    assert found == name
    assert largest == 0 or largest * factor >= 1 - 1e-9


def test_lengths_as_a_drawing_shows_them():
    assert [length_text(v) for v in (0.0124, 5e-5, 8.5e-4, 1.5, 0.1)] == ["12.4 mm", "50 µm", "0.85 mm", "1.5 m", "100 mm"]
