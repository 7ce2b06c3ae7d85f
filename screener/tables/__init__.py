"""Measurement tables in: which format, which columns are channels, and their readings block by block.

A reader adds a format by giving a `RawTable`; what its columns and cells mean is decided once, for all formats.
"""

from screener.tables.blocks import block_bytes, machine_memory, spans
from screener.tables.table import Table, open_table

__all__ = ["Table", "block_bytes", "machine_memory", "open_table", "spans"]
