"""Rows of a text table that are no readings, or have too few or too many cells, found in the lines of the text."""

from collections import deque
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import islice
from pathlib import Path

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.tables.cells import BLANKS, is_missing
from screener.tables.head import cell_rows
from screener.tables.header import COMMENTS, reads_as_number
from screener.tables.layout import Layout
from screener.tables.lines import each_line, measured_lines

_FOOTER_ROWS = 20
_LAST_ROWS = 1_000
_BEGIN = 200
"""Characters kept of the beginning of a row."""
_SUMMARY = (
    r"(?i)^(mean|average|avg\.?|total|sum|min(imum)?|max(imum)?|std\.?( ?dev\.?)?|stdev|median|count|rms|range|sigma"
    r"|mittel(wert)?|summe|anzahl|standardabweichung|streuung|stabw|spannweite"
    r"|moyenne|somme|écart[ -]type|médiane|étendue|media|promedio|suma|somma|mediana|desviación (típica|estándar)"
    r"|deviazione standard|média|soma|desvio padrão)\s*[.:=]?$"
)
"""What stands before figures that sum up a column, in languages that instruments write."""


@dataclass(frozen=True, slots=True)
class RowWidths:
    """How many cells each row of a text table has, and which rows are no readings."""

    cells: NDArray[np.int64]
    """[rows] cells of each row; 0 for a blank line."""
    ends: NDArray[np.int64]
    """[rows] the line of the file, from 1, on which each row ends."""
    expected: int
    comments: NDArray[np.bool_]
    footers: NDArray[np.bool_]

    def left_out(self) -> NDArray[np.bool_]:
        """[rows] true for what is no row; a blank within a table of one column is a missing reading and stays."""
        kept = self.cells > 0
        if self.expected == 1:
            kept[: len(np.trim_zeros(self.cells, "b"))] = True
        return ~kept | self.comments | self.footers

    def remarks(self) -> Iterator[str]:
        """One sentence for each kind of irregular row."""
        rows = ~self.comments & ~self.footers
        short = (self.cells > 0) & (self.cells < self.expected) & rows
        long = (self.cells > self.expected) & rows
        if short.any():
            yield f"{self._rows(short)} fewer cells than the header: the absent cells are missing readings."
        if long.any():
            yield f"{self._rows(long)} more cells than the header: the extra cells were ignored."
        within = len(np.trim_zeros(self.cells, "b"))
        blank = int((self.left_out() & rows)[:within].sum())
        for count, what in (
            (blank, "blank"),
            (int(self.comments.sum()), "comment"),
            (int(self.footers.sum()), "footer"),
        ):
            if count:
                yield f"{count:,} {what} line{'s were' if count > 1 else ' was'} left out."

    def _rows(self, rows: NDArray[np.bool_]) -> str:
        count, first = int(rows.sum()), int(self.ends[rows.argmax()])
        return f"1 row (line {first:,}) has" if count == 1 else f"{count:,} rows (first: line {first:,}) have"


def row_widths(source: Path | bytes, layout: Layout, rows: int) -> RowWidths:
    """The width of every row, from the physical lines of the whole text, read a piece at a time."""
    separator, expected = layout.separator, len(layout.names)
    found = _Rows(expected, layout.lines_before, every=layout.drop_comments)
    for lines in measured_lines(source, separator):
        found.add(lines.cells, lines.text)
    if found.total != rows:
        # Rows over several lines, by quotation marks: the slower way.
        found = _Rows(expected, layout.lines_before, every=layout.drop_comments, by_row=True)
        reader = cell_rows(islice(each_line(source), layout.lines_before, None), separator)
        for row in reader:
            found.add_row(row, reader.line_num, separator)
    return found.widths(layout)


@dataclass(slots=True)
class _Rows:
    """What is known of the rows so far; texts are kept of those with too few cells only, for short."""

    expected: int
    lines_before: int
    every: bool
    """Whether the beginning of every row is kept."""
    by_row: bool = False
    cells: list[NDArray[np.int64]] = field(default_factory=list)
    ends: list[int] = field(default_factory=list)
    """The line of the file on which each row ends, where rows are no lines."""
    begins: dict[int, str] = field(default_factory=dict)
    last: deque[tuple[int, str]] = field(default_factory=lambda: deque(maxlen=_LAST_ROWS))
    """The last rows with too few cells, whole."""
    total: int = 0
    _skipped: int = 0

    def add(self, cells: NDArray[np.int64], text: Callable[[int], str]) -> None:
        """Add lines; those before the first row are left out."""
        skip = min(self.lines_before - self._skipped, len(cells))
        self._skipped += skip
        rows = cells[skip:]
        kept = np.arange(len(rows)) if self.every else np.flatnonzero((rows > 0) & (rows < self.expected))
        for at in kept.tolist():
            self._keep(self.total + at, text(at + skip), short=bool(rows[at] < self.expected))
        self.cells.append(rows)
        self.total += len(rows)

    def add_row(self, row: Sequence[str], line: int, separator: str) -> None:
        """Add one row that ends on a line after those before."""
        if self.every or 0 < len(row) < self.expected:
            self._keep(self.total, separator.join(row), short=len(row) < self.expected)
        self.cells.append(np.array([len(row)], dtype=np.int64))
        self.ends.append(line)
        self.total += 1

    def _keep(self, at: int, text: str, *, short: bool) -> None:
        self.begins[at] = text.lstrip(BLANKS)[:_BEGIN]
        if short:
            self.last.append((at, text))

    def widths(self, layout: Layout) -> RowWidths:
        """What they are."""
        cells = np.concatenate([np.empty(0, dtype=np.int64), *self.cells])
        ends = np.array(self.ends, dtype=np.int64) if self.by_row else np.arange(1, self.total + 1)
        comments = _comments(self.begins, cells, layout)
        footers = _footers(self.last, cells, layout)
        return RowWidths(cells, ends + self.lines_before, self.expected, comments, footers)


def sums_at_end(frame: pl.LazyFrame, rows: int) -> dict[int, str]:
    """The last rows whose first cell says that they sum up the rows above, with that cell; none where others say so."""
    first = pl.nth(0).alias("cell")
    sums = pl.col("cell").str.strip_chars(BLANKS).str.contains(_SUMMARY)
    found = frame.select(first).with_row_index("row").filter(sums).collect(engine="streaming")
    at_end = found["row"].min()
    if at_end is None or int(str(at_end)) < rows - _FOOTER_ROWS or len(found) == rows:
        return {}
    return dict(found.rows())


def _comments(begins: Mapping[int, str], cells: NDArray[np.int64], layout: Layout) -> NDArray[np.bool_]:
    """Rows that begin as a comment; where the plan does not say how comments begin, only those cut short."""
    sign = layout.header.comment
    found = np.zeros(len(cells), dtype=np.bool_)
    for at, begin in begins.items():
        first = begin.split(layout.separator, 1)[0].strip()
        if layout.drop_comments:
            found[at] = begin.startswith(sign)
        else:
            found[at] = first.startswith((sign,) if sign else COMMENTS) and not is_missing(first)
    return found


def _footers(last: Iterable[tuple[int, str]], cells: NDArray[np.int64], layout: Layout) -> NDArray[np.bool_]:
    """The last rows, when they are short and hold no number; `last` has the texts of short rows."""
    found = np.zeros(len(cells), dtype=np.bool_)
    texts = dict(last)
    at = len(cells) - 1
    while at > 0 and len(layout.names) > 1 and (at in texts or not cells[at]):
        words = [text.strip(BLANKS + '"') for text in texts.get(at, "").split(layout.separator)]
        if any(reads_as_number(word) or (is_missing(word) and word) for word in words):
            break
        found[at] = cells[at] > 0
        at -= 1
    return found
