"""The rows of the first lines of a text table: how they are cut into cells, and by which separator."""

import csv
import re
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from screener.tables.cells import is_blank, is_missing, is_number

if TYPE_CHECKING:
    from _csv import Reader

SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "bar", " ": "blanks"}
_LONGEST_CELL = 1 << 30
"""A wide row is one long cell when it is tried with a separator it does not have."""
_LONGEST_ROW = 12
"""Lines; a quotation mark that opens and is not closed sooner is no quotation mark."""
_FEWEST_REGULAR = 2
_JUDGED_ROWS = 40
_WIDTHS_TRIED = 3
_JUDGED_CELLS = 60
_BLANKS_COUNT = 0.6
"""Blanks separate cells only where nothing else does: they also stand within names and before units."""
_TIME = r"\d{1,2}:\d{2}(?::\d{2}(?:[.,:]\d+)?)?\s*(?:[AaPp]\.?[Mm]\.?|[A-Z]{1,4}|[+-]\d{2}:?\d{2})?"
_VALUE = re.compile(
    r"""[<>≤≥]?=?\s*[+−－＋-]?(?:\d[\d.,．，'’\u00a0\u2007\u202f]*(?:[ ]\d{3})*(?:[.,]\d+)?|[.,]\d+)
    (?:[eEdD][+-]?\d+)?\s*(?:%|[°µΩ]?[A-Za-z]{1,3})?
    |\d{1,4}[-/.]\d{1,2}[-/.]\d{1,4}(?:[ T]+TIME)?|TIME""".replace("TIME", _TIME),
    re.VERBOSE,
)


@dataclass(frozen=True, slots=True)
class HeadRow:
    """One row of the first lines."""

    cells: list[str]
    first: int
    """The line on which it begins, from 1."""
    last: int
    """The line on which it ends, from 1."""


def cell_rows(lines: Iterable[str], separator: str) -> "Reader":
    """The cells of each row, a quoted cell over several lines being one; `line_num` counts the lines read so far."""
    csv.field_size_limit(_LONGEST_CELL)
    ended = (line.replace("\r", " ") + "\n" for line in lines)
    if separator == " ":
        return csv.reader((" ".join(line.split()) + "\n" for line in ended), delimiter=" ")
    return csv.reader(ended, delimiter=separator)


def head_rows(lines: Sequence[str], separator: str) -> Iterator[HeadRow]:
    """The rows that are not blank; a line whose quotation mark is never closed is a row of its own."""
    at = 0
    while at < len(lines):
        if is_blank(lines[at]):
            at += 1
            continue
        cells, used = _row(lines[at:], separator)
        yield HeadRow(cells, at + 1, at + used)
        at += used


def _row(lines: Sequence[str], separator: str) -> tuple[list[str], int]:
    reader = cell_rows(lines[: _LONGEST_ROW + 1], separator)
    cells = next(reader, [])
    used = reader.line_num
    if used > _LONGEST_ROW or (separator not in lines[0] and used == len(lines) > 1 and len(cells) == 1):
        return lines[0].split(separator), 1
    return cells, used


def separator_of(lines: Sequence[str], *, prefer_tab: bool) -> str:
    """The separator that makes most lines rows of equal length whose cells are values; more cells win a tie."""
    first = next(line for line in lines if not is_blank(line))
    if prefer_tab and "\t" in first:
        return "\t"
    if _one_column_of_decimal_commas(lines):
        return ";"
    tried = [separator for separator in SEPARATORS if any(separator in line.strip() for line in lines)]
    agreements = {separator: _agreement(lines, separator) for separator in tried}
    best = max(tried, key=agreements.__getitem__, default="")
    if best and agreements[best][0] > 0:
        return best
    return next((separator for separator in SEPARATORS if separator not in tried), ",")


def _agreement(lines: Sequence[str], separator: str) -> tuple[float, int]:
    """How well the separator fits, and the cells of a row; of the commonest widths the one whose cells are values."""
    rows = [row.cells for row in head_rows(lines, separator)]
    widths = Counter(len(row) for row in rows if len(row) > 1)
    ranked = sorted(widths, key=lambda candidate: (widths[candidate] * candidate**0.5, candidate), reverse=True)
    return max((_agreement_at(width, rows, separator) for width in ranked[:_WIDTHS_TRIED]), default=(0.0, 0))


def _agreement_at(width: int, rows: Sequence[list[str]], separator: str) -> tuple[float, int]:
    """How well rows of this width agree, 0 to 1, and the width."""
    regular = [row for row in rows if len(row) == width]
    if 2 * len(regular) < len(rows) and (separator == " " or len(regular) < _FEWEST_REGULAR):
        return 0.0, 0
    later = regular[len(regular) // 2 :][-_JUDGED_ROWS:]
    judged = [cell.strip() for row in later for cell in row[:_JUDGED_CELLS]]
    values = sum(is_missing(cell) or is_number(cell) or _VALUE.fullmatch(cell) is not None for cell in judged)
    share = values / len(judged)
    agreement = len(regular) / len(rows) * (share * share + 0.05)
    return round(agreement * (_BLANKS_COUNT if separator == " " else 1.0), 6), width


def _one_column_of_decimal_commas(lines: Sequence[str]) -> bool:
    """Whether every line after the name is one number with a decimal comma, which a comma would cut in two."""
    kept = [line.strip() for line in lines if not is_blank(line)]
    numbers = [line for line in kept if re.fullmatch(r"[+-]?\d+,\d+(?:[eE][+-]?\d+)?", line)]
    return len(kept) > 1 and len(numbers) == len(kept) - 1 and "," not in kept[0] and kept[0] not in numbers
