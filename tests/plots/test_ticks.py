"""Round ticks."""

import math

import pytest

from screener.plots.ticks import round_ticks

RANGES = [(0.0, 1.0), (-3.1, 2.9), (206.8, 214.3), (1e9 - 4, 1e9 + 5), (-1e-300, 2e-300), (-1e300, 3e300), (0.99, 1.01)]


@pytest.mark.parametrize(("low", "high"), RANGES)
@pytest.mark.parametrize("at_most", [2, 5, 9])
def test_ticks_are_inside_the_range_and_not_too_many(low: float, high: float, at_most: int) -> None:
    values = round_ticks(low, high, at_most=at_most).values
    slack = 1e-6 * (high - low)
    assert 1 <= len(values) <= at_most
    assert all(low - slack <= value <= high + slack for value in values)


@pytest.mark.parametrize(("low", "high"), RANGES)
def test_steps_are_one_two_or_five_times_a_power_of_ten(low: float, high: float) -> None:
    values = round_ticks(low, high, at_most=9).values
    step = (values[-1] - values[0]) / (len(values) - 1)
    mantissa = step / 10.0 ** math.floor(math.log10(step) + 1e-6)
    assert min(abs(mantissa - whole) for whole in (1, 2, 5, 10)) < 1e-5


@pytest.mark.parametrize(("low", "high"), RANGES)
def test_labels_say_the_values_and_differ_from_one_another(low: float, high: float) -> None:
    ticks = round_ticks(low, high, at_most=9)
    offset = float(ticks.offset or 0)
    step = ticks.values[1] - ticks.values[0]
    assert len(set(ticks.labels)) == len(ticks.labels)
    for value, label in zip(ticks.values, ticks.labels, strict=True):
        assert abs(float(label) + offset - value) < 0.01 * step


def test_readings_far_from_zero_are_labelled_by_their_distance_from_a_round_value() -> None:
    ticks = round_ticks(1e9 - 4, 1e9 + 5, at_most=5)
    assert ticks.labels == ("-4", "-2", "0", "2", "4")
    assert ticks.offset == "1000000000"


def test_a_range_without_extent_has_no_ticks() -> None:
    assert round_ticks(2.0, 2.0, at_most=5).values == ()
