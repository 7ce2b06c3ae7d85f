"""How much a compressed file holds, told before it is unpacked, and the refusal of what can only fill memory."""

import zlib
from pathlib import Path

from screener.errors import TableError

_BOMB_RATIO = 200
"""Tables of readings shrink 3 to 20 times; a thousand times is no table."""
_BOMB_BYTES = 1 << 28
_CHUNK_BYTES = 1 << 20
_MOST_GZIP = 1032
_SKIPPABLE = range(0x184D2A50, 0x184D2A60)
_ZSTD_MAGIC = 0xFD2FB528
_ZSTD_BLOCK = 1 << 17


def refuse_bomb(path: Path, packed: int, unpacked: int) -> None:
    """Refuse an archive that expands beyond all tables.

    Raises:
        TableError: it does.
    """
    if unpacked > _BOMB_BYTES and unpacked > _BOMB_RATIO * packed:
        raise TableError(
            f"Couldn't read {str(path)!r}: {packed:,} bytes unpack to {unpacked:,} or more, which no table of readings "
            "does. Unpack it yourself if you trust it."
        )


def gzip_size(path: Path) -> int:
    """The unpacked bytes of a gzip file, at most; unpacked piece by piece and thrown away, up to a bomb's size.

    A small file is not unpacked: nothing shrinks more than `_MOST_GZIP` times.
    """
    packed = path.stat().st_size
    if packed * _MOST_GZIP < _BOMB_BYTES:
        return packed * _MOST_GZIP
    unpacked, engine = 0, zlib.decompressobj(31)
    limit = max(_BOMB_BYTES, _BOMB_RATIO * packed)
    with path.open("rb") as file:
        while (piece := engine.unconsumed_tail or file.read(_CHUNK_BYTES)) and unpacked <= limit:
            unpacked += len(engine.decompress(piece, _CHUNK_BYTES * 16))
            if engine.eof:
                rest = engine.unused_data
                engine = zlib.decompressobj(31)
                unpacked += len(engine.decompress(rest, _CHUNK_BYTES * 16)) if rest.strip(b"\0") else 0
    return unpacked


def zstd_size(path: Path) -> int:
    """The most bytes that a zstd file can unpack to, from the headers of its blocks; 0 where it is damaged."""
    total = 0
    with path.open("rb") as file:
        while len(head := file.read(4)) == 4:
            magic = int.from_bytes(head, "little")
            if magic in _SKIPPABLE:
                file.seek(int.from_bytes(file.read(4), "little"), 1)
                continue
            if magic != _ZSTD_MAGIC:
                return total
            descriptor = file.read(1)[0]
            single = bool(descriptor & 0x20)
            size_bytes = (1 if single else 0, 2, 4, 8)[descriptor >> 6]
            file.seek((0 if single else 1) + (0, 1, 2, 4)[descriptor & 3] + size_bytes, 1)
            last = False
            while not last:
                header = int.from_bytes(file.read(3), "little")
                if not header:
                    return total
                last, kind, size = bool(header & 1), header >> 1 & 3, header >> 3
                total += size if kind in (0, 1) else _ZSTD_BLOCK
                file.seek(1 if kind == 1 else size, 1)
            file.seek(4 if descriptor & 4 else 0, 1)
    return total
