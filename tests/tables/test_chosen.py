"""Name patterns of a plan."""

import pytest

from screener.errors import PlanError
from screener.records import Plan
from screener.tables.chosen import NOT_ASKED, choose

NAMES = ["p1 [bar]", "p2 [bar]", "T1", "t1", "id"]


def left(plan: Plan) -> list[str]:
    reasons = choose(NAMES, plan).reasons
    return [name for at, name in enumerate(NAMES) if at not in reasons]


def test_without_patterns_every_column_is_asked_for() -> None:
    assert left(Plan()) == NAMES


def test_patterns_are_case_sensitive_globs() -> None:
    assert left(Plan(channels=("p*", "T?"))) == ["p1 [bar]", "p2 [bar]", "T1"]


def test_a_name_with_brackets_matches_itself() -> None:
    assert left(Plan(channels=("p1 [bar]",))) == ["p1 [bar]"]


def test_skipping_goes_over_asking_and_says_which_pattern() -> None:
    choice = choose(NAMES, Plan(channels=("p*",), skip=("p2*",)))
    assert choice.reasons[1] == "left aside as asked (skip 'p2*')"
    assert choice.reasons[2] == NOT_ASKED
    assert 0 not in choice.reasons


def test_no_match_at_all_names_the_pattern_and_some_columns() -> None:
    with pytest.raises(
        PlanError, match=r"No column matches 'x\*'\. The table has p1 \[bar\], p2 \[bar\], T1, t1, id\."
    ):
        choose(NAMES, Plan(channels=("x*",)))


def test_skipping_every_column_is_refused() -> None:
    with pytest.raises(PlanError, match=r"Skipping '\*' leaves no column"):
        choose(NAMES, Plan(skip=("*",)))


def test_one_of_several_patterns_without_a_match_is_remarked() -> None:
    assert choose(NAMES, Plan(channels=("p*", "q*"))).remarks == ("No column matches 'q*'.",)
