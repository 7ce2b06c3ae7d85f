"""Confirming a verdict: one channel held against samples in its own autocorrelation, clipping and rounding."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from screener.stats.censoring import censoring_of
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.found import Found
from screener.stats.null.confirm import OwnProcess, own_log_gaps, own_process
from screener.stats.null.nulls import Nulls
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.scoring import score

BATCH = 100
"""Samples between two reports of progress."""


@dataclass(frozen=True, slots=True)
class Confirmation:
    """What so many samples of a channel's own process say of its r."""

    family: str
    r: float
    samples: int
    """Samples with an r."""
    as_small: int
    """Samples whose r is as small as the channel's, or smaller."""
    p: float
    """(as_small + 1) / (samples + 1): never 0 (Davison & Hinkley 1997, Bootstrap Methods, sec. 4.2; from memory)."""
    critical_r: float
    """The r that a share alpha of the samples falls below."""


@dataclass(frozen=True, slots=True)
class Confirming:
    """A channel that is ready to be confirmed."""

    process: OwnProcess
    r: float

    def results(self, samples: int, alpha: float, seed: int) -> Iterator[Confirmation]:
        """What is known after each batch; the last is the result. The same seed gives the same samples."""
        rng = np.random.default_rng([seed, samples])
        gaps: list[FloatArray] = []
        for first in range(0, samples, BATCH):
            gaps.append(own_log_gaps(self.process, min(BATCH, samples - first), rng))
            yield self._so_far(np.concatenate(gaps), alpha)

    def _so_far(self, gaps: FloatArray, alpha: float) -> Confirmation:
        r = -np.expm1(gaps[~np.isnan(gaps)])
        as_small = int(np.count_nonzero(r <= self.r))
        return Confirmation(
            family=self.process.condition.family,
            r=self.r,
            samples=r.size,
            as_small=as_small,
            p=(as_small + 1) / (r.size + 1),
            critical_r=float(np.quantile(r, alpha, method="weibull")) if r.size else np.nan,
        )


def confirming(
    readings: FloatArray,
    families: Sequence[Family],
    held: int,
    nulls: Nulls,
    alpha: float,
    *,
    simulated: SimulatedNulls | None = None,
    below: int = 0,
    above: int = 0,
) -> Confirming | str:
    """A channel, float64[rows] in row order, ready to be confirmed; or why it is not scored at all.

    `held` is the place in families of the one that it is held against; below and above count its readings that stand
    at a detection limit.
    """
    scoring = score(
        readings[None, :],
        families,
        nulls,
        alpha,
        held=np.array([held]),
        simulated=simulated,
        below=np.array([below]),
        above=np.array([above]),
    )
    r = float(scoring.fits.r[0, held])
    if scoring.reasons[0]:
        return scoring.reasons[0]
    if np.isnan(r):
        return f"readings outside the support of the {families[held].name} family"
    censoring = censoring_of(scoring.conditions, np.sort(readings)[None, :])
    found = Found(families, scoring.fits, scoring.conditions, censoring, nulls.rule)
    return Confirming(own_process(readings, found.condition(0, held), float(scoring.conditions.step_in_sd[0])), r)
