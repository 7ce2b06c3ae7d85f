"""The physical lines of a whole text, a piece at a time: what they are is known in a bounded amount of memory."""

import gzip
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import BinaryIO, cast

import numpy as np
from numpy.typing import NDArray

from screener.tables.cells import BLANKS
from screener.tables.encoding import text_lines

_PIECE_BYTES = 1 << 20
_QUOTED = re.compile(rb'"[^"\n]*"')
_BLANK_BYTES = np.isin(np.arange(256), [ord(sign) for sign in BLANKS if sign.isascii()])
_GZIP, _ZSTD = b"\x1f\x8b", b"\x28\xb5\x2f\xfd"


@dataclass(frozen=True)
class Lines:
    """Some lines that follow one another, ends of lines included."""

    content: bytes
    separator: str

    @cached_property
    def starts(self) -> NDArray[np.int64]:
        """[lines + 1] where each line begins, and the end."""
        return _starts(self.content)

    @cached_property
    def cells(self) -> NDArray[np.int64]:
        """[lines] the cells of each line, a separator within quotation marks being none; 0 for a blank line."""
        bare = _QUOTED.sub(b'""', self.content) if b'"' in self.content else self.content
        codes = np.frombuffer(bare, dtype=np.uint8)
        begins = _starts(bare)[:-1]
        cells = np.add.reduceat(codes == ord(self.separator), begins, dtype=np.int64) + 1
        if (alone := np.flatnonzero(cells == 1)).size:
            shown = np.add.reduceat(~_BLANK_BYTES[codes], begins, dtype=np.int64)
            plain = np.add.reduceat(~_BLANK_BYTES[codes] & (codes < 128), begins, dtype=np.int64)
            cells[alone[shown[alone] == 0]] = 0
            for at in alone[(shown[alone] > 0) & (plain[alone] == 0)].tolist():
                cells[at] = bool(self.text(at).strip(BLANKS))
        return cells

    def text(self, at: int) -> str:
        """One line, without its end."""
        line = self.content[self.starts[at] : self.starts[at + 1]]
        return line.removesuffix(b"\n").removesuffix(b"\r").decode(errors="replace")


def measured_lines(source: Path | bytes, separator: str) -> Iterator[Lines]:
    """All lines of a text."""
    for piece in _pieces(source):
        yield Lines(piece, separator)


def each_line(source: Path | bytes) -> Iterator[str]:
    """Every line of a text, without its end, bytes that are no UTF-8 replaced."""
    for piece in _pieces(source):
        for line in piece.removesuffix(b"\n").split(b"\n"):
            yield line.removesuffix(b"\r").decode(errors="replace")


def _starts(content: bytes) -> NDArray[np.int64]:
    ends = np.flatnonzero(np.frombuffer(content, dtype=np.uint8) == ord("\n")) + 1
    whole = ends.size and ends[-1] == len(content)
    return np.concatenate([[0], ends, [] if whole else [len(content)]]).astype(np.int64)


def _pieces(source: Path | bytes) -> Iterator[bytes]:
    """The text in pieces of whole lines, none of them empty."""
    rest: list[bytes] = []
    for piece in _read(source):
        head, end, tail = piece.rpartition(b"\n")
        if end:
            yield b"".join((*rest, head, end))
            rest = []
        if tail:
            rest.append(tail)
    if rest:
        yield b"".join(rest)


def _read(source: Path | bytes) -> Iterator[bytes]:
    if isinstance(source, bytes):
        for start in range(0, len(source), _PIECE_BYTES):
            yield source[start : start + _PIECE_BYTES]
        return
    with source.open("rb") as file:
        packing = file.read(4)
    if packing == _ZSTD:
        for lines in text_lines(source).to_frame().iter_slices(10_000):
            yield "".join(f"{line}\n" for line in lines.to_series()).encode()
        return
    with cast("BinaryIO", gzip.open(source)) if packing[:2] == _GZIP else source.open("rb") as file:
        while piece := file.read(_PIECE_BYTES):
            yield piece
