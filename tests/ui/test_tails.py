"""The outermost readings by name, against the readings themselves."""

import numpy as np
import pytest

from screener.plots import quantile_view
from screener.stats.outermost import outermost_rows
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order
from screener.ui.tails import Tails, tail_lines, tails_of
from screener.ui.views import View


def tails(
    n: int, *, family: str = "normal", scale: float = 1.0
) -> tuple[Tails, np.ndarray[tuple[int], np.dtype[np.float64]]]:
    """The named readings of a channel of n readings above 0, and these."""
    readings = np.exp(np.random.default_rng(n).normal(size=n))
    points = np.sort(readings)[kept_ranks(n)]
    rows = outermost_rows(readings[None], [points], list(kept_in_order(readings[None])))[0]
    return tails_of(points, rows, quantile_view(points, n, family, "filliben", 0.0, scale)), readings


@pytest.mark.parametrize("n", [3, 8, 60, 5000])
def test_each_named_reading_stands_in_its_row(n: int) -> None:
    named, readings = tails(n)
    outermost = [*named.low, *named.high]
    assert [one.reading for one in outermost] == [readings[one.row - 1] for one in outermost]
    assert [one.reading for one in named.low] == np.sort(readings)[: len(named.low)].tolist()
    assert [one.reading for one in named.high] == np.sort(readings)[::-1][: len(named.high)].tolist()
    assert len(outermost) == min(n, 10)


def test_the_distance_is_actual_minus_expected_in_logarithms_for_a_family_on_the_log_axis() -> None:
    named, readings = tails(60, family="lognormal")
    median_of_largest = 0.5 ** (1 / 60)
    from scipy.stats import norm

    assert named.high[0].off == pytest.approx(np.log(readings.max()) - norm.ppf(median_of_largest))
    assert named.low[0].off == pytest.approx(np.log(readings.min()) - norm.ppf(1 - median_of_largest))


def test_a_family_that_was_not_fitted_leaves_the_readings_named_without_a_distance() -> None:
    named, _ = tails(60, scale=np.nan)
    assert {one.off for one in (*named.low, *named.high)} == {None}
    assert " (" not in tail_lines(named, View.QUANTILE, 80)[0]


def test_each_view_names_the_ends_it_shows_in_as_many_words_as_fit() -> None:
    named, readings = tails(5000)
    both = tail_lines(named, View.QUANTILE, 60)
    assert [line.split()[0] for line in both] == ["lowest", "highest"]
    assert all(len(line) <= 60 for line in both)
    assert f"in row {int(readings.argmin()) + 1:,} (" in both[0]
    assert [line.split()[0] for line in tail_lines(named, View.LOW_TAIL, 60)] == ["lowest"]
    assert [line.split()[0] for line in tail_lines(named, View.HIGH_TAIL, 60)] == ["highest"]
    assert tail_lines(named, View.LAG, 60) == []
    assert len(tail_lines(named, View.HIGH_TAIL, 300)[0].split(" in row ")) == 6


def test_rows_that_do_not_fit_the_readings_name_nothing() -> None:
    view = quantile_view(np.arange(3.0), 3, "normal", "filliben", 0.0, 1.0)
    assert tails_of(np.arange(3.0), np.arange(4), view) == Tails()
    assert tails_of(np.arange(3.0), np.arange(0), view) == Tails()
