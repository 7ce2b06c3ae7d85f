"""How the channels of a table are cut into blocks."""

import os
from collections.abc import Sequence

from screener.records import Span, TableFacts

FIRST_BYTES = 4_000_000
"""The first blocks are small, so that the first rows come soon, and the last ones, so that no thread waits long."""
GROWN = 4
"""Times the first block that others may hold: what scoring costs a block is shared by more channels."""
MOST_CHANNELS = 5000
"""Channels of a block, however short they are: what is known of more of them does not stay in the processor's cache."""
SHARE = 4
"""Blocks that what is left is cut into at the least."""
_READING_BYTES = 8


def spans(facts: TableFacts, first_bytes: int = FIRST_BYTES, most_bytes: int | None = None) -> list[Span]:
    """Spans that cover every channel once, in order; the same table shape always gives the same spans.

    A span holds at least one channel, so with many rows a block is larger than `first_bytes` and `most_bytes`, which
    is `GROWN` times `first_bytes` unless given.
    """
    count, channel_bytes = len(facts.channels), _READING_BYTES * max(1, facts.rows)
    most_bytes = GROWN * first_bytes if most_bytes is None else most_bytes
    sizes = min(first_bytes, most_bytes), most_bytes
    least, most = (max(1, min(MOST_CHANNELS, size // channel_bytes)) for size in sizes)
    width = least
    cut: list[Span] = []
    first = 0
    while first < count:
        cut.append(Span(first, min(first + width, count)))
        first += width
        width = max(least, min(2 * width, most, (count - first) // SHARE))
    return cut


def machine_memory() -> int:
    """Bytes of memory in this machine."""
    return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")


def block_bytes(facts: TableFacts, cut: Sequence[Span]) -> int:
    """The readings of the largest block, in bytes."""
    return max((span.stop - span.first for span in cut), default=0) * facts.rows * _READING_BYTES
