"""What holds of the conditions of any block, and how often a channel without any is given one."""

import dataclasses
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import array_shapes, arrays
from made_channels import Readings, autoregression, conditions, rounded, said

from screener.stats.conditions import WORDS, conditions_of, words_of

OFTEN = {"rounded": 0.0, "clipped": 0.005, "stuck": 0.002, "repeated values": 0.002, "serial": 0.01, "drifting": 0.002}


@pytest.mark.parametrize(("n", "channels"), [(50, 3000), (200, 3000), (1000, 1500), (10_000, 200)])
def test_independent_unrounded_channels_are_hardly_ever_given_a_word(n: int, channels: int) -> None:
    shares = said(conditions(np.random.default_rng(n).standard_normal((channels, n))))
    assert all(shares[word] <= often for word, often in OFTEN.items()), shares
    assert shares["gaps"] == 0.0


@pytest.mark.parametrize("n", [200, 1000])
@pytest.mark.parametrize("step", [0.1, 0.5, 1.0])
@pytest.mark.parametrize("coefficient", [0.0, 0.9])
def test_rounded_and_serial_channels_are_hardly_ever_called_clipped_or_stuck(
    n: int, step: float, coefficient: float
) -> None:
    rng = np.random.default_rng([n, round(10 * step)])
    readings = autoregression(rng, 1000, n, (coefficient,)) * np.sqrt(1.0 - coefficient**2)
    shares = said(conditions(rounded(rng, readings, step)))
    assert all(shares[word] <= OFTEN[word] for word in ("clipped", "stuck", "repeated values")), shares


def varied(rng: np.random.Generator, rows: int) -> Readings:
    """Ten channels, each in another condition."""
    readings = rng.standard_normal((10, rows))
    readings[1] = np.rint(readings[1] / 0.25) * 0.25
    readings[2] = np.minimum(readings[2], 1.0)
    readings[3, rows // 3 : rows // 2] = readings[3, rows // 3]
    readings[4] = np.cumsum(readings[4])
    readings[5, rng.random(rows) < 0.1] = np.nan
    readings[6, 2 : rows // 4] = np.inf
    readings[7] = np.clip(np.rint(readings[7] / 0.1) * 0.1, -1.0, 1.0)
    readings[8] = 3.0
    readings[9] = np.nan
    return readings


@pytest.mark.parametrize("rows", [3, 17, 50, 200, 1000, 5000])
def test_a_channel_alone_has_the_same_conditions_as_among_others(rows: int) -> None:
    rng = np.random.default_rng(rows)
    readings = np.concatenate([varied(rng, rows), rng.standard_normal((60, rows)), varied(rng, rows)])
    together = conditions(readings)
    for channel in (*range(12), 69, *range(70, 80)):
        alone = conditions(readings[channel : channel + 1].copy())
        for field in dataclasses.fields(together):
            one, many = getattr(alone, field.name)[0], getattr(together, field.name)[channel]
            assert np.array_equal(one, many, equal_nan=True), (channel, field.name)


def test_readings_are_left_as_they_are() -> None:
    readings = varied(np.random.default_rng(1), 500)
    before = readings.copy()
    conditions(readings)
    assert np.array_equal(readings, before, equal_nan=True)


@pytest.mark.parametrize(
    "change",
    [lambda x: 1e-300 * x, lambda x: 1e300 * x, lambda x: x + 1e6, lambda x: -x],
    ids=["tiny", "huge", "far", "turned"],
)
def test_scale_location_and_sign_change_no_word(change: Callable[[Readings], Readings]) -> None:
    readings = varied(np.random.default_rng(2), 1000)
    readings[1:8] = np.rint(readings[1:8] / 0.125) * 0.125
    before, after = conditions(readings), conditions(change(readings))
    for channel in range(8):
        assert words_of(before, channel) == words_of(after, channel)


@settings(max_examples=150, deadline=None)
@given(arrays(np.float64, array_shapes(min_dims=2, max_dims=2, max_side=70), elements=st.floats(allow_nan=True)))
def test_any_readings_have_conditions_that_make_sense(readings: Readings) -> None:
    found = conditions(readings)
    n = found.n
    assert np.array_equal(found.missing, readings.shape[1] - n)
    for count in (found.clipped_low, found.clipped_high, found.stuck, found.longest_run, found.repeated):
        assert np.all((count >= 0) & (count <= n))
    assert np.all((found.longest_gap >= 0) & (found.longest_gap <= found.missing))
    assert np.all((found.n_effective <= n) & (found.n_effective >= 0))
    assert np.all((np.abs(found.ar) < 1) & (found.tau_4 >= 1) & (found.step >= 0))
    for channel in range(n.size):
        assert isinstance(conditions_of(found, channel), str)


def test_words_come_with_their_numbers() -> None:
    rng = np.random.default_rng(3)
    readings = autoregression(rng, 4, 4000, (0.95,)) * np.sqrt(1.0 - 0.95**2)
    readings[0] = np.rint(readings[0] / 0.25) * 0.25
    readings[1] = np.minimum(readings[1], 1.0)
    readings[2, 100:300] = np.nan
    readings[3, 100:300] = readings[3, 100]
    found = conditions(readings)
    assert words_of(found, 0) == ("rounded", "serial")
    effective = f"serial, effective n {found.n_effective[0]:,.0f}"
    assert conditions_of(found, 0) == f"rounded to {found.step_in_sd[0]:.2g} sd; {effective}"
    at_top = 100.0 * np.mean(readings[1] == 1.0)
    assert conditions_of(found, 1).startswith(f"clipped, {at_top:.0f} % at the maximum; serial")
    assert conditions_of(found, 2).endswith("gaps, 200 readings missing in a row")
    assert "stuck, 200 readings in a row, 5 % in all" in conditions_of(found, 3)


def test_a_channel_without_conditions_has_no_words() -> None:
    found = conditions(np.random.default_rng(4).standard_normal((1, 300)))
    assert words_of(found, 0) == ()
    assert conditions_of(found, 0) == ""
    assert len(WORDS) == len(set(WORDS)) == 7
