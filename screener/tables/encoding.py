"""The text of a table as polars reads it, UTF-8 with newlines, whatever its encoding and line ends."""

import codecs
import csv
import gzip
import io
import re
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO, cast

import polars as pl

from screener.errors import PlanError
from screener.tables.formats import Packing, source_of, utf16_without_mark
from screener.tables.head import cell_rows
from screener.tables.packed import gzip_size, refuse_bomb, zstd_size

HEAD_LINES = 200
_HEAD_BYTES = 1 << 18
_FEWEST_LINES = 8
_CHUNK_BYTES = 1 << 22
_NAMES = {"utf-16": "UTF-16", "utf-16-le": "UTF-16", "utf-16-be": "UTF-16", "utf-32": "UTF-32"}
_NAMES |= {"cp1252": "Windows-1252", "latin-1": "Latin-1", "iso8859-1": "Latin-1", "utf-8": "UTF-8"}
_NOT_IN_1252 = frozenset(b"\x81\x8d\x8f\x90\x9d")
_LONE_RETURN = re.compile(rb"\r(?!\n|\Z)")

Sink = Callable[[Iterable[bytes]], Path | bytes]
"""Keeps converted text, in memory or in a temporary file."""


@dataclass(frozen=True, slots=True)
class Text:
    """What polars is given to parse, and its first lines."""

    source: Path | bytes
    """The file itself, or its text converted."""
    head: list[str]
    words: tuple[str, ...] = ()
    """What the user is told about it, a few words each."""
    remarks: tuple[str, ...] = ()


def in_memory(pieces: Iterable[bytes]) -> bytes:
    """The simplest sink."""
    return b"".join(pieces)


def utf8_text(path: Path, packing: Packing, *, given: str = "", keep: Sink = in_memory) -> Text:
    """The text of a file; converted where it is not UTF-8 or where carriage returns alone end lines.

    Raises PlanError when there is no encoding of the given name.
    """
    if packing is Packing.ZSTD:
        source = source_of(path)
        return Text(source, _without_mark(text_lines(source, HEAD_LINES).to_list()))
    with cast("BinaryIO", gzip.open(path)) if packing else path.open("rb") as file:
        head = list(_first_lines(file))
        sample = b"".join(head)
        encoding = _known(given, sample) if given else _encoding(sample)
        text = sample.decode(encoding, errors="replace") if encoding.startswith("utf-") else ""
        returns = _LONE_RETURN.search(text.encode(errors="replace") if text else sample) is not None
        returns = returns or (encoding == "utf-8" and not packing and _has_lone_return(path))
        words = [*((_NAMES.get(encoding, encoding),) if encoding != "utf-8" else ())]
        words += ["lines end in carriage returns"] if returns else []
        if encoding == "utf-8" and not returns:
            lines = [line.decode(errors="replace").rstrip("\r\n") for line in head]
            return Text(source_of(path), _without_mark(lines))
        try:
            source = keep(_converted(_pieces(sample, file), encoding))
        except UnicodeError as error:
            raise PlanError(f"Couldn't read {str(path)!r} as {encoding}: it is not written so.") from error
    remarks = () if encoding == "utf-8" else (f"The text was read as {_NAMES.get(encoding, encoding)}.",)
    return Text(source, _head_of(source), tuple(words), remarks)


def text_size(path: Path, packing: Packing) -> int:
    """The bytes of the text, at most; told from the compressed blocks where there are any.

    Raises TableError when so small a file holds so much that it can only be meant to fill memory.
    """
    size = path.stat().st_size
    if packing is Packing.NONE:
        return size
    unpacked = gzip_size(path) if packing is Packing.GZIP else zstd_size(path)
    refuse_bomb(path, size, unpacked)
    return unpacked


def blanks_as_tabs(text: Text, keep: Sink = in_memory) -> Path | bytes:
    """The text with one tab between two cells instead of blanks, every line on its own line as before."""
    source = text.source
    if isinstance(source, bytes):
        return keep(_tabbed(source.splitlines()))
    with cast("BinaryIO", gzip.open(source)) if source.read_bytes()[:2] == b"\x1f\x8b" else source.open("rb") as file:
        return keep(_tabbed(file))


def text_lines(source: Path | bytes, count: int | None = None) -> pl.Series:
    """The physical lines of a text, bytes that are no UTF-8 replaced."""
    try:
        return pl.scan_lines(source, n_rows=count, glob=False).collect().to_series()
    except pl.exceptions.ComputeError:
        whole_lines = pl.scan_csv(
            source,
            has_header=False,
            separator="\x01",
            quote_char=None,
            schema={"line": pl.String()},
            encoding="utf8-lossy",
            extra_columns="ignore",
            n_rows=count,
            glob=False,
        )
        return whole_lines.select(pl.col("line").fill_null("")).collect().to_series()


def _tabbed(lines: Iterable[bytes]) -> Iterator[bytes]:
    for line in lines:
        if b'"' in line:
            row = io.StringIO()
            cells = next(cell_rows([line.decode(errors="replace").rstrip("\r\n")], " "), [])
            csv.writer(row, delimiter="\t", lineterminator="\n").writerow(cells)
            yield row.getvalue().encode()
        else:
            yield b"\t".join(line.split()) + b"\n"


def _known(name: str, sample: bytes) -> str:
    """The encoding of that name; UTF-16 without its mark is of the byte order that the text shows."""
    try:
        "".encode(name)
        known = codecs.lookup(name).name
        marked = sample.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE))
        return utf16_without_mark(sample) or "utf-16-le" if known == "utf-16" and not marked else known
    except LookupError as error:
        known = "utf-8, utf-16, latin-1, cp1252"
        raise PlanError(f"Couldn't use encoding {name!r}: there is none of that name. Known are {known}...") from error


def _has_lone_return(path: Path) -> bool:
    """Whether a carriage return alone ends a line anywhere."""
    before = b""
    with path.open("rb") as file:
        while piece := file.read(_CHUNK_BYTES):
            if b"\r" in piece or before:
                if _LONE_RETURN.search(before + piece):
                    return True
                before = b"\r" if piece.endswith(b"\r") else b""
    return False


def _converted(pieces: Iterable[bytes], encoding: str) -> Iterator[bytes]:
    """UTF-8 with newlines, without a byte order mark."""
    decoder = io.IncrementalNewlineDecoder(codecs.getincrementaldecoder(encoding)("replace"), translate=True)
    first = True
    for piece in pieces:
        text = decoder.decode(piece)
        yield (text.removeprefix("\ufeff") if first else text).encode(errors="replace")
        first = first and not text
    yield decoder.decode(b"", final=True).encode(errors="replace")


def _pieces(sample: bytes, file: BinaryIO) -> Iterator[bytes]:
    yield sample
    while piece := file.read(_CHUNK_BYTES):
        yield piece


def _head_of(source: Path | bytes) -> list[str]:
    if isinstance(source, bytes):
        return [line.decode(errors="replace") for line in source.split(b"\n", HEAD_LINES)[:HEAD_LINES]]
    with source.open("rb") as file:
        return [line.decode(errors="replace").rstrip("\n") for line in _first_lines(file)]


def _without_mark(lines: list[str]) -> list[str]:
    """The lines without the byte order mark before the first."""
    return [line.removeprefix("\ufeff") for line in lines[:1]] + lines[1:]


def _first_lines(file: Iterable[bytes]) -> Iterator[bytes]:
    """Enough lines to judge the table by, and not much more of a wide one."""
    read = 0
    for number, line in enumerate(file, 1):
        yield line
        read += len(line)
        if number >= HEAD_LINES or (number >= _FEWEST_LINES and read > _HEAD_BYTES):
            return


def _encoding(sample: bytes) -> str:
    if sample.startswith((codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE)):
        return "utf-32"
    if sample.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return "utf-16"
    if unmarked := utf16_without_mark(sample):
        return unmarked
    try:
        sample.decode()
    except UnicodeDecodeError:
        return "latin-1" if _NOT_IN_1252.intersection(sample) else "cp1252"
    return "utf-8"
