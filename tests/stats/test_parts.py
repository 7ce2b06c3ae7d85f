"""Mean and spread of the parts of a record."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import stats

from screener.stats.parts import part_summaries, share_between


@pytest.mark.parametrize(("at", "scale"), [(0.0, 1.0), (1e9, 1e-3), (0.0, 1e300), (0.0, 1e-300)])
def test_each_part_has_the_mean_and_deviation_of_its_finite_readings(at: float, scale: float) -> None:
    readings = at + scale * np.random.default_rng(1).normal(size=(3, 60))
    readings[1, 5:9] = np.nan
    readings[2, 30] = np.inf
    told = part_summaries(readings, [0, 7, 40])
    for row, of_channel in zip(readings, told, strict=True):
        for part, (n, mean, sd) in zip(np.split(row, [7, 40]), of_channel, strict=True):
            known = part[np.isfinite(part)]
            assert n == known.size
            assert_allclose([mean, sd], [known.mean(), stats.tstd((known - at) / scale) * scale], rtol=1e-9)


def test_what_is_not_defined_is_nan() -> None:
    told = part_summaries(np.array([[np.nan, np.nan, 4.0, 1.0, 3.0]]), [0, 2, 3])
    assert_allclose(told, [[[0, np.nan, np.nan], [1, 4, np.nan], [2, 2, np.sqrt(2)]]])


def test_a_part_may_be_empty_and_there_may_be_none() -> None:
    assert_allclose(part_summaries(np.array([[1.0, 3.0]]), [0, 0]), [[[0, np.nan, np.nan], [2, 2, np.sqrt(2)]]])
    assert part_summaries(np.ones((4, 5)), []).shape == (4, 0, 3)


@pytest.mark.parametrize("scale", [1.0, 1e200, 1e-200])
def test_the_share_between_parts_is_that_behind_the_f_test(scale: float) -> None:
    rng = np.random.default_rng(2)
    parts = [scale * rng.normal(mean, 1.0, size) for mean, size in ((0.0, 20), (0.5, 31), (-0.4, 12))]
    f = stats.f_oneway(*(part / scale for part in parts)).statistic
    share = share_between(part_summaries(np.concatenate(parts)[None], [0, 20, 51])[0])
    between, within = 2, 63 - 3
    assert share == pytest.approx(f * between / (f * between + within), rel=1e-9)


def test_there_is_no_share_between_parts_of_one_part_or_without_spread() -> None:
    assert np.isnan(share_between(part_summaries(np.array([[1.0, 2.0, 5.0]]), [0])[0]))
    assert np.isnan(share_between(part_summaries(np.ones((1, 6)), [0, 3])[0]))
    assert np.isnan(share_between(part_summaries(np.zeros((1, 6)), [0, 3])[0]))
