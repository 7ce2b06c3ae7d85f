"""Where the names, the units and the first readings of a text table stand."""

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from screener.tables.cells import LOGGER_WORDS, is_date, is_missing, is_number
from screener.tables.head import HeadRow
from screener.tables.units import KNOWN_UNITS

COMMENTS = ("#", "%", "//", "!")
"""How lines begin that tell about the table; the last of them may hold its names."""
_JUDGED_CELLS = 200
_LONGEST_UNIT = 16
_SHORT_UNIT = 3
_FEW_COLUMNS = 2
"""Lines that tell about a table often have two cells, as many as the narrowest table has."""
_DASHES = ("-", "–", "—", "--")
_BARE_NUMBER = re.compile(r"[<>≤≥]?=?\s*[+-]?(?:\d[\d.,' ]*|[.,]\d+)(?:[eEdD][+-]?\d+)?\s*(?:%|[°µΩ]?[A-Za-z]{1,3})?")


@dataclass(frozen=True, slots=True)
class Header:
    """The lines above the readings; lines count from 1, and 0 stands for none."""

    names: tuple[str, ...]
    """Empty names where the table has no header."""
    units: tuple[str, ...]
    header_line: int
    units_line: int
    lines_before: int
    """Physical lines before the first row of readings."""
    preamble: int
    """Lines before the header, or before the readings where there is none, that are not blank."""
    comment: str
    """How the comment lines begin; empty where there are none."""
    left_out: int = 0
    """Rows between the names and the readings that are neither."""


def header_of(rows: Sequence[HeadRow], *, header_line: int, units_line: int, comment: str) -> Header:
    """The header of a table by its first rows, of which there is at least one; lines that are -1 are found."""
    prefix = comment or _comment_prefix(rows)
    table = [row for row in rows if not (prefix and row.cells[0].lstrip().startswith(prefix))] or list(rows)
    width = _width(table)
    start = _first_reading(table, width)
    names_at = _names_above(table, start, width)
    if header_line == 0 or (header_line < 0 and names_at is None):
        if header_line == 0:
            start = next(at for at, row in enumerate(table) if len(row.cells) == width)
        commented = None if header_line == 0 else _commented_names(rows, table[start], prefix)
        return _built(rows, table, start, commented, None, prefix, width)
    named = _row_of_line(rows, header_line) if header_line > 0 else table[names_at or 0]
    below = [row for row in table if row.first > named.last]
    units = _units(below, named, start_line=table[start].first, asked=units_line)
    found = [at for at, row in enumerate(table) if row.first > (units or named).last]
    extra = [at for at in found if table[at].first >= table[start].first or _is_reading(table[at])]
    first = (extra or [len(table)])[0] if header_line < 0 or units_line < 0 else (found or [len(table)])[0]
    return _built(rows, table, first, named, units, prefix, width)


def _built(
    rows: Sequence[HeadRow],
    table: Sequence[HeadRow],
    first: int,
    named: HeadRow | None,
    units: HeadRow | None,
    prefix: str,
    width: int,
) -> Header:
    lines_before = table[first].first - 1 if first < len(table) else (units or named or rows[-1]).last
    above = named.first if named else lines_before + 1
    width = len(table[first].cells) if first < len(table) and not named else width
    return Header(
        names=_without_prefix(named, prefix) if named else ("",) * width,
        units=tuple(cell.strip() for cell in units.cells) if units else (),
        header_line=named.first if named else 0,
        units_line=units.first if units else 0,
        lines_before=lines_before,
        preamble=sum(row.last < above for row in rows),
        comment=prefix,
        left_out=sum(row.first > (units or named or rows[-1]).last and row.last <= lines_before for row in table),
    )


def _comment_prefix(rows: Sequence[HeadRow]) -> str:
    """How the lines above the readings begin when the very first does so."""
    first = rows[0].cells[0].lstrip()
    return next((sign for sign in COMMENTS if first.startswith(sign) and not is_missing(first)), "")


def _width(table: Sequence[HeadRow]) -> int:
    """The usual number of cells in a row that holds a number; of equally usual ones that with more numbers."""
    widths: Counter[int] = Counter()
    numbers: Counter[int] = Counter()
    for row in table:
        if found := sum(map(reads_as_number, row.cells[:_JUDGED_CELLS])):
            widths[len(row.cells)] += 1
            numbers[len(row.cells)] += found
    if not widths:
        return len(table[0].cells)
    return max(widths, key=lambda width: (widths[width] * (width > 1), widths[width], numbers[width], width))


def _numeric_columns(table: Sequence[HeadRow], width: int) -> list[int]:
    """Sampled columns in which half of the cells of the later rows are numbers."""
    later = [row.cells for row in table if len(row.cells) == width]
    later = later[len(later) // 2 :]
    columns = range(0, width, max(1, width // _JUDGED_CELLS))
    filled = {at: [row[at] for row in later if not is_missing(row[at].strip())] for at in columns}
    return [at for at, cells in filled.items() if cells and 2 * sum(map(reads_as_number, cells)) >= len(cells)]


def _first_reading(table: Sequence[HeadRow], width: int) -> int:
    """Where the longest run of rows begins that hold numbers where the table has numbers.

    Rows of names end a run; a run below the same names as the longest goes with it.
    """
    numeric = _numeric_columns(table, width)
    starts: list[int] = []
    lengths: list[int] = []
    previous = False
    for at, row in enumerate(table):
        if _holds_numbers(row, numeric):
            if not previous and (not starts or any(_is_naming(other, numeric) for other in table[starts[-1] + 1 : at])):
                starts.append(at)
                lengths.append(0)
            lengths[-1] += 1
            previous = True
        else:
            previous = False
    if not starts:
        return min(1, len(table) - 1)
    longest = lengths.index(max(lengths))
    names = [table[start - 1].cells if start else [] for start in starts]
    return starts[next(at for at, name in enumerate(names) if name == names[longest])]


def _holds_numbers(row: HeadRow, numeric: Sequence[int]) -> bool:
    """Whether more than half of the number columns hold a number here, or nothing."""
    cells = [row.cells[at].strip() for at in numeric if at < len(row.cells)]
    filled = [cell for cell in cells if not is_missing(cell)]
    numbers = sum(map(reads_as_number, filled))
    return numbers > 0 and 2 * (numbers + len(cells) - len(filled)) > len(numeric)


def _is_naming(row: HeadRow, numeric: Sequence[int]) -> bool:
    """Whether a row has words, all of them, where the table has numbers."""
    cells = [row.cells[at].strip() for at in numeric if at < len(row.cells)]
    return len(cells) == len(numeric) and all(
        cell and not reads_as_number(cell) and cell.upper() not in LOGGER_WORDS for cell in cells
    )


def _names_above(table: Sequence[HeadRow], start: int, width: int) -> int | None:
    """The row of the names, in the block of rows as wide as the table right above the readings, or the first reading.

    None when there is no such row.
    """
    block = _block_above(table, start, {width}) or _block_above(table, start, {width - 1, width + 1})
    if block:
        bare = [at for at in block if not _is_reading(table[at])] or block[:1]
        if width <= _FEW_COLUMNS and len(bare) > 1:
            return bare[-2] if _all_known_units(table[bare[-1]]) else bare[-1]
        return next((at for at in bare if _is_filled(table[at])), bare[0])
    if start + 1 >= len(table) and start > 0:
        return start - 1
    return start if not _only_readings(table, start) else None


def _block_above(table: Sequence[HeadRow], start: int, widths: set[int]) -> list[int]:
    """The rows of so many cells, one a word, that stand line by line above the readings."""
    at = start
    while at > 0 and len(table[at - 1].cells) in widths and _may_head(table[at - 1]):
        if at < start and table[at - 1].last + 1 < table[at].first:
            break
        at -= 1
    return list(range(at, start))


def _may_head(row: HeadRow) -> bool:
    return any(cell.strip() and not reads_as_number(cell) for cell in row.cells)


def _is_filled(row: HeadRow) -> bool:
    """Whether half of the cells hold something; a title padded with empty cells to the width of the table does not."""
    return 2 * sum(bool(cell.strip()) for cell in row.cells) >= len(row.cells)


def _all_known_units(row: HeadRow) -> bool:
    """Whether every cell is in brackets or short enough for a unit."""
    cells = [cell.strip() for cell in row.cells]
    return all(len(cell) <= _SHORT_UNIT or cell[0] + cell[-1] in {"[]", "()", "{}"} for cell in cells)


def _only_readings(table: Sequence[HeadRow], start: int) -> bool:
    """Whether a first row that holds numbers is readings, not names such as wavelengths beside a word in the corner."""
    row = [cell.strip() for cell in table[start].cells]
    words = [(at, cell) for at, cell in enumerate(row) if cell and not is_missing(cell) and not reads_as_number(cell)]
    if not words:
        return any(row)
    later = [other.cells for other in table[start + 1 :]]
    if len(words) == len(row) or not later:
        return False
    if all(_like_those_below(cell, [cells[at].strip() for cells in later if at < len(cells)]) for at, cell in words):
        numbers = [float(cell) for cell in row if is_number(cell)]
        return any(is_date(cell) for _, cell in words) or len(numbers) < 2 or sorted(set(numbers)) != numbers
    return False


def _like_those_below(cell: str, below: Sequence[str]) -> bool:
    """Whether the cell looks like one of its column: a date, a word that comes again, or of the same pattern."""
    return cell in below or any(_pattern(cell) == _pattern(other) for other in below[:8])


def _pattern(cell: str) -> str:
    return re.sub(r"[A-Za-z]+", "a", re.sub(r"\d+", "9", cell))


def _is_reading(row: HeadRow) -> bool:
    """Whether a row between the names and the first numbers holds one, or what a logger writes in place of readings."""
    cells = [cell.strip() for cell in row.cells[:_JUDGED_CELLS]]
    return any((is_missing(cell) and cell) or cell.upper() in LOGGER_WORDS or reads_as_number(cell) for cell in cells)


def _units(below: Sequence[HeadRow], named: HeadRow, *, start_line: int, asked: int) -> HeadRow | None:
    if asked == 0:
        return None
    if asked > 0:
        return _row_of_line(below, asked) if below else None
    row = below[0] if below else None
    if row is None or row.first >= start_line or (_is_reading(row) and not _are_units_and_dashes(row)):
        return None
    return row if _may_be_units(row, len(named.cells)) else None


def _are_units_and_dashes(row: HeadRow) -> bool:
    """Whether all cells are well-known units but for dashes, which stand for no unit here and not for no reading."""
    cells = {cell.strip().strip("[](){}") for cell in row.cells} - {"", *_DASHES}
    return bool(cells) and cells <= KNOWN_UNITS


def _may_be_units(row: HeadRow, width: int) -> bool:
    cells = [cell.strip() for cell in row.cells]
    short = all(len(cell) <= _LONGEST_UNIT for cell in cells)
    return short and len(cells) >= width - 1 and any(cells) and not any(map(reads_as_number, cells))


def _commented_names(rows: Sequence[HeadRow], first: HeadRow, prefix: str) -> HeadRow | None:
    """The last comment above the readings when it has a word for every column."""
    above = [row for row in rows if row.last < first.first]
    if not prefix or not above or not above[-1].cells[0].lstrip().startswith(prefix):
        return None
    words = _without_prefix(above[-1], prefix)
    named = len(words) == len(first.cells) and not any(map(reads_as_number, words))
    return HeadRow(list(words), above[-1].first, above[-1].last) if named else None


def _without_prefix(row: HeadRow, prefix: str) -> tuple[str, ...]:
    """The cells without the comment sign, which may be a cell of its own where blanks separate."""
    first = row.cells[0].lstrip()
    if not prefix or not first.startswith(prefix):
        return tuple(row.cells)
    bare = first.removeprefix(prefix).strip()
    return (bare, *row.cells[1:]) if bare or len(row.cells) == 1 else tuple(row.cells[1:])


def _row_of_line(rows: Sequence[HeadRow], line: int) -> HeadRow:
    """The row that holds this line, else the nearest below."""
    return next((row for row in rows if row.last >= line), rows[-1])


def reads_as_number(cell: str) -> bool:
    cell = cell.strip("\0 \t\r\n\u00a0")
    return (is_number(cell) and not is_missing(cell)) or _BARE_NUMBER.fullmatch(cell) is not None
