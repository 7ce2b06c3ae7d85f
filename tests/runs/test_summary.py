"""A run in one sentence."""

from pathlib import Path

import pytest

from screener.records import BlockScores, Control, Plan
from screener.runs import Summary, summarise
from tests.runs.synthetic import block, facts, stored_run


def judged(*, flagged: int, clear: int, unscored: int) -> BlockScores:
    scores = block(0, flagged + clear + unscored)
    scores.critical_r[:, 0] = 0.5
    scores.r[:, 0] = [0.4] * flagged + [0.6] * clear + [float("nan")] * unscored
    scores.p[:, 0] = [0.001] * flagged + [0.7] * (clear + unscored)
    return scores


def summary_of(path: Path, scores: BlockScores, plan: Plan, channels: int) -> Summary:
    with stored_run(path, scores, channels=channels, plan=plan) as run:
        return summarise(run.results(), run.facts, run.plan)


def test_the_sentence_sets_the_flags_beside_those_that_chance_brings(tmp_path: Path) -> None:
    summary = summary_of(tmp_path / "a.run", judged(flagged=61, clear=170, unscored=9), Plan(), 240)
    assert summary.sentence() == "240 channels: 61 flagged, about 12 expected by chance; 9 not scored"
    assert (summary.channels, summary.scored, summary.flagged, summary.not_scored) == (240, 231, 61, 9)
    assert summary.expected_by_chance == pytest.approx(231 * 0.05)
    assert summary.set_aside == 2


def test_under_control_of_the_false_discovery_rate_it_says_how_many_flags_are_false(tmp_path: Path) -> None:
    plan = Plan(control=Control.FDR)
    summary = summary_of(tmp_path / "a.run", judged(flagged=60, clear=40, unscored=0), plan, 100)
    assert summary.sentence() == "100 channels: 60 flagged, about 3 of them expected to be false at most"


def test_while_a_run_goes_on_the_sentence_says_how_far_it_is(tmp_path: Path) -> None:
    summary = summary_of(tmp_path / "a.run", judged(flagged=3, clear=16, unscored=1), Plan(), 240)
    assert summary.sentence() == "20 of 240 channels: 3 flagged, about 0.95 expected by chance; 1 not scored"


def test_one_channel_is_a_channel(tmp_path: Path) -> None:
    summary = summary_of(tmp_path / "a.run", judged(flagged=0, clear=1, unscored=0), Plan(alpha=0.01), 1)
    assert summary.sentence() == "1 channel: 0 flagged, about 0.01 expected by chance"


def test_nothing_tried_yet_is_said_too(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", channels=5) as run:
        summary = summarise(run.results(), facts(5), Plan())
    assert summary.sentence() == "0 of 5 channels: 0 flagged, about 0 expected by chance"


@pytest.mark.parametrize(
    ("expected", "shown"), [(9.94, "9.9"), (9.96, "10"), (11.55, "12"), (1000.0, "1,000"), (3.0, "3")]
)
def test_an_expected_number_is_shown_to_two_digits(expected: float, shown: str) -> None:
    assert f"about {shown} expected" in Summary(1, 1, 0, 0, expected, 0).sentence()
