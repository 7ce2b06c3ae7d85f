"""Spreadsheets: one sheet as a text table, so that names, units, words and totals are found as in any other."""

import zipfile
from pathlib import Path
from typing import TYPE_CHECKING

import polars as pl

from screener.errors import PlanError, TableError
from screener.tables.extras import installed
from screener.tables.names import shortlist, visible
from screener.tables.packed import refuse_bomb

if TYPE_CHECKING:
    from fastexcel import ExcelReader


def sheet_as_text(path: Path, part: str) -> tuple[bytes, str, tuple[str, ...]]:
    """The sheet with its cells separated by tabs, its name, and remarks.

    Numbers are exact: what the library shows of them is rounded, so they are taken as numbers.
    Raises:
        TableError: the file cannot be read, or has no sheet with rows.
        PlanError: it has no sheet of the name asked for.
    """
    with installed("xlsx", path):
        import fastexcel
    if zipfile.is_zipfile(path):
        with zipfile.ZipFile(path) as archive:
            refuse_bomb(path, path.stat().st_size, sum(member.file_size for member in archive.infolist()))
    try:
        book = fastexcel.read_excel(path)
        names = [name for name in book.sheet_names if not part or name == part]
        if not names:
            shown = shortlist([visible(name) for name in book.sheet_names], 8)
            raise PlanError(f"Couldn't find sheet {part!r} in {str(path)!r}: it has {shown}.")
        for name in names:
            content = _cells(book, name)
            if content.height > 1:
                others = [visible(other) for other in book.sheet_names if other != name]
                also = f"the file also has {shortlist(others, 5)} (--part reads another)"
                said = (f"Sheet {visible(name)!r} was read; {also}.",) if others and not part else ()
                return _tabbed(content), name, said
    except fastexcel.FastExcelError as error:
        first = visible(str(error).splitlines()[0])[:200]
        raise TableError(f"Couldn't read {str(path)!r} as a spreadsheet: {first}. Save it again.") from error
    raise TableError(f"Couldn't read {str(path)!r}: no sheet has rows of readings.")


def _cells(book: "ExcelReader", name: str) -> pl.DataFrame:
    """Every cell as text."""
    shown, exact = (book.load_sheet(name, header_row=None, dtypes=kind).to_polars() for kind in ("string", "float"))
    if not shown.width:
        return pl.DataFrame()
    columns = [
        pl.select(
            pl.when(text.cast(pl.Float64, strict=False).is_not_null() & number.is_not_null())
            .then(number.cast(pl.String))
            .otherwise(text)
            .alias(f"c{at}")
        ).to_series()
        for at, (text, number) in enumerate(zip(shown.get_columns(), exact.get_columns(), strict=True))
    ]
    return pl.DataFrame(columns)


def _tabbed(cells: pl.DataFrame) -> bytes:
    bare = cells.with_columns(pl.all().str.replace_all("\t", " ", literal=True))
    return bare.write_csv(include_header=False, separator="\t").encode()
