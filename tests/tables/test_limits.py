"""Readings known only to lie beyond a detection limit go with the block they are in."""

from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from screener.records import Block, Plan, Span
from screener.tables import open_table

LEAD = ["<0.5", "0.81", "<0.5", "1.20", "0.66", "<0.2", "0.31", "2.04", ">5", "0.5", "3.3", "0.9"]
ZINC = ["12.1", "10.4", ">20", "9.9", "11.3", "13.8", ">20", "8.7", "10.1", "25", ">30", "12.6"]
PLAIN = [f"{value:.1f}" for value in (7.1, 6.9, 7.4, 7.0, 6.6, 7.2, 7.7, 6.8, 7.3, 7.5, 6.4, 7.6)]


def write(path: Path, **columns: list[str]) -> Path:
    rows = [",".join(columns), *(",".join(cells) for cells in zip(*columns.values(), strict=True))]
    path.write_text("\n".join(rows) + "\n")
    return path


def read(path: Path, plan: Plan | None = None, *, held_bytes: int = 1 << 30) -> Block:
    table = open_table(path, plan or Plan(), held_bytes=held_bytes)
    return table.read(Span(0, len(table.facts.channels)))


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_each_channel_tells_how_many_of_its_outermost_readings_lie_beyond_the_limit(
    tmp_path: Path, held_bytes: int
) -> None:
    block = read(write(tmp_path / "a.csv", lead=LEAD, zinc=ZINC, plain=PLAIN), held_bytes=held_bytes)
    assert block.below is not None
    assert block.above is not None
    # lead: two `<0.5`, and `<0.2` and 0.31 which lie below 0.5; its own reading of 0.5 is known.
    assert_array_equal(block.below, [4, 0, 0])
    # zinc: two `>20`, and 25 and `>30` which lie above 20.
    assert_array_equal(block.above, [1, 4, 0])


def test_the_channel_says_how_many_cells_are_limits_whatever_lies_beyond_them(tmp_path: Path) -> None:
    table = open_table(write(tmp_path / "a.csv", lead=LEAD, zinc=ZINC), Plan())
    assert [(channel.below, channel.above) for channel in table.facts.channels] == [(3, 1), (0, 3)]


def test_a_part_of_the_channels_has_its_own_counts(tmp_path: Path) -> None:
    table = open_table(write(tmp_path / "a.csv", plain=PLAIN, lead=LEAD, zinc=ZINC), Plan())
    assert table.read(Span(0, 1)).below is None
    last = table.read(Span(2, 3))
    assert last.below is None
    assert last.above is not None
    assert_array_equal(last.above, [4])


def test_a_table_without_limits_has_no_counts(tmp_path: Path) -> None:
    block = read(write(tmp_path / "a.csv", plain=PLAIN))
    assert block.below is None
    assert block.above is None


def test_a_limit_that_is_left_out_as_a_missing_code_is_not_counted(tmp_path: Path) -> None:
    block = read(write(tmp_path / "a.csv", zinc=ZINC), Plan(missing=("20",)))
    assert block.above is not None
    assert np.isnan(block.readings).sum() == 2
    assert_array_equal(block.above, [2])


def test_files_joined_share_the_innermost_limit(tmp_path: Path) -> None:
    write(tmp_path / "run_1.csv", lead=["0.9", "<0.2", "0.4", "1.1"])
    write(tmp_path / "run_2.csv", lead=["0.8", "<0.5", "0.7", "1.3"])
    block = read(tmp_path / "run_*.csv")
    assert block.below is not None
    assert_array_equal(block.below, [3])
