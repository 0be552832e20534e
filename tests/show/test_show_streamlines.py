"""Eddies are found where the stream function has hills of its own, and nowhere else."""

import numpy as np
import pytest
import synthetic_flows as synthetic

from fem_flow.show.scene import edges, level_lines, subdivide
from fem_flow.show.streamlines import eddies, levels_of, levels_through


def rim_of(fields):
    return np.unique(edges(fields.cells)[1])


def test_two_eddies_of_a_closed_box_with_their_strengths():
    fields, _, _ = synthetic.box(n=16)
    found = eddies(fields.cells, fields.stream, rim_of(fields), 1e-3 * np.ptp(fields.stream))
    assert [round(e.extreme / abs(e.extreme)) for e in found] == [1, -1]
    assert found[0].extreme == fields.stream.max()
    assert found[1].extreme == fields.stream.min()
    assert found[0].rim == pytest.approx(0.0, abs=0.02 * found[0].extreme)


@pytest.mark.parametrize("make", [synthetic.slot, synthetic.nozzle, synthetic.ring])
def test_flow_that_passes_through_has_no_eddies(make):
    fields, _, _ = make()
    assert eddies(fields.cells, fields.stream, rim_of(fields), 1e-6 * np.ptp(fields.stream)) == []


def test_a_weak_eddy_beside_strong_flow_is_found_and_its_lines_close():
    """A small closed hollow of 1 % of the flow, laid into plane flow, gets level lines that stay around its centre."""
    fields, _, _ = synthetic.slot(nx=40, ny=12)
    x, y = fields.points.T
    bump = np.exp(-((x - 0.02) ** 2 + (y - 0.002) ** 2) / (2 * 0.0005**2))
    stream = fields.stream / np.ptp(fields.stream) + 1.5 * bump
    found = [e for e in eddies(fields.cells, stream, rim_of(fields), 0.01) if e.extreme > 1]
    assert len(found) == 1
    centre = fields.points[found[0].nodes[0]]
    assert centre == pytest.approx([0.02, 0.002], abs=6e-4)
    from dataclasses import replace

    surface = subdivide(replace(fields, stream=stream))
    cells = np.flatnonzero(np.isin(fields.cells, found[0].nodes).any(axis=1))
    lines = level_lines(surface, "stream", levels_of(found[0], 3), cells)
    assert np.abs(lines["start"] - [0.02, 0.002]).max() < 0.002
    # closed: every point is an end of exactly two segments
    ends = np.round(np.concatenate([lines["start"], lines["end"]]) / 1e-9).astype(np.int64)
    assert set(np.unique(ends, axis=0, return_counts=True)[1]) == {2}


def test_small_hills_are_noise():
    fields, _, _ = synthetic.box()
    size = np.ptp(fields.stream)
    assert len(eddies(fields.cells, fields.stream, rim_of(fields), 0.5 * size)) == 1


def test_the_same_flow_passes_between_neighbouring_levels(slot):
    fields, _, _ = slot
    levels = levels_through(fields.stream, rim_of(fields), 10)
    assert np.diff(levels) == pytest.approx(0.1 * 0.5 * 0.004)
    assert levels[0] == pytest.approx(0.05 * 0.5 * 0.004)


def test_a_closed_box_has_no_levels_for_flow_through():
    fields, _, _ = synthetic.box()
    assert len(levels_through(fields.stream, rim_of(fields), 10)) == 0


def test_lines_are_thin_where_they_crowd():
    from fem_flow.show.flowlines import widths

    speed = np.array([0.0, 1.0, 1.0, 4.0])
    step = np.array([1e-3, 1e-3, 5e-3, 1e-3])
    white, dark = widths(step, speed, None, 2000.0)  # apart: no limit, 2 px, 10 px, half a px
    assert white == pytest.approx([2.4, 0.8, 2.4, 0.8])
    assert dark == pytest.approx([4.6, 0.8, 4.6, 0.8])
    turn, _ = widths(2 * np.pi * 0.5 * step, speed, np.full(4, -0.5), 2000.0)
    assert turn == pytest.approx(white)
