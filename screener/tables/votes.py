"""How numbers are written, by a vote of sampled cells: which sign stands before the decimals."""

import re
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass

_POWER = r"(?:[eE][+-]?\d+)?"
_POINT = re.compile(rf"[+-]?\d*\.\d+{_POWER}")
_COMMA = re.compile(rf"[+-]?\d*,\d+{_POWER}")
_ONE_GROUP = re.compile(r"[+-]?[1-9]\d{0,2}[.,]\d{3}")
_GROUPED_BY_COMMA = re.compile(r"[+-]?\d{1,3}(?:,\d{3})+\.\d+|[+-]?\d{1,3}(?:,\d{3}){2,}")
_GROUPED_BY_POINT = re.compile(r"[+-]?\d{1,3}(?:\.\d{3})+,\d+|[+-]?\d{1,3}(?:\.\d{3}){2,}")
_GROUPED_BY_BLANK = re.compile(r"[+-]?\d{1,3}(?:[ '’\u00a0\u202f]\d{3})+([.,])\d+")


@dataclass(frozen=True, slots=True)
class DecimalVote:
    """The outcome of a vote on the decimal sign."""

    comma: bool
    doubt: str = ""
    """A cell that could be read either way, where nothing but such cells voted."""


def decimal_vote(cells: Iterable[str], *, separator: str) -> DecimalVote:
    """Whether decimals follow a comma; a cell such as `1,234` may be either and votes only when no other does.

    Where nothing else votes, a comma within the cells of a comma-separated table groups thousands.
    """
    votes: Counter[str] = Counter()
    doubts: dict[str, str] = {}
    for cell in cells:
        sure = _sure(cell)
        votes[sure] += 1
        if not sure and _ONE_GROUP.fullmatch(cell):
            doubts.setdefault("," if "," in cell else ".", cell)
    if votes[","] != votes["."]:
        return DecimalVote(votes[","] > votes["."])
    if "," not in doubts or "." in doubts or votes[","]:
        # Where cells are separated by semicolons, a point often groups thousands.
        point = "" if separator != ";" or votes["."] else doubts.get(".", "")
        return DecimalVote(comma=False, doubt=doubts.get(",", point))
    return DecimalVote(separator != ",", doubts[","])


def _sure(cell: str) -> str:
    """The decimal sign of a cell that leaves no choice, else nothing."""
    if ("," not in cell and "." not in cell) or _ONE_GROUP.fullmatch(cell):
        return ""
    if blank := _GROUPED_BY_BLANK.fullmatch(cell):
        return blank[1]
    if _GROUPED_BY_COMMA.fullmatch(cell) or _POINT.fullmatch(cell):
        return "."
    return "," if _GROUPED_BY_POINT.fullmatch(cell) or _COMMA.fullmatch(cell) else ""
