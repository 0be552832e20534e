"""Error bars of two meshes, and what the accuracy allows."""

import math

import pytest

from fem_flow.case.resolved import Accuracy
from fem_flow.measure.number import Number, number
from fem_flow.trust.bars import FACTOR, FALL, is_round_off, missed, tolerance, wanted, with_bars


def drop(value, of=("inlet", "outlet"), bar=None) -> Number:
    return number("total_pressure_drop", of, value).with_(error_bar=bar)


def test_the_bar_is_a_stated_multiple_of_the_difference():
    assert with_bars([drop(10.0)], [drop(9.0)])[0].error_bar == FACTOR * 1.0
    assert with_bars([drop(10.0)], [drop(11.0)])[0].error_bar == FACTOR * 1.0


@pytest.mark.parametrize("order", [0.85, 1.0, 2.0, 4.0])
def test_the_factor_covers_orders_from_085(order):
    """Errors C h^p with h = 1, 2: the bar is not below the error that the fine mesh has."""
    error, coarse = 1.0, 2.0**order
    assert with_bars([drop(100 + error)], [drop(100 + coarse)])[0].error_bar >= error * (1 - 1e-3)


def test_the_values_are_the_fine_ones():
    assert with_bars([drop(10.0)], [drop(9.0)])[0].value == 10.0


@pytest.mark.parametrize(("fine", "coarse"), [(math.nan, 1.0), (1.0, math.nan)])
def test_no_bar_where_either_is_withheld(fine, coarse):
    assert with_bars([drop(fine)], [drop(coarse)])[0].error_bar is None


def test_no_bar_without_a_partner():
    assert with_bars([drop(1.0)], [drop(1.0, of=("a", "b"))])[0].error_bar is None


def points(*values):
    return [number("attachment_point", ("floor",), v) for v in values]


def test_points_are_matched_in_their_order():
    bars = [n.error_bar for n in with_bars(points(0.2, 1.0), points(0.3, 1.4))]
    assert bars == pytest.approx([FACTOR * 0.1, FACTOR * 0.4])


def test_points_of_unequal_number_are_matched_by_the_smallest_differences():
    """The coarse mesh misses the first eddy: its points belong to the second and third."""
    found = with_bars(points(0.05, 1.0, 2.0), points(1.1, 1.95))
    assert [n.error_bar for n in found] == [None, pytest.approx(FACTOR * 0.1), pytest.approx(FACTOR * 0.05)]
    found = with_bars(points(1.0), points(0.05, 1.1))
    assert [n.error_bar for n in found] == [pytest.approx(FACTOR * 0.1)]


def test_a_bar_falls_by_no_more_than_order_three():
    """The difference is small by accident: the bar of the mesh before still counts for an eighth."""
    assert with_bars([drop(10.0)], [drop(10.01, bar=8.0)])[0].error_bar == 8.0 / FALL == 1.0
    assert with_bars([drop(10.0)], [drop(9.0, bar=8.0)])[0].error_bar == FACTOR * 1.0
    assert with_bars([drop(10.0)], [drop(10.0, bar=8.0)])[0].error_bar == 0.0


def forces(*values):
    return [number("force_x", (name,), v) for name, v in zip("abcd", values, strict=False)]


def test_no_bar_is_below_the_median_share_of_its_quantity():
    """Differences of 1, 2 and 0.01 % of the size; the last one counts as 1 %."""
    found = with_bars(forces(100.0, 100.0, 100.0), forces(101.0, 102.0, 100.01))
    assert [n.error_bar for n in found] == pytest.approx([FACTOR * 1.0, FACTOR * 2.0, FACTOR * 1.0])


def test_exact_figures_and_pairs_are_left_alone():
    found = with_bars(forces(100.0, 100.0, 100.0, 50.0), forces(101.0, 102.0, 103.0, 50.0))
    assert found[3].error_bar == 0.0
    found = with_bars(forces(100.0, 100.0), forces(101.0, 100.01))
    assert [n.error_bar for n in found] == pytest.approx([FACTOR * 1.0, FACTOR * 0.01])


def accuracy(target=0.01, relative=True, of=(("total_pressure_drop", ()),)):
    return Accuracy(target, relative, of)


def test_a_percentage_is_of_the_figures_own_size():
    numbers = [drop(-50.0), drop(200.0, ("a", "b"))]
    assert tolerance(numbers[0], numbers, accuracy()) == pytest.approx(0.5)


def test_but_never_finer_than_that_of_a_tenth_of_the_largest_of_its_quantity():
    numbers = [drop(1.0), drop(-200.0, ("a", "b")), number("static_pressure_drop", ("a", "b"), 1e6)]
    assert tolerance(numbers[0], numbers, accuracy()) == pytest.approx(0.01 * 20.0)


def test_withheld_figures_set_no_size():
    numbers = [drop(1.0), drop(math.nan, ("a", "b"))]
    assert tolerance(numbers[0], numbers, accuracy()) == pytest.approx(0.01)


def test_an_absolute_target_is_what_it_says():
    numbers = [drop(1.0), drop(1e6, ("a", "b"))]
    assert tolerance(numbers[0], numbers, accuracy(20.0, relative=False)) == 20.0


def test_missed():
    numbers = [drop(100.0, bar=0.9), drop(100.0, ("a", "b"), bar=1.1), drop(math.nan, ("a", "c")), drop(100.0, ("b", "c"))]
    assert missed(numbers, accuracy()) == [numbers[1], numbers[3]]
    assert missed(numbers, None) == []


def test_a_pair_asked_the_other_way_round_is_the_same():
    numbers = [drop(1.0), drop(2.0, ("a", "b"))]
    assert wanted(numbers, accuracy(of=(("total_pressure_drop", ("b", "a")),))) == [numbers[1]]


def test_each_number_is_wanted_once():
    numbers = [number("force_x", ("poppet",), 1.0)]
    assert wanted(numbers, accuracy(of=(("force_x", ()), ("force_x", ("poppet",))))) == numbers


def test_a_figure_that_is_exactly_zero_is_not_missed_for_its_round_off():
    """Couette flow: no drop but 1e-15 of the head. A bar of its own size would refine for ever."""
    numbers = [drop(1e-15, bar=2e-15), number("total_pressure", ("inlet",), 0.3)]
    assert is_round_off(numbers[0], numbers)
    assert missed(numbers, accuracy()) == []


def test_a_small_figure_is_not_round_off():
    numbers = [drop(1e-3, bar=1e-3), number("total_pressure", ("inlet",), 1e5)]
    assert not is_round_off(numbers[0], numbers)
    assert missed(numbers, accuracy()) == [numbers[0]]
