"""Which format a file has: by its content first, by its extension where the content leaves a choice."""

import gzip
import json
import zipfile
import zlib
from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path
from typing import TypeVar

import polars as pl

from screener.errors import TableError

T = TypeVar("T")

_HEAD_BYTES = 65_536
_CONTROL_SHARE = 0.05
_ZERO_SHARE = 0.4
_KNOWN = (
    "Known formats: CSV and TSV (also .gz and .zst), Parquet, Arrow IPC, newline-delimited JSON, and with extras "
    "spreadsheets, HDF5, MATLAB, TDMS and MDF"
)


class Kind(StrEnum):
    """The formats that are read."""

    TEXT = "CSV"
    PARQUET = "Parquet"
    IPC = "Arrow IPC"
    IPC_STREAM = "Arrow IPC stream"
    NDJSON = "newline-delimited JSON"
    SPREADSHEET = "spreadsheet"
    HDF5 = "HDF5"
    MATLAB = "MATLAB"
    TDMS = "TDMS"
    MDF = "MDF"


class Packing(StrEnum):
    """How a file is compressed as a whole."""

    NONE = ""
    GZIP = "gzip"
    ZSTD = "zstd"


@dataclass(frozen=True, slots=True)
class Recognised:
    """The format of a file."""

    kind: Kind
    packing: Packing = Packing.NONE

    @property
    def label(self) -> str:
        """What the user is told."""
        return f"{self.kind} ({self.packing})" if self.packing else str(self.kind)


_PACKINGS = {b"\x1f\x8b": Packing.GZIP, b"\x28\xb5\x2f\xfd": Packing.ZSTD}
_COLUMNAR = {b"PAR1": Kind.PARQUET, b"ARROW1": Kind.IPC, b"\xff\xff\xff\xff": Kind.IPC_STREAM}
_INSTRUMENTS = {
    b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1": Kind.SPREADSHEET,
    b"\x89HDF\r\n\x1a\n": Kind.HDF5,
    b"MATLAB 7.3": Kind.HDF5,
    b"MATLAB": Kind.MATLAB,
    b"TDSm": Kind.TDMS,
    b"MDF ": Kind.MDF,
}
"""What only an extra reads."""
_FOREIGN = {
    b"PK\x03\x04": "a zip archive but no spreadsheet",
    b"\x89HDF": "a damaged HDF5 file",
    b"SQLite format 3": "a run file or another SQLite database",
    b"%PDF": "a PDF document",
    b"FEA1": "a Feather file of version 1",
    b"BZh": "a bzip2 archive",
    b"\xfd7zXZ": "an xz archive",
}


def recognise(path: Path) -> Recognised:
    """The format and compression of a file.

    Raises:
        TableError: the file cannot be opened, is empty, or is nothing that is read here.
    """
    head = _opened_head(path)
    if not head:
        raise TableError(f"Couldn't read {str(path)!r}: the file is empty.")
    packing = _starting(head, _PACKINGS) or Packing.NONE
    inner = _unpacked_head(path, packing) if packing else head
    columnar = _starting(inner, _COLUMNAR) or _starting(inner, _INSTRUMENTS)
    if not columnar and not packing and _is_spreadsheet(path, head):
        columnar = Kind.SPREADSHEET
    if columnar and packing:
        raise TableError(f"Couldn't read {str(path)!r}: it is a {columnar} file inside {packing}. Unpack it first.")
    if columnar:
        return Recognised(columnar)
    _refuse_foreign(path, inner)
    return Recognised(_kind_of_text(path, inner), packing)


def source_of(path: Path) -> Path | bytes:
    """What polars is given: the path, or the content where the path is not Unicode text."""
    try:
        str(path).encode()
    except UnicodeEncodeError:
        return path.read_bytes()
    return path.absolute()


def _opened_head(path: Path) -> bytes:
    shown = repr(str(path))
    try:
        if path.exists() and not path.is_file():
            kind = "a directory" if path.is_dir() else "not a regular file"
            way_out = "Name one table file, or send it to standard input, as in `... | screener -`."
            raise TableError(f"Couldn't read {shown}: it is {kind}. {way_out}")
        with path.open("rb") as file:
            return file.read(_HEAD_BYTES)
    except FileNotFoundError as error:
        raise TableError(f"Couldn't read {shown}: there is no such file.") from error
    except PermissionError as error:
        raise TableError(f"Couldn't read {shown}: you are not permitted to read it.") from error
    except (OSError, ValueError) as error:
        raise TableError(f"Couldn't read {shown}: {getattr(error, 'strerror', None) or error}.") from error


def _unpacked_head(path: Path, packing: Packing) -> bytes:
    """The first bytes inside the compression; of zstd only whole lines of text, since polars unpacks it."""
    try:
        if packing is Packing.GZIP:
            with gzip.open(path) as file:
                return file.read1(_HEAD_BYTES)
        lines = pl.scan_lines(source_of(path), n_rows=20, glob=False).collect()
        return "\n".join(lines.to_series().to_list()).encode()[:_HEAD_BYTES]
    except pl.exceptions.ComputeError as error:
        raise TableError(f"Couldn't read {str(path)!r}: inside {packing} is no UTF-8 text. {_KNOWN}.") from error
    except (OSError, EOFError, zlib.error) as error:
        raise TableError(f"Couldn't read {str(path)!r}: its {packing} compression is damaged or cut off.") from error


def _refuse_foreign(path: Path, head: bytes) -> None:
    if foreign := _starting(head, _FOREIGN):
        raise TableError(f"Couldn't read {str(path)!r}: it is {foreign}, not a table. {_KNOWN}.")
    marked = head.startswith((b"\xff\xfe", b"\xfe\xff", b"\0\0\xfe\xff"))
    if not marked and not utf16_without_mark(head) and _looks_binary(head):
        raise TableError(f"Couldn't read {str(path)!r}: it holds binary data, not a table. {_KNOWN}.")


def utf16_without_mark(head: bytes) -> str:
    """The byte order of UTF-16 text that does not say it: of Western text every other byte is zero."""
    if len(head) < 4 or head.count(0) < _ZERO_SHARE * len(head):
        return ""
    even, odd = head[::2].count(0), head[1::2].count(0)
    if min(even, odd) > 0 or head[:1] + head[1:2] == b"\0\0":
        return ""
    return "utf-16-be" if even else "utf-16-le"


def _looks_binary(head: bytes) -> bool:
    """Whether there is more than a sprinkle of control characters; a logger may leave a few zero bytes."""
    text = head.rstrip(b"\0")
    controls = sum(text.count(code) for code in range(32) if code not in b"\t\n\r\x0b\x0c\x1b")
    return controls > _CONTROL_SHARE * len(text) or not text


def _kind_of_text(path: Path, head: bytes) -> Kind:
    suffixes = {suffix.lower() for suffix in path.suffixes[-2:]}
    start = head.removeprefix(b"\xef\xbb\xbf").lstrip()
    if suffixes & {".ndjson", ".jsonl"}:
        return Kind.NDJSON
    if suffixes & {".json"} and start.startswith(b"["):
        raise TableError(
            f"Couldn't read {str(path)!r}: it is one JSON array. Write one JSON object a line (newline-delimited JSON)."
        )
    return Kind.NDJSON if start.startswith(b"{") and _is_object(start.partition(b"\n")[0]) else Kind.TEXT


def _is_object(line: bytes) -> bool:
    try:
        return isinstance(json.loads(line), dict)
    except ValueError:
        return False


def _is_spreadsheet(path: Path, head: bytes) -> bool:
    """Whether a zip archive holds what spreadsheets hold."""
    if not head.startswith(b"PK\x03\x04") or not zipfile.is_zipfile(path):
        return False
    with zipfile.ZipFile(path) as archive:
        held = set(archive.namelist())
    return bool(held & {"xl/workbook.xml", "xl/workbook.bin", "content.xml"})


def _starting(head: bytes, magics: Mapping[bytes, T]) -> T | None:
    return next((meaning for magic, meaning in magics.items() if head.startswith(magic)), None)
