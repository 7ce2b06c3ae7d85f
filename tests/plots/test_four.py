"""Run order, lag and histogram: what is drawn where."""

import numpy as np
import pytest

from screener.plots import Charset, histogram, histogram_plot, lag_plot, run_order_plot
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order, row_order

WIDTH, HEIGHT = 60, 18


def marks(lines: list[str]) -> list[tuple[int, int]]:
    """Column and line (from the bottom) of every point inside the frame."""
    return [(c, len(lines) - k) for k, line in enumerate(lines[2:-2]) for c, mark in enumerate(line) if mark == "o"]


def test_a_trend_rises_from_left_to_right_in_the_run_order() -> None:
    order = row_order(kept_in_order(np.linspace(5.0, 9.0, 40)[None])[0], 40)
    lines = run_order_plot(order, " [bar]", width=WIDTH, height=HEIGHT, charset=Charset.ASCII)
    assert (len(lines), {len(line) for line in lines}) == (HEIGHT, {WIDTH})
    assert lines[0].startswith("reading [bar]")
    points = sorted(marks(lines))
    assert len(points) > 20
    assert [height for _, height in points] == sorted(height for _, height in points)


def test_an_outlying_reading_of_a_long_record_is_seen_at_its_row() -> None:
    readings = np.random.default_rng(2).normal(size=20_000)
    readings[15_000] = 40.0
    order = row_order(kept_in_order(readings[None])[0], readings.size)
    lines = run_order_plot(order, "", width=WIDTH, height=HEIGHT, charset=Charset.ASCII)
    column, _ = max(marks(lines), key=lambda mark: mark[1])
    left = lines[1].index("+")
    assert (column - left) / (WIDTH - left) == pytest.approx(0.75, abs=0.06)
    assert "lowest and highest of every 79" in lines[-1]


@pytest.mark.parametrize(("rho", "rises"), [(0.95, True), (-0.95, False)])
def test_readings_that_follow_each_other_lie_along_a_diagonal_of_the_lag_plot(rho: float, *, rises: bool) -> None:
    rng, readings = np.random.default_rng(4), np.zeros(2000)
    for k in range(1, readings.size):
        readings[k] = rho * readings[k - 1] + rng.normal()
    order = row_order(kept_in_order(readings[None])[0], readings.size)
    points = np.array(marks(lag_plot(order, "", width=WIDTH, height=HEIGHT, charset=Charset.ASCII)))
    assert (np.corrcoef(points.T)[0, 1] > 0.7) == rises
    assert abs(np.corrcoef(points.T)[0, 1]) > 0.7


@pytest.mark.parametrize("plot", [run_order_plot, lag_plot])
def test_a_run_file_without_row_order_says_so(plot: object) -> None:
    assert callable(plot)
    lines = plot(None, "", width=WIDTH, height=HEIGHT, charset=Charset.ASCII)
    assert "No readings in row order are kept" in "\n".join(lines)


def test_a_histogram_of_few_readings_counts_each_once() -> None:
    readings = np.sort(np.random.default_rng(1).normal(size=300))
    edges, counts = histogram(readings, 300, at_most=40)
    np.testing.assert_array_equal(counts, np.histogram(readings, edges)[0])
    assert counts.sum() == 300


def test_a_histogram_from_thinned_readings_is_close_to_that_of_all() -> None:
    readings = np.sort(np.random.default_rng(1).normal(size=50_000))
    edges, counts = histogram(readings[kept_ranks(50_000)], 50_000, at_most=30)
    assert counts.sum() == pytest.approx(50_000)
    exact = np.histogram(readings, edges)[0]
    assert np.abs(counts - exact).max() < 0.003 * 50_000


def test_a_histogram_keeps_ties_together() -> None:
    readings = np.sort(np.repeat([1.0, 2.0, 3.0, 4.0], [1000, 2000, 4000, 1000]))
    edges, counts = histogram(readings[kept_ranks(8000)], 8000, at_most=30)
    exact = np.histogram(readings, edges)[0]
    assert counts.sum() == pytest.approx(8000)
    assert np.abs(counts - exact).max() < 200


def test_bars_stand_on_the_axis() -> None:
    readings = np.sort(np.random.default_rng(1).normal(size=300))
    lines = histogram_plot(readings, 300, "", width=WIDTH, height=HEIGHT, charset=Charset.ASCII)
    assert lines[0].strip() == "readings"
    assert sum(line.count(".") for line in lines) > 60
