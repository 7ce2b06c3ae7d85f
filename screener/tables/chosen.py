"""Which columns a plan asks for, by name pattern."""

from collections.abc import Sequence
from dataclasses import dataclass
from fnmatch import fnmatchcase

from screener.errors import PlanError
from screener.records import Plan
from screener.tables.names import shortlist

NOT_ASKED = "not among the channels asked for"


@dataclass(frozen=True, slots=True)
class Choice:
    """The outcome of a plan's patterns over the columns of a table."""

    reasons: dict[int, str]
    """Column position: why the plan leaves it aside."""
    by_name: frozenset[int]
    """Columns asked for by a name, or a pattern with some of it; no guess about their meaning sets them aside."""
    remarks: tuple[str, ...]


def choose(names: Sequence[str], plan: Plan) -> Choice:
    """What the plan leaves aside; a name written out in full counts as a pattern that matches itself.

    Raises:
        PlanError: no column matches `plan.channels`, or `plan.skip` leaves none.
    """
    if not (plan.channels or plan.skip or plan.expect):
        return Choice({}, frozenset(), ())
    reasons = {at: NOT_ASKED for at, name in enumerate(names) if plan.channels and not _matched(name, plan.channels)}
    if len(reasons) == len(names):
        raise PlanError(f"No column matches {_quoted(plan.channels)}. The table has {shortlist(names, 5)}.")
    for at, name in enumerate(names):
        if at not in reasons and (pattern := _matched(name, plan.skip)):
            reasons[at] = f"left aside as asked (skip {pattern!r})"
    if len(reasons) == len(names):
        raise PlanError(f"Skipping {_quoted(plan.skip)} leaves no column. The table has {shortlist(names, 5)}.")
    named = [pattern for pattern in plan.channels if pattern.strip("*?")]
    by_name = frozenset(at for at, name in enumerate(names) if _matched(name, named))
    expected = (text.rpartition("=")[0] for text in plan.expect)
    asked = (*plan.channels, *plan.skip, *expected)
    unmatched = [pattern for pattern in asked if not any(_fits(name, pattern) for name in names)]
    return Choice(reasons, by_name, tuple(f"No column matches {pattern!r}." for pattern in unmatched))


def _matched(name: str, patterns: Sequence[str]) -> str:
    return next((pattern for pattern in patterns if _fits(name, pattern)), "")


def _fits(name: str, pattern: str) -> bool:
    """Whether a pattern means this name; `pressure [bar]` means itself, though brackets are pattern signs."""
    return name == pattern or fnmatchcase(name, pattern)


def _quoted(patterns: Sequence[str]) -> str:
    return " or ".join(map(repr, patterns))
