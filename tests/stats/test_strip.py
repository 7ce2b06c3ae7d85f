"""The strip: what it says of samples whose departure is known."""

import numpy as np
from scipy import stats

from screener.stats.strip import LEVELS, PLACES, strips

M = 400
NORMAL = stats.norm.ppf((np.arange(M) + 0.5) / M)


def strip_of(actual: np.ndarray[tuple[int], np.dtype[np.float64]]) -> list[int]:
    """Levels of a sample against the normal of its mean and least-squares slope."""
    slope = np.sum(actual * NORMAL) / np.sum(NORMAL**2)
    expected = actual.mean() + slope * NORMAL
    return [int(level) for level in strips(actual[None], expected[None], np.array([slope]))[0]]


def test_a_sample_on_the_line_gives_the_middle_level_throughout() -> None:
    assert strip_of(5.0 + 2.0 * NORMAL) == [LEVELS // 2] * PLACES


def test_heavy_tails_go_down_at_the_left_and_up_at_the_right_and_light_ones_the_other_way() -> None:
    heavy = strip_of(stats.t(3).ppf((np.arange(M) + 0.5) / M))
    light = strip_of(stats.uniform.ppf((np.arange(M) + 0.5) / M))
    middle = LEVELS // 2
    assert heavy[0] < middle < heavy[-1]
    assert light[0] > middle > light[-1]


def test_right_skew_lies_above_the_line_at_both_ends() -> None:
    skew = strip_of(stats.expon.ppf((np.arange(M) + 0.5) / M))
    assert skew[0] > LEVELS // 2 < skew[-1]
    assert min(skew[2:6]) < LEVELS // 2


def test_a_channel_alone_and_among_others_has_the_same_strip() -> None:
    rng = np.random.default_rng(3)
    points = np.sort(rng.normal(size=(20, M)), axis=1)
    expected, scale = np.tile(NORMAL, (20, 1)), np.ones(20)
    together = strips(points, expected, scale)
    assert together == [strips(points[k : k + 1], expected[:1], scale[:1])[0] for k in range(20)]
