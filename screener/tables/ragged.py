"""Rows of a text table that are no readings, or have too few or too many cells, found in the lines of the text."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.tables.cells import BLANKS, is_missing, is_number
from screener.tables.head import cell_rows
from screener.tables.header import COMMENTS
from screener.tables.layout import Layout

_QUOTED = r'"[^"]*"'
_FOOTER_ROWS = 20
_SUMMARY = (
    r"(?i)^(mean|average|avg\.?|total|sum|min(imum)?|max(imum)?|std\.?( ?dev\.?)?|stdev|median|count|rms|range)\s*:?$"
)


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


def row_widths(lines: pl.Series, layout: Layout, rows: int) -> RowWidths:
    """The width of every row, from the physical lines of the whole text."""
    body = lines.slice(layout.lines_before)
    if len(body) == rows:
        bare = body.str.replace_all(_QUOTED, "") if body.str.contains('"', literal=True).any() else body
        blank = body.str.strip_chars(BLANKS) == ""
        cells = bare.str.count_matches(layout.separator, literal=True).to_numpy().astype(np.int64) + 1
        cells[blank.to_numpy()] = 0
        ends = np.arange(1, rows + 1)
        starts = body
    else:
        reader = cell_rows(body, layout.separator)
        counted = [(len(row), reader.line_num, layout.separator.join(row)) for row in reader]
        cells = np.array([width for width, _, _ in counted], dtype=np.int64)
        ends = np.array([end for _, end, _ in counted], dtype=np.int64)
        starts = pl.Series([text for _, _, text in counted], dtype=pl.String)
    comments = _comments(starts, cells, layout)
    return RowWidths(cells, ends + layout.lines_before, len(layout.names), comments, _footers(starts, cells, layout))


def last_rows_sum_up(first_cells: pl.Series) -> NDArray[np.bool_]:
    """[rows] true for last rows whose first cell says that they sum up the rows above, where no other row's does."""
    sums = first_cells.str.strip_chars(BLANKS).str.contains(_SUMMARY).fill_null(value=False).to_numpy()
    tail = np.zeros(len(sums), dtype=np.bool_)
    tail[-_FOOTER_ROWS:] = sums[-_FOOTER_ROWS:]
    return tail if tail.sum() == sums.sum() < len(sums) else np.zeros(len(sums), dtype=np.bool_)


def _comments(starts: pl.Series, cells: NDArray[np.int64], layout: Layout) -> NDArray[np.bool_]:
    """Rows that begin as a comment; where the plan does not say how comments begin, only those cut short."""
    sign = layout.header.comment
    begin = starts.str.strip_chars_start(BLANKS)
    if layout.drop_comments:
        return begin.str.starts_with(sign).to_numpy()
    short = (cells > 0) & (cells < len(layout.names))
    found = np.zeros(len(cells), dtype=np.bool_)
    for at in np.flatnonzero(short):
        first = begin[int(at)].split(layout.separator, 1)[0].strip()
        found[at] = first.startswith((sign,) if sign else COMMENTS) and not is_missing(first)
    return found


def _footers(starts: pl.Series, cells: NDArray[np.int64], layout: Layout) -> NDArray[np.bool_]:
    """The last rows, when they are short and hold no number."""
    found = np.zeros(len(cells), dtype=np.bool_)
    at = len(cells) - 1
    while at > 0 and len(layout.names) > 1 and cells[at] < len(layout.names):
        texts = [text.strip(BLANKS + '"') for text in starts[at].split(layout.separator)]
        if any(is_number(text) or (is_missing(text) and text) for text in texts):
            break
        found[at] = cells[at] > 0
        at -= 1
    return found
