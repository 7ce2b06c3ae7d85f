"""How a text table is laid out: its separator, its header and what its first rows hold."""

import csv
import re
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import TYPE_CHECKING

from screener.tables.cells import is_missing, is_number

if TYPE_CHECKING:
    from _csv import Reader

SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab"}
_SAMPLED_ROWS = 20
_SAMPLED_CELLS = 10_000
_FEWEST_ROWS = 4
_LONGEST_CELL = 1 << 30
"""A wide row is one long cell when it is tried with a separator it does not have."""
_DECIMAL_COMMA = re.compile(r"[+-]?\d*,\d+(?:[eE][+-]?\d+)?")
_DECIMAL_POINT = re.compile(r"[+-]?\d*\.\d+(?:[eE][+-]?\d+)?")


@dataclass(frozen=True, slots=True)
class Layout:
    """What must be known before a text table can be parsed."""

    separator: str
    names: tuple[str, ...]
    """The header's cells as written; empty names where the table has no header."""
    lines_before: int
    """Physical lines before the first row of readings."""
    decimal_comma: bool
    words: frozenset[int]
    """Columns in which a sampled cell is neither a number nor blank."""
    extra_cells: bool
    """Whether the sampled rows all have more cells than the header, and not only blank ones."""


def layout_of(lines: Sequence[str], *, prefer_tab: bool = False) -> Layout:
    """The layout guessed from the first lines of a table, which hold at least one that is not blank."""
    blank = next(number for number, line in enumerate(lines) if line.strip())
    kept = lines[blank:]
    separator = _separator(kept, prefer_tab=prefer_tab)
    reader = cell_rows(kept, separator)
    header = next(reader)
    headed = not _only_numbers(header)
    lines_before = blank + (reader.line_num if headed else 0)
    names = tuple(header) if headed else ("",) * len(header)
    rows = list(_sample(reader, len(header)))
    rows = rows if headed else [header, *rows]
    decimal_comma = separator != "," and _votes_for_comma(rows)
    words = frozenset(_word_columns(rows, decimal_comma=decimal_comma))
    extra_cells = bool(rows) and all(any(cell.strip() for cell in row[len(names) :]) for row in rows)
    return Layout(separator, names, lines_before, decimal_comma, words, extra_cells)


def cell_rows(lines: Iterable[str], separator: str) -> "Reader":
    """The cells of each row, a quoted cell over several lines being one; `line_num` counts the lines read so far."""
    csv.field_size_limit(_LONGEST_CELL)
    return csv.reader((line.replace("\r", " ") + "\n" for line in lines), delimiter=separator)


def _separator(lines: Sequence[str], *, prefer_tab: bool) -> str:
    """The separator by which most sampled rows have as many cells as the header; more cells win a tie."""
    if prefer_tab and "\t" in lines[0]:
        return "\t"
    return max(SEPARATORS, key=lambda separator: _agreement(lines, separator))


def _agreement(lines: Sequence[str], separator: str) -> tuple[bool, float, int]:
    reader = cell_rows(lines, separator)
    header = len(next(reader))
    widths = [len(row) for row in _sample(reader, header)] if header > 1 else []
    agreeing = sum(width == header for width in widths)
    return header > 1, agreeing / max(1, len(widths)), header


def _sample(reader: Iterator[list[str]], width: int) -> Iterator[list[str]]:
    """The first rows that are not blank: fewer of a wide table."""
    count = max(_FEWEST_ROWS, min(_SAMPLED_ROWS, _SAMPLED_CELLS // max(1, width)))
    return islice((row for row in reader if row), count)


def _only_numbers(header: Sequence[str]) -> bool:
    cells = [cell.strip() for cell in header if cell.strip()]
    return bool(cells) and all(is_number(cell) and not is_missing(cell) for cell in cells)


def _votes_for_comma(rows: Sequence[Sequence[str]]) -> bool:
    cells = [cell.strip() for row in rows for cell in row]
    commas = sum(_DECIMAL_COMMA.fullmatch(cell) is not None for cell in cells)
    return commas > sum(_DECIMAL_POINT.fullmatch(cell) is not None for cell in cells)


def _word_columns(rows: Sequence[Sequence[str]], *, decimal_comma: bool) -> Iterator[int]:
    for row in rows:
        for at, cell in enumerate(row):
            plain = cell.replace(",", ".") if decimal_comma else cell
            if plain.strip() and (plain != plain.strip() or not is_number(plain)):
                yield at
