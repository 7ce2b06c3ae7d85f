"""How channels are cut into blocks."""

from itertools import pairwise
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.records import Channel, Span, TableFacts
from screener.tables import spans


def facts(rows: int, channels: int) -> TableFacts:
    made = tuple(Channel(position, f"c{position}") for position in range(channels))
    return TableFacts(Path("t.csv"), "CSV", rows, made, (), "")


@given(rows=st.integers(0, 10**7), channels=st.integers(0, 300), block_bytes=st.integers(1, 10**8))
def test_spans_cover_every_channel_once_and_in_order(rows: int, channels: int, block_bytes: int) -> None:
    cut = spans(facts(rows, channels), block_bytes)
    assert [at for span in cut for at in range(span.first, span.stop)] == list(range(channels))
    assert all(span.stop > span.first for span in cut)


@pytest.mark.parametrize(("rows", "width"), [(4_000, 125), (10_000, 50), (500_000, 1), (5_000_000, 1)])
def test_the_first_block_holds_about_four_megabytes_and_at_least_one_channel(rows: int, width: int) -> None:
    assert spans(facts(rows, 240))[0] == Span(0, width)


@given(rows=st.integers(0, 10**7), channels=st.integers(0, 3000))
def test_blocks_grow_to_sixteen_megabytes_and_shrink_towards_the_end(rows: int, channels: int) -> None:
    cut = spans(facts(rows, channels))
    widths = [span.stop - span.first for span in cut]
    assert all(width <= 2 * before for before, width in pairwise(widths))
    assert max(widths, default=0) * rows * 8 <= max(16_000_000, 8 * rows)
    # Behind any block but the last ones there is work for three more threads.
    assert all(span.stop - span.first <= max(widths[0], (channels - span.first) // 4) for span in cut)


@pytest.mark.parametrize("rows", [0, 10, 100])
def test_a_block_of_short_channels_holds_five_thousand(rows: int) -> None:
    assert [span.stop for span in spans(facts(rows, 12_000))] == [5000, 10_000, 12_000]
