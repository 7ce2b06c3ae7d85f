"""One file or address as a raw table, with the fingerprint of exactly what was read."""

import warnings
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path
from urllib.parse import urlsplit

import polars as pl

from screener.errors import TableError
from screener.records import Plan
from screener.tables.failures import ADDRESS, named, readable
from screener.tables.fingerprint import fingerprint
from screener.tables.formats import Kind, Recognised, recognise
from screener.tables.instruments import read_hdf5, read_matlab, read_mdf, read_tdms
from screener.tables.raw import RawTable
from screener.tables.shapes import as_columns
from screener.tables.spool import Spool
from screener.tables.stored import read_frame, read_stored
from screener.tables.text import read_sheet, read_text

_CHUNK_BYTES = 1 << 20
_INSTRUMENT_READERS = {Kind.HDF5: read_hdf5, Kind.MATLAB: read_matlab, Kind.TDMS: read_tdms, Kind.MDF: read_mdf}


@dataclass(frozen=True, slots=True)
class FileState:
    """A file as it was when it was opened."""

    path: Path
    size: int
    changed: int

    @classmethod
    def of(cls, path: Path) -> "FileState":
        """The state now."""
        status = path.stat()
        return cls(path, status.st_size, status.st_mtime_ns)

    def check(self) -> None:
        """Raise TableError when the file is no longer what it was."""
        if FileState.of(self.path) != self:
            raise TableError(
                f"Couldn't go on reading {str(self.path)!r}: it was changed after it was opened. "
                "Wait until nothing writes to it, then start again."
            )


@dataclass(frozen=True, slots=True)
class Loaded:
    """A raw table and what was read of it."""

    raw: RawTable
    content: str
    """The fingerprint of what was read."""
    state: FileState | None = None
    """The file that is still read from; None for an address."""


def load_file(path: Path, plan: Plan, held_bytes: int) -> Loaded:
    """The table in a file; of a text that grows meanwhile, what was there at the beginning.

    Raises:
        TableError: the file cannot be read, or was changed while it was.
    """
    recognised = recognise(path)
    with readable(path, str(recognised.kind)), ThreadPoolExecutor(1) as aside:
        before = FileState.of(path)
        content = aside.submit(fingerprint, path, size=before.size)
        raw = as_columns(_read(path, recognised, plan, held_bytes), plan.shape, path)
        after = FileState.of(path)
        if after == before:
            return Loaded(raw, content.result(), before)
        if recognised.kind is not Kind.TEXT or recognised.packing or after.size < before.size:
            raise TableError(f"Couldn't read {str(path)!r}: it was changed while it was read. Try again.")
        return _as_it_was(path, recognised, plan, before.size, held_bytes)


def _as_it_was(path: Path, recognised: Recognised, plan: Plan, size: int, held_bytes: int) -> Loaded:
    """The table in the whole lines among the first bytes of a file that grows."""
    spool = Spool()
    copy = spool.keep(_whole_lines(path, size))
    raw = as_columns(_read(copy, recognised, plan, held_bytes), plan.shape, path)
    remark = f"The file grew while it was read: its first {copy.stat().st_size:,} bytes were read."
    kept = replace(raw, remarks=(*raw.remarks, remark), spool=raw.spool or spool)
    return Loaded(kept, fingerprint(copy))


def _whole_lines(path: Path, size: int) -> Iterator[bytes]:
    rest = b""
    with path.open("rb") as file:
        while size > 0 and (piece := file.read(min(size, _CHUNK_BYTES))):
            size -= len(piece)
            lines, end, rest = (rest + piece).rpartition(b"\n")
            yield lines + end


def _read(path: Path, recognised: Recognised, plan: Plan, held_bytes: int) -> RawTable:
    if recognised.kind is Kind.TEXT:
        return read_text(path, recognised, plan, held_bytes=held_bytes)
    if recognised.kind is Kind.SPREADSHEET:
        return read_sheet(path, recognised, plan)
    if reader := _INSTRUMENT_READERS.get(recognised.kind):
        return reader(path, plan.part, held_bytes)
    return read_stored(path, recognised, held_bytes=held_bytes)


def load_address(address: str, plan: Plan, held_bytes: int) -> Loaded:
    """The table at an address that polars reads: columnar files piece by piece, anything else copied first.

    Raises:
        TableError: it cannot be read.
    """
    suffix = Path(urlsplit(address).path).suffix.lower()
    with readable(address, ADDRESS), warnings.catch_warnings():
        warnings.simplefilter("ignore")  # such as that a region was not given
        if suffix in {".parquet", ".arrow", ".ipc", ".feather"}:
            kind = Kind.PARQUET if suffix == ".parquet" else Kind.IPC
            frame = pl.scan_parquet(address, glob=False) if kind is Kind.PARQUET else pl.scan_ipc(address, glob=False)
            raw = read_frame(frame, Recognised(kind), held_bytes=held_bytes)
            ends = pl.concat([frame.head(1), frame.tail(1)]).collect()
            rows = ends.hash_rows(0).to_list()
            return Loaded(as_columns(raw, plan.shape, Path(address)), f"address:{raw.rows}:{len(raw.names)}:{rows}")
        spool = Spool()
        lines = pl.scan_lines(address, glob=False).collect().to_series()
        copy = spool.keep(f"{line}\n".encode() for line in lines)
        with named(copy, repr(address)):
            loaded = load_file(copy, plan, held_bytes)
        return replace(loaded, raw=replace(loaded.raw, spool=loaded.raw.spool or spool))
