"""Several files of one layout as one table, their rows one below the other."""

from collections.abc import Sequence
from dataclasses import replace

import polars as pl

from screener.errors import TableError
from screener.records import SourceFile
from screener.tables.names import visible
from screener.tables.raw import RawTable


def join(tables: Sequence[RawTable], files: Sequence[str]) -> tuple[RawTable, tuple[SourceFile, ...]]:
    """The tables as one, and which rows came from which file; no files for a single table.

    Raises:
        TableError: the columns of one table are not those of the first.
    """
    first = tables[0]
    if len(tables) == 1:
        return first, ()
    for table, file in zip(tables[1:], files[1:], strict=True):
        _check(first, table, files[0], file)
    columns = first.frame.collect_schema().names()
    frames = [
        table.frame.rename(dict(zip(table.frame.collect_schema().names(), columns, strict=True))) for table in tables
    ]
    held = all(table.held for table in tables)
    rows = [table.rows for table in tables]
    made = tuple(
        SourceFile(visible(file), sum(rows[:at]), count)
        for at, (file, count) in enumerate(zip(files, rows, strict=True))
    )
    remarks = [
        f"{visible(file)}: {remark}" for table, file in zip(tables, files, strict=True) for remark in table.remarks
    ]
    whole = replace(
        first,
        frame=pl.concat(frames, how="vertical_relaxed"),
        format=f"{first.format}, {len(tables)} files",
        rows=sum(rows),
        held=held,
        loaded=held and all(table.loaded for table in tables),
        remarks=tuple(remarks),
        whole=None,
        starts=tuple(file.first_row for file in made),
    )
    return whole, made


def _check(first: RawTable, other: RawTable, first_file: str, file: str) -> None:
    for what, old, new in (("columns", first.names, other.names), ("units", first.units, other.units)):
        if new != old:
            longer = max(len(old), len(new))
            pairs = zip(_padded(old, longer), _padded(new, longer), strict=True)
            before, after = next((before, after) for before, after in pairs if before != after)
            raise TableError(
                f"Couldn't join {file!r} to {first_file!r}: its {what} differ, {visible(after) or 'none'!r} stands "
                f"where {visible(before) or 'none'!r} was. Name files of one layout."
            )
    if other.decimal_comma != first.decimal_comma:
        raise TableError(f"Couldn't join {file!r} to {first_file!r}: their decimal signs differ. Give --decimal.")


def _padded(names: Sequence[str], length: int) -> list[str]:
    return [*names, *[""] * (length - len(names))]
