"""Rows with fewer or more cells than the header, and blank lines, counted from the lines of the text."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.tables.layout import Layout, cell_rows

_QUOTED = r'"[^"]*"'


@dataclass(frozen=True, slots=True)
class RowWidths:
    """How many cells each row of a text table has."""

    cells: NDArray[np.int64]
    """[rows] cells of each row; 0 for a blank line."""
    ends: NDArray[np.int64]
    """[rows] the line of the file, from 1, on which each row ends."""
    expected: int

    def left_out(self) -> NDArray[np.bool_]:
        """[rows] true for a blank line; a blank within a table of one column is a missing reading and stays."""
        kept = self.cells > 0
        if self.expected == 1:
            kept[: len(np.trim_zeros(self.cells, "b"))] = True
        return ~kept

    def remarks(self) -> Iterator[str]:
        """One sentence for each kind of irregular row."""
        short = (self.cells > 0) & (self.cells < self.expected)
        long = self.cells > self.expected
        if short.any():
            yield f"{self._rows(short)} fewer cells than the header: the absent cells are missing readings."
        if long.any():
            yield f"{self._rows(long)} more cells than the header: the extra cells were ignored."
        within = len(np.trim_zeros(self.cells, "b"))
        if blank := int(self.left_out()[:within].sum()):
            yield f"{blank:,} blank line{'s were' if blank > 1 else ' was'} left out."

    def _rows(self, rows: NDArray[np.bool_]) -> str:
        count, first = int(rows.sum()), int(self.ends[rows.argmax()])
        return f"1 row (line {first:,}) has" if count == 1 else f"{count:,} rows (first: line {first:,}) have"


def row_widths(lines: pl.Series, layout: Layout, rows: int) -> RowWidths:
    """The width of every row, from the physical lines of the whole text."""
    body = lines.slice(layout.lines_before)
    if len(body) == rows:
        bare = body.str.replace_all(_QUOTED, "") if body.str.contains('"', literal=True).any() else body
        blank = body.str.strip_chars() == ""
        cells = bare.str.count_matches(layout.separator, literal=True).to_numpy().astype(np.int64) + 1
        cells[blank.to_numpy()] = 0
        ends = np.arange(1, rows + 1)
    else:
        reader = cell_rows(body, layout.separator)
        counted = np.array([(len(row), reader.line_num) for row in reader], dtype=np.int64).reshape(-1, 2)
        cells, ends = counted[:, 0], counted[:, 1]
    return RowWidths(cells, ends + layout.lines_before, len(layout.names))
