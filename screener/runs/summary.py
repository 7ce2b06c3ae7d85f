"""A run in one sentence."""

from dataclasses import dataclass

import polars as pl

from screener.records import Control, Plan, TableFacts, Verdict
from screener.stats.many import expected_flags


@dataclass(frozen=True, slots=True)
class Summary:
    """The counts of a run, which may still be going on."""

    channels: int
    """Of the table, whether tried yet or not."""
    scored: int
    flagged: int
    not_scored: int
    expected_by_chance: float
    """Flags expected although the channel is from its family; under control of q, the most that it holds on average."""
    set_aside: int
    control: Control = Control.EACH

    def sentence(self) -> str:
        """Such as "240 channels: 61 flagged, about 12 expected by chance; 9 not scored"."""
        tried = self.scored + self.not_scored
        counted = f"{self.channels:,} channel{'' if self.channels == 1 else 's'}"
        progress = f"{tried:,} of {counted}" if tried < self.channels else counted
        chance = f"about {about(self.expected_by_chance)} expected by chance"
        if self.control is Control.FDR:
            chance = f"about {about(self.expected_by_chance)} of them expected to be false at most"
        unscored = f"; {self.not_scored:,} not scored" if self.not_scored else ""
        return f"{progress}: {self.flagged:,} flagged, {chance}{unscored}"


def summarise(results: pl.DataFrame, facts: TableFacts, plan: Plan) -> Summary:
    """The counts behind a frame of `RunFile.results()`, of the whole run."""
    counts = dict(results.group_by("verdict").len().iter_rows())
    flagged, clear = counts.get(Verdict.FLAGGED, 0), counts.get(Verdict.CLEAR, 0)
    return Summary(
        channels=len(facts.channels),
        scored=flagged + clear,
        flagged=flagged,
        not_scored=counts.get(Verdict.NOT_SCORED, 0),
        expected_by_chance=expected_flags(flagged if plan.control is Control.FDR else flagged + clear, plan.alpha),
        set_aside=len(facts.set_aside),
        control=plan.control,
    )


def about(expected: float) -> str:
    """A number of flags to two digits, whole from ten on."""
    return f"{expected:,.0f}" if expected >= 9.95 else f"{expected:.2g}"
