"""The rows of the outermost readings, against sorting every channel by reading and row."""

import numpy as np
import pytest
from numpy.typing import NDArray

from screener.stats.outermost import AT_EITHER_END, outermost_rows
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order


def points_of(readings: NDArray[np.float64]) -> list[NDArray[np.float64]]:
    finite = [np.sort(channel[np.isfinite(channel)]) for channel in readings]
    return [channel[kept_ranks(channel.size)] for channel in finite]


def by_sorting(channel: NDArray[np.float64]) -> list[int]:
    """Rows of the lowest, lowest first, and of the highest, highest last; the first rows of equal ones."""
    rows = np.flatnonzero(np.isfinite(channel))
    half = rows.size - rows.size // 2
    rising = rows[np.lexsort((rows, channel[rows]))][: min(AT_EITHER_END, half)]
    falling = rows[np.lexsort((rows, -channel[rows]))][: min(AT_EITHER_END, rows.size // 2)]
    return [*rising.tolist(), *falling[::-1].tolist()]


@pytest.mark.parametrize("step", [0.0, 0.5, 3.0])
@pytest.mark.parametrize("rows", [3, 7, 10, 40, 3000])
def test_rows_of_the_outermost_readings_are_found_with_ties_and_gaps(rows: int, step: float) -> None:
    rng = np.random.default_rng(rows)
    readings = rng.normal(size=(30, rows))
    readings = np.round(readings / step) * step if step else readings
    readings[rng.random(readings.shape) < 0.1] = np.nan
    readings[3] = np.nan
    readings[4] = 2.0
    found = outermost_rows(readings, points_of(readings), list(kept_in_order(readings)))
    assert [rows.tolist() for rows in found] == [by_sorting(channel) for channel in readings]


def test_infinite_readings_hide_none_of_their_neighbours() -> None:
    rng = np.random.default_rng(4)
    readings = rng.normal(size=(30, 3000)).round(2)
    readings[rng.random(readings.shape) < 0.05] = np.inf
    readings[rng.random(readings.shape) < 0.05] = -np.inf
    for channel, rows in zip(
        readings, outermost_rows(readings, points_of(readings), list(kept_in_order(readings))), strict=True
    ):
        assert channel[rows].tolist() == channel[by_sorting(channel)].tolist()
        assert np.unique(rows).size == rows.size == 2 * AT_EITHER_END


def test_one_channel_alone_gives_what_it_gives_among_many() -> None:
    readings = np.random.default_rng(1).normal(size=(20, 500)).round(1)
    among = outermost_rows(readings, points_of(readings), list(kept_in_order(readings)))
    for channel in range(20):
        alone = readings[channel : channel + 1]
        assert (
            outermost_rows(alone, points_of(alone), list(kept_in_order(alone)))[0].tolist() == among[channel].tolist()
        )
