"""Run files filled by hand, for whoever shows what is in one."""

from pathlib import Path

import numpy as np

from screener.records import BlockScores, Channel, Plan, SetAside, Span, TableFacts
from screener.runs import RunFile
from screener.stats.points import kept_ranks

FAMILY_NAMES = ("normal", "logistic", "double exponential", "Cauchy", "uniform", "exponential", "lognormal", "Weibull")
READINGS = 120
CRITICAL = 0.99
NOT_SCORED = 7
"""Every channel of this number and its multiples, but the first, has no score."""


def made_facts(channels: int, *, names: dict[int, str] | None = None) -> TableFacts:
    """The facts of a table that was never on a disk; `names` replaces some of the channel names."""
    given = names or {}
    return TableFacts(
        path=Path("bench_run.csv"),
        format="CSV",
        rows=READINGS,
        channels=tuple(Channel(k, given.get(k, f"flow_{k}")) for k in range(channels)),
        set_aside=(SetAside("operator", "text, not a measurement"),),
        fingerprint="made by hand",
        remarks=("Decimal commas were read.",),
    )


def made_scores(first: int, stop: int) -> BlockScores:
    """Scores in which r rises and falls with the channel's number, so that any order can be foretold."""
    numbers = np.arange(first, stop)
    scored = (numbers % NOT_SCORED != 0) | (numbers == 0)
    shape = (stop - first, len(FAMILY_NAMES))
    distance = 10.0 ** -(1.0 + (numbers * 37 % 101) / 25.0)
    r = np.where(scored, 1 - distance, np.nan)[:, None] - np.zeros(shape)
    readings = [np.sort(np.random.default_rng(k).normal(10.0, 2.0, READINGS)) for k in numbers]
    return BlockScores(
        span=Span(first, stop),
        families=FAMILY_NAMES,
        n=np.where(scored, READINGS, 2),
        missing=np.where(scored, 0, READINGS - 2),
        reasons=tuple("" if good else "fewer than 3 readings" for good in scored),
        r=r,
        critical_r=np.where(np.isnan(r), np.nan, CRITICAL),
        plain_critical_r=np.where(np.isnan(r), np.nan, CRITICAL),
        p=np.where(np.isnan(r), np.nan, np.clip(0.05 * (0.01 / distance[:, None]) ** 3, 1e-12, 0.99)),
        extrapolated=np.zeros(shape, dtype=np.bool_),
        location=np.where(np.isnan(r), np.nan, 10.0),
        scale=np.where(np.isnan(r), np.nan, 2.0),
        notes=tuple(("",) * len(FAMILY_NAMES) for _ in numbers),
        shapes=np.full((*shape, 2), np.nan),
        held=np.full(stop - first, FAMILY_NAMES.index("normal")),
        closest=np.full(stop - first, -1),
        points=tuple(
            sample[kept_ranks(READINGS)] if good else np.empty(0) for sample, good in zip(readings, scored, strict=True)
        ),
    )


def made_run(path: Path, channels: int, *, names: dict[int, str] | None = None, block: int = 1000) -> RunFile:
    """A finished run file with that many channels, still open."""
    run = RunFile.create(path, made_facts(channels, names=names), Plan(), version="0", null_version="0")
    for first in range(0, channels, block):
        run.store(made_scores(first, min(first + block, channels)))
    run.finish()
    return run
