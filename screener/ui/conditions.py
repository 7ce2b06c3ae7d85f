"""What a person writes to see some of the rows: a word, or a condition in SQL over the export columns."""

from __future__ import annotations

import re

import polars as pl
from polars.exceptions import PolarsError

from screener.errors import ScreenerError
from screener.records import RESULT_COLUMNS
from screener.ui.shown import shown

WORD = re.compile(r"[\w][\w .-]*")
SEARCHED = ("verdict", "reason", "departure", "conditions", "decision", "note", "closest", "family", "advice", "unit")
"""Where a bare word is looked for."""
EXAMPLE = "Write a word such as 'leave out', or a condition such as: r < 0.98 AND n > 100"


class ConditionError(ScreenerError):
    """A condition that cannot be used."""

    exit_code = 2


def matching(results: pl.DataFrame, condition: str) -> pl.Series:
    """Whether each row fulfils the condition; an unknown value fulfils none.

    Raises: ConditionError with what is wrong and how to write it.
    """
    first, *more = condition.split() or [""]
    if WORD.fullmatch(condition) and not (more and first.lower() in RESULT_COLUMNS):
        return _with_word(results, condition)
    try:
        # An expression only: whole queries, which could read files, are refused.
        found = results.select(RESULT_COLUMNS.keys()).select(pl.sql_expr(condition).alias("found"))["found"]
    except pl.exceptions.ColumnNotFoundError as error:
        columns = ", ".join(RESULT_COLUMNS)
        raise ConditionError(
            f"There is no column {_named(error)!r} (a text stands in single quotes). Columns: {columns}"
        ) from error
    except (PolarsError, ValueError, TypeError) as error:
        raise ConditionError(f"Couldn't use that condition: {_told(error)}. {EXAMPLE}") from error
    if found.dtype != pl.Boolean or found.len() not in {1, results.height}:
        raise ConditionError(f"That is no condition: it is neither true nor false for a row. {EXAMPLE}")
    return (
        found.fill_null(value=False)
        if found.len() == results.height
        else pl.repeat(found[0], results.height, eager=True)
    )


def _with_word(results: pl.DataFrame, word: str) -> pl.Series:
    """Rows that hold the word in any of their texts, capitals ignored."""
    wanted = word.strip().lower()
    texts = (pl.col(name).str.to_lowercase() for name in SEARCHED)
    found = results.select(
        found=pl.any_horizontal(text.str.contains(wanted, literal=True).fill_null(value=False) for text in texts)
    )["found"]
    if not found.any():
        raise ConditionError(f"No channel has {shown(wanted)!r} in its {', '.join(SEARCHED[:6])}. {EXAMPLE}")
    return found


def _named(error: PolarsError) -> str:
    """The column that an error is about."""
    quoted = re.search(r"\"(.*?)\"", str(error))
    return shown(quoted.group(1)) if quoted else ""


def _told(error: Exception) -> str:
    """The first line of what the library says, without a full stop."""
    lines = str(error).splitlines() or [type(error).__name__]
    return shown(lines[0]).removesuffix(" as Expr").rstrip(". ")
