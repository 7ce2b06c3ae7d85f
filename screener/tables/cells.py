"""What a text cell means: a number, a missing reading, or a word."""

import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass

import polars as pl

from screener.tables.names import shortlist, visible

MISSING = (
    *("NA", "N/A", "n/a", "na", "n.a.", "#N/A", "#NA", "nan", "NaN", "NAN", "null", "NULL", "Null", "none", "None"),
    *("-", "--", "---", "----", "–", "—", ".", "?", "#NV"),
)
"""The cell texts, beside blank ones, that always mean a missing reading."""
LOGGER_WORDS = frozenset({
    *("OVER", "UNDER", "OVERFLOW", "UNDERFLOW", "OVERRANGE", "UNDERRANGE", "OVERLOAD", "OVLD", "OVL", "OL", "O.L"),
    *("+OVER", "-OVER", "+OL", "-OL", "OR", "UR", "HIGH", "LOW", "SAT", "SATURATED", "TRIP", "OPEN", "SHORT"),
    *("BAD", "TIMEOUT", "ERR", "ERROR", "FAIL", "FAILED", "FAULT", "INVALID", "OFF", "OFFLINE", "NC", "N.C."),
    *("ND", "N.D.", "BDL", "LOD", "LOQ", "<LOD", "<LOQ", "NO_DATA", "NODATA", "MISSING", "INF"),
})  # fmt: skip
"""Words that instruments write in place of a reading: a row that holds one is no header."""
BLANKS = " \t\r\n\x0b\x0c\0\u00a0\u2007\u202f\ufeff"
"""What may stand around a number without meaning anything."""
_WORDS_SHOWN = 10
_BATCH_COLUMNS = 64
_BATCH_CELLS = 8_000_000
_GLANCED_ROWS = 256
_DATE = r"^\d{1,4}[-/.]\d{1,2}[-/.]\d{1,4}([ T]+\d{1,2}:\d{2}.*)?$|^\d{1,2}:\d{2}(:\d{2}.*)?$"
_DATED = re.compile(_DATE)
_TRUTHS = ("true", "false", "yes", "no", "on", "off")


@dataclass(frozen=True, slots=True)
class TextColumn:
    """What the cells of one text column are, counted."""

    cells: int
    """Cells that are neither blank nor a missing reading."""
    numbers: int
    dates: int
    truths: int

    def reason(self) -> str:
        """Why the column is not a channel; empty when at least half of its cells are numbers."""
        if not self.cells:
            return "empty: no readings"
        if 2 * self.numbers >= self.cells:
            return ""
        if 10 * self.dates >= 9 * self.cells:
            return "dates or times, not a measurement"
        if self.truths == self.cells:
            return "true or false, not a measurement"
        words = self.cells - self.numbers
        share = 100 if words == self.cells else min(99, round(100 * words / self.cells))
        return f"text: {share} % of its cells are not numbers"


def is_number(cell: str) -> bool:
    """Whether polars reads the whole cell as one number."""
    if "_" in cell or not cell.isascii():
        return False
    try:
        float(cell)
    except ValueError:
        return False
    return True


def is_date(cell: str) -> bool:
    """Whether the cell looks like a date or a time."""
    return _DATED.match(cell.strip()) is not None


def is_blank(line: str) -> bool:
    """Whether a line holds nothing that shows."""
    return not line.replace("\0", "").replace("\ufeff", "").strip()


def is_missing(cell: str) -> bool:
    """Whether the cell always means a missing reading."""
    return not cell or cell in MISSING


def meaningful(column: str, missing: Sequence[str]) -> pl.Expr:
    """The stripped cells of a text column, null where they are blank or mean a missing reading."""
    cell = pl.col(column).cast(pl.String).str.strip_chars(BLANKS)
    return pl.when(cell.is_in(["", *MISSING, *missing])).then(None).otherwise(cell).alias(column)


def number(column: str, missing: Sequence[str], *, decimal_comma: bool) -> pl.Expr:
    """The cells of a text column as numbers, null where they are none."""
    cell = meaningful(column, missing)
    plain = cell.str.replace(",", ".", literal=True) if decimal_comma else cell
    return plain.cast(pl.Float64, strict=False).alias(column)


def count_cells(
    frame: pl.LazyFrame, numbers: pl.LazyFrame, columns: Sequence[str], missing: Sequence[str]
) -> dict[str, TextColumn]:
    """The counts of each text column; `numbers` holds the same columns as numbers."""
    cells, found = pl.collect_all(
        [frame.select(meaningful(column, missing).count() for column in columns), numbers.select(pl.all().count())]
    )
    mixed = [column for column in columns if 2 * found[column].item() < cells[column].item()]
    dates = _count(frame, [meaningful(c, missing).str.contains(_DATE).sum() for c in mixed])
    truths = _count(frame, [meaningful(c, missing).str.to_lowercase().is_in(list(_TRUTHS)).sum() for c in mixed])
    return {
        column: TextColumn(cells[column].item(), found[column].item(), dates.get(column, 0), truths.get(column, 0))
        for column in columns
    }


def refused_cells(
    frame: pl.LazyFrame, columns: Sequence[str], missing: Sequence[str], *, decimal_comma: bool, rows: int
) -> pl.DataFrame:
    """The cells that mean something but are no plain number, counted: `column`, `cell`, `cells`."""
    counted = [pl.DataFrame(schema={"column": pl.String, "cell": pl.String, "cells": pl.UInt32})]
    width = max(1, min(_BATCH_COLUMNS, _BATCH_CELLS // rows))
    for start in range(0, len(columns), width):
        batch = columns[start : start + width]
        words = frame.select(_words(column, missing, decimal_comma=decimal_comma) for column in batch).collect()
        found = words.unpivot(variable_name="column", value_name="cell").drop_nulls()
        counted.append(found.group_by("column", "cell", maintain_order=True).len("cells"))
    return pl.concat(counted)


def may_hold_numbers(
    frame: pl.LazyFrame, columns: Sequence[str], missing: Sequence[str], fits: Callable[[pl.Expr], pl.Expr]
) -> list[str]:
    """The columns in which half of the first cells that mean something may be numbers, as `fits` says."""
    if not columns:
        return []
    first = frame.select(meaningful(column, missing) for column in columns).head(_GLANCED_ROWS)
    fitting = fits(pl.all())
    shares = pl.collect_all([first.select(fitting.sum()), first.select(pl.all().count())])
    return [column for column in columns if 2 * shares[0][column].item() >= max(1, shares[1][column].item())]


def _words(column: str, missing: Sequence[str], *, decimal_comma: bool) -> pl.Expr:
    """The cells of a text column that mean something but are no number, the others null."""
    refused = number(column, missing, decimal_comma=decimal_comma).is_null()
    return pl.when(refused).then(meaningful(column, missing)).alias(column)


def word_remarks(words: pl.DataFrame, shown: Mapping[str, str]) -> Iterator[str]:
    """One sentence a word, the commonest first; `shown` gives the name of each column."""
    counted: dict[str, dict[str, int]] = {}
    for column, word, cells in words.select("column", "cell", "cells").rows():
        counted.setdefault(word, {})[column] = cells
    ranked = sorted(counted.items(), key=lambda item: (-sum(item[1].values()), item[0]))
    for word, places in ranked[:_WORDS_SHOWN]:
        where = shortlist([shown[column] for column in places])
        yield f"{_cells(sum(places.values()))} {visible(word)[:40]!r} in {where}: read as missing."
    if rest := ranked[_WORDS_SHOWN:]:
        cells = sum(sum(places.values()) for _, places in rest)
        yield f"{_cells(cells)} {len(rest):,} other words among numbers: read as missing."


def _cells(count: int) -> str:
    return "1 cell holds" if count == 1 else f"{count:,} cells hold"


def _count(frame: pl.LazyFrame, counts: Sequence[pl.Expr]) -> dict[str, int]:
    return frame.select(counts).collect().row(0, named=True) if counts else {}
