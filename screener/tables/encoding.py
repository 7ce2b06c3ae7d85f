"""Text in other encodings and with other line ends, turned into what polars reads: UTF-8 with newlines."""

import codecs
import gzip
from pathlib import Path

from screener.tables.formats import Packing, source_of

_HEAD_BYTES = 1 << 20


def utf8_source(path: Path, packing: Packing) -> tuple[Path | bytes, tuple[str, ...]]:
    """What polars is given, and a remark when the text had to be converted in memory first."""
    if packing is Packing.ZSTD:
        return source_of(path), ()
    with gzip.open(path) if packing else path.open("rb") as file:
        head = file.read(_HEAD_BYTES)
        encoding = _encoding(head)
        only_returns = encoding == "utf-8" and b"\r" in head and b"\n" not in head
        if encoding == "utf-8" and not only_returns:
            return source_of(path), ()
        content = head + file.read()
    text = content.decode(encoding, errors="replace").removeprefix("\ufeff")
    if "\n" not in text:
        text = text.replace("\r", "\n")
    remarks = () if encoding == "utf-8" else (f"The text was read as {_NAMES[encoding]}.",)
    return text.encode(), remarks


_NAMES = {"utf-16": "UTF-16", "cp1252": "Windows-1252"}


def _encoding(head: bytes) -> str:
    if head.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return "utf-16"
    try:
        codecs.getincrementaldecoder("utf-8")().decode(head, final=False)
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"
