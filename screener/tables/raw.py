"""A table as its format gives it, before anything is said about its columns."""

from dataclasses import dataclass

import polars as pl

from screener.tables.spool import Spool


@dataclass(frozen=True, slots=True)
class RawTable:
    """The columns of a table, by position: column k of `frame` is called `names[k]` in the file."""

    frame: pl.LazyFrame
    names: tuple[str, ...]
    format: str
    rows: int
    held: bool
    """Whether the channels are to stand in memory; otherwise each collection reads the file."""
    loaded: bool
    """Whether the frame stands in memory already."""
    remarks: tuple[str, ...] = ()
    decimal_comma: bool = False
    """Whether numbers in text columns are written with a decimal comma."""
    units: tuple[str, ...] = ()
    """The unit of each column where the format keeps it apart from the name; empty where it has none."""
    dialect: str = ""
    """How the table is written, on one line."""
    whole: pl.DataFrame | None = None
    """What `frame` gives, where it stands in memory: collecting thousands of columns again is not free."""
    starts: tuple[int, ...] = (0,)
    """The row with which each of several files begins."""
    spool: Spool | None = None
    """What keeps the file that the frame reads, when it is a temporary one."""
