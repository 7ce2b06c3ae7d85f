"""Measurement tables in: which format, which columns are channels, and their readings block by block.

A reader adds a format by giving a `RawTable`; what its columns and cells mean is decided once, for all formats.
"""

from screener.tables.blocks import spans
from screener.tables.table import Table, open_table

__all__ = ["Table", "open_table", "spans"]
