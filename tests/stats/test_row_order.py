"""Readings kept in row order: all when few, else extremes of stretches and pairs of followers."""

from itertools import pairwise

import numpy as np
import pytest

from screener.stats.row_order import IN_FULL, STRETCHES, kept_in_order, row_order


def test_few_readings_are_all_kept_with_gaps_where_they_are_missing() -> None:
    readings = np.array([[3.0, np.nan, 1.0, np.inf, 2.0]])
    kept = row_order(kept_in_order(readings)[0], 5)
    assert kept.stretch == 1
    np.testing.assert_array_equal(kept.reading, [3.0, np.nan, 1.0, np.nan, 2.0])
    np.testing.assert_array_equal(kept.row, [1, 2, 3, 4, 5])
    np.testing.assert_array_equal(kept.before, [3.0, np.nan, 1.0, np.nan])
    np.testing.assert_array_equal(kept.after, [np.nan, 1.0, np.nan, 2.0])


@pytest.mark.parametrize("rows", [IN_FULL + 1, 1000, 4001])
def test_of_many_the_lowest_and_highest_of_every_stretch_stay_and_followers_are_followers(rows: int) -> None:
    rng = np.random.default_rng(rows)
    readings = rng.normal(size=(3, rows))
    readings[rng.random(readings.shape) < 0.1] = np.nan
    kept = row_order(kept_in_order(readings)[1], rows)
    assert np.nanmin(kept.reading) == np.nanmin(readings[1])
    assert np.nanmax(kept.reading) == np.nanmax(readings[1])
    followers = dict(zip(readings[1, :-1].tolist(), readings[1, 1:].tolist(), strict=True))
    both = ~np.isnan(kept.before) & ~np.isnan(kept.after)
    assert both.sum() > 80
    for before, after in zip(kept.before[both], kept.after[both], strict=True):
        assert followers[float(before)] == after
    for row, low, high in zip(kept.row[::2], kept.reading[::2], kept.reading[1::2], strict=True):
        near = readings[1, max(0, int(row) - kept.stretch) : int(row) + kept.stretch]
        assert np.isnan(low) or {low, high} <= set(near.tolist())


def test_kept_readings_of_another_table_are_refused() -> None:
    for size, rows in ((4, 5), (10, 1000)):
        with pytest.raises(ValueError, match="in row order"):
            row_order(np.zeros(size), rows)


@pytest.mark.parametrize("rows", [IN_FULL + 1, 767, 1023, 1024, 4001, 100_003])
@pytest.mark.parametrize("missing", [0.0, 0.3, 0.9])
def test_the_extremes_of_every_stretch_are_those_of_a_loop(rows: int, missing: float) -> None:
    rng = np.random.default_rng(rows)
    readings = rng.normal(size=(2, rows))
    readings[rng.random(readings.shape) < missing] = np.nan
    ends = [stretch * rows // STRETCHES for stretch in range(STRETCHES + 1)]
    for channel, kept in zip(readings, kept_in_order(readings), strict=True):
        for stretch, (first, stop) in enumerate(pairwise(ends)):
            there = channel[first:stop][~np.isnan(channel[first:stop])].tolist()
            assert kept[stretch] == (min(there) if there else pytest.approx(np.nan, nan_ok=True))
            assert kept[STRETCHES + stretch] == (max(there) if there else pytest.approx(np.nan, nan_ok=True))
