"""Null distributions that no table holds, simulated in a channel's own condition and shared by channels in like ones.

Samples come in batches, each seeded by its condition and number, so that a channel's verdict depends on its own r alone
and not on what was simulated before. A channel that as many samples as `SETTLED` reach is settled (sequential Monte
Carlo; Besag & Clifford 1991, Biometrika 78); one that stays below goes on to the last batch.
"""

from collections.abc import Callable, Iterator
from dataclasses import replace
from hashlib import sha256
from itertools import pairwise
from threading import Lock
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from screener.errors import Cancelled
from screener.stats.families.family import FloatArray
from screener.stats.null.condition import Condition, log_gaps
from screener.stats.null.table import NullRows
from screener.stats.null.tail import fitted_tail, tail_excess

IntArray = NDArray[np.int64]

FIRST_BATCH = 250
FEWEST_SAMPLES, MOST_SAMPLES = 2000, 32_000
BELOW_ALPHA = 50
"""Samples that are to fall below the critical value at least."""
SETTLED = 30
"""Samples with an r as small as the channel's, from which it is not flagged."""
TAIL_READINGS = 50
"""Samples that a tail is fitted to at least, if that is no more than a quarter."""
MOST_WITHOUT_R = 0.9
"""Share of samples without an r from which a condition is not simulated."""
COUNTED = 20
"""A quantile is taken from the samples themselves when at least this many lie beyond it."""
LARGEST_SIMULATED = 20_000
"""Channels of more readings are held against samples of so many: what is left of 1 - r after rounding goes down with n
as the table says, and hardly changes its form."""
RATIOS = {"n": 1.15, "censored": 1.07, "step": 1.2, "coarse step": 1.05, "tau": 1.2, "scale": 1.15}
"""Ratio of the neighbouring values at which conditions are simulated."""
COARSE = 0.15
"""Steps from which rounding adds to the scatter of r, not to its mean alone."""
SIMULATED_PROBABILITIES: FloatArray = np.concatenate(
    [[0.001, 0.002, 0.005, 0.01, 0.015, 0.02, 0.03, 0.04, 0.05, 0.07], np.arange(0.1, 0.96, 0.05), [0.98, 0.99]]
)


class Kept(Protocol):
    """Where simulated samples outlast a run."""

    def load(self, key: str) -> FloatArray | None:
        """ln(1 - r) of the samples kept under a key."""

    def save(self, key: str, samples: FloatArray) -> None:
        """Keep them."""


class SimulatedNulls:
    """Samples of r by condition; safe to be used by several threads."""

    def __init__(self, kept: Kept | None = None, cancelled: Callable[[], bool] = lambda: False) -> None:
        self._kept, self._cancelled = kept, cancelled
        self._samples: dict[Condition, FloatArray] = {}
        self._locks: dict[Condition, Lock] = {}
        self._guard = Lock()

    def prefix(self, condition: Condition, count: int) -> FloatArray:
        """ln(1 - r) of the first so many samples, a batch's end: always the same ones. Raises: Cancelled."""
        with self._guard:
            lock = self._locks.setdefault(condition, Lock())
        with lock:
            held = self._samples.get(condition)
            if held is None:
                held = self._loaded(condition)
            if held.size < count:
                held = self._longer(condition, held, count)
                if self._kept is not None:
                    self._kept.save(key_of(condition), held)
            self._samples[condition] = held
        return held[:count]

    def _loaded(self, condition: Condition) -> FloatArray:
        kept = None if self._kept is None else self._kept.load(key_of(condition))
        whole = kept is not None and kept.size in batch_ends(kept.size)
        return kept if kept is not None and whole else np.empty(0)

    def _longer(self, condition: Condition, held: FloatArray, count: int) -> FloatArray:
        parts = [held]
        for number, (start, end) in enumerate(pairwise([0, *batch_ends(count)])):
            if end > held.size:
                if self._cancelled():
                    raise Cancelled
                parts.append(log_gaps(condition, end - start, _random(condition, number)))
        return np.concatenate(parts)


def key_of(condition: Condition) -> str:
    """All that the samples of a condition depend on, in words."""
    return repr(condition)


def _random(condition: Condition, batch: int) -> np.random.Generator:
    digest = sha256(key_of(condition).encode()).digest()
    return np.random.default_rng([batch, *np.frombuffer(digest, dtype=np.uint32)])


def batch_ends(most: int) -> Iterator[int]:
    """Numbers of samples after which verdicts are looked at, up to `most` or just above it."""
    end = FIRST_BATCH
    while end < most:
        yield end
        end *= 2
    yield end


def most_samples(alpha: float) -> int:
    """Samples simulated for a channel that stays below, a batch's end."""
    wanted = min(MOST_SAMPLES, max(FEWEST_SAMPLES, int(np.ceil(BELOW_ALPHA / alpha))))
    return list(batch_ends(wanted))[-1]


def near(condition: Condition) -> Condition:
    """The condition that is simulated in place of one like it."""
    n = min(_nearest(condition.n, "n", whole=True), LARGEST_SIMULATED)
    low, high = (_censored(count / condition.n, n) for count in (condition.low, condition.high))
    return replace(
        condition,
        n=int(n),
        low=low,
        high=high,
        step=_nearest(condition.step, "coarse step" if condition.step >= COARSE else "step") if condition.step else 0.0,
        tau=_nearest(condition.tau, "tau"),
    )


def nearest_scale(scale: float) -> float:
    """The scale on the log axis that is simulated in place of one like it."""
    return _nearest(scale, "scale")


def _nearest(value: float, kind: str, *, whole: bool = False) -> float:
    """The nearest power of a ratio; whole numbers under 20 stand for themselves."""
    if whole and value < 20:
        return value
    ratio = RATIOS[kind]
    power = float(ratio ** round(np.log(value) / np.log(ratio)))
    return round(power) if whole else round(power, 6)


def _censored(share: float, n: float) -> int:
    return max(1, round(_nearest(share, "censored") * n)) if share else 0


def judged(nulls: SimulatedNulls, condition: Condition, log_gap: FloatArray, alpha: float) -> tuple[NullRows, IntArray]:
    """The null in a condition for channels of those ln(1 - r), float64[K], and which of its rows is each one's.

    A row comes from as many samples as it took to settle the channel.
    """
    taken = np.zeros(log_gap.size, dtype=np.int64)
    open_ = np.arange(log_gap.size)
    for end in batch_ends(most_samples(alpha)):
        samples = nulls.prefix(condition, end)
        taken[open_] = end
        reached = np.count_nonzero(samples >= log_gap[open_, None], axis=1)
        open_ = open_[reached < SETTLED]
        if open_.size == 0:
            break
    sizes, row = np.unique(taken, return_inverse=True)
    return _rows([nulls.prefix(condition, int(size)) for size in sizes]), row.astype(np.int64)


def level(nulls: SimulatedNulls, condition: Condition, alpha: float) -> float:
    """ln(1 - critical r) in a condition."""
    rows = _rows([nulls.prefix(condition, most_samples(alpha))])
    return float(np.log(1.0 - rows.critical(alpha)[0]))


def _rows(samples: list[FloatArray]) -> NullRows:
    """Null distributions from lists of samples."""
    rows = [_quantiles(part[~np.isnan(part)]) for part in samples]
    gap, shape, scale, floor = (np.array(column) for column in zip(*rows, strict=True))
    return NullRows(SIMULATED_PROBABILITIES, gap, shape, scale, floor)


def sufficient(nulls: SimulatedNulls, condition: Condition) -> bool:
    """Whether enough samples in a condition have an r at all.

    Those rounded to a few values have none, nor those rounded to below 0 and held against a family on the log axis.
    """
    return bool(np.mean(np.isnan(nulls.prefix(condition, FIRST_BATCH))) < MOST_WITHOUT_R)


def _quantiles(samples: FloatArray) -> tuple[FloatArray, float, float, float]:
    """Quantiles of ln(1 - r), the tail beyond the smallest of them, and the smallest p that was counted."""
    decreasing = np.sort(samples)[::-1]
    m = decreasing.size
    quantiles = np.interp(SIMULATED_PROBABILITIES, np.arange(1, m + 1) / (m + 1), decreasing)
    beyond = min(max(TAIL_READINGS, m // 100), m // 4)
    threshold, share = decreasing[beyond], beyond / m
    xi, sigma = fitted_tail(decreasing[:beyond] - threshold, max(0.1, -float(threshold)))
    counted = COUNTED / m <= SIMULATED_PROBABILITIES
    low = ~counted & (share > SIMULATED_PROBABILITIES)
    quantiles[low] = threshold + tail_excess(SIMULATED_PROBABILITIES[low] / share, xi, sigma)
    quantiles = np.minimum.accumulate(quantiles)
    return quantiles, xi, sigma + xi * float(quantiles[0] - threshold), float(SIMULATED_PROBABILITIES[counted][0])
