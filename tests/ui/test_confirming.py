"""Confirming a channel by a key: progress, result, stopping."""

import math
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from screen_text import shows

from screener.records import Confirmation, Plan
from screener.runs import RunFile
from screener.screening.start import start
from screener.ui.abilities import Abilities
from screener.ui.app import ScreenerApp
from screener.ui.confirming import confirmation_lines, confirmation_words
from screener.ui.source import Source


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def scored(rows: int) -> Path:
    """The run file of a table of three normal channels."""
    readings = np.random.default_rng(1).normal(size=(rows, 3))
    pl.DataFrame(readings, schema=["a", "b", "c"]).write_parquet("t.parquet")
    for _ in start(Path("t.parquet"), Plan(), jobs=1):
        pass
    return Path("t.run")


def screen_on(run: Path) -> ScreenerApp:
    return ScreenerApp(Source(run.name, None, run), can=Abilities(unicode=True))


async def test_the_key_confirms_the_channel_and_the_result_stands_under_its_plot() -> None:
    run_file = scored(2_000)
    async with screen_on(run_file).run_test(size=(140, 45)) as pilot:
        await shows(pilot, "1 of 3 channels")
        await pilot.press("down", "C")
        # Under the plot and, as a notice, under the table.
        await shows(pilot, lambda text: text.count("By 2,000 samples of normal") == 2 and "C stops" not in text)
        await pilot.press("down")
        await shows(pilot, lambda text: "By 2,000 samples" not in text and "3 of 3" in text)
    with RunFile.open(run_file, read_only=True) as run:
        assert [run.confirmation(k) is not None for k in range(3)] == [False, True, False]


async def test_progress_is_shown_and_the_key_again_stops_and_nothing_is_kept() -> None:
    # So many readings that the samples take far longer than the screen takes to show it.
    run_file = scored(60_000)
    async with screen_on(run_file).run_test(size=(80, 24)) as pilot:
        await shows(pilot, "1 of 3 channels")
        await pilot.press("C")
        await shows(pilot, "of 2,000 samples to confirm a (C stops)")
        await pilot.press("C")
        await shows(pilot, lambda text: "Stopped confirming; nothing was kept." in text and "C stops" not in text)
    with RunFile.open(run_file, read_only=True) as run:
        assert run.confirmation(0) is None


async def test_without_the_table_a_sentence_says_so_and_the_screen_stays() -> None:
    run_file = scored(2_000)
    Path("t.parquet").unlink()
    async with screen_on(run_file).run_test(size=(80, 24)) as pilot:
        await shows(pilot, "1 of 3 channels")
        await pilot.press("C")
        await shows(pilot, "Couldn't read 't.parquet'")
        await pilot.press("down")
        await shows(pilot, "2 of 3 channels")


def test_the_words_say_verdict_values_and_p() -> None:
    clear = Confirmation("gamma", 0.9991, 2000, 812, 0.4063, 0.9975)
    assert confirmation_words(clear) == (
        "By 2,000 samples of gamma in the channel's own autocorrelation: clear, r 0.999100 not below their critical "
        "0.99750; 812 as small, p 0.4063."
    )
    assert confirmation_words(Confirmation("F", 0.9, 0, 0, 1.0, math.nan)).endswith("none has an r.")
    assert all(len(line) <= 40 for line in confirmation_lines(clear, 40))
    assert confirmation_lines(None, 40) == []
