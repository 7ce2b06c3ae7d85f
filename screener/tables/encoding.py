"""The text of a table as polars reads it, UTF-8 with newlines, whatever its encoding and line ends."""

import codecs
import gzip
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path

import polars as pl

from screener.tables.formats import Packing, source_of

HEAD_LINES = 64
_HEAD_BYTES = 1 << 18
_FEWEST_LINES = 8
_NAMES = {"utf-16": "UTF-16", "cp1252": "Windows-1252"}


@dataclass(frozen=True, slots=True)
class Text:
    """What polars is given to parse, and its first lines."""

    source: Path | bytes
    """The file itself, or its text converted in memory."""
    head: list[str]
    remarks: tuple[str, ...] = ()


def utf8_text(path: Path, packing: Packing) -> Text:
    """The text of a file; converted in memory when it is not UTF-8 or its lines end in carriage returns alone."""
    if packing is Packing.ZSTD:
        source = source_of(path)
        return Text(source, _without_mark(text_lines(source, HEAD_LINES).to_list()))
    with gzip.open(path) if packing else path.open("rb") as file:
        head = list(_first_lines(file))
        sample = b"".join(head)
        encoding = _encoding(sample)
        if encoding == "utf-8" and (b"\r" not in sample or b"\n" in sample):
            return Text(source_of(path), _without_mark([line.decode().rstrip("\r\n") for line in head]))
        content = sample + file.read()
    text = content.decode(encoding, errors="replace").removeprefix("\ufeff")
    if "\n" not in text:
        text = text.replace("\r", "\n")
    remarks = () if encoding == "utf-8" else (f"The text was read as {_NAMES[encoding]}.",)
    return Text(text.encode(), text.split("\n", HEAD_LINES)[:HEAD_LINES], remarks)


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
    if sample.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return "utf-16"
    try:
        sample.decode()
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"
