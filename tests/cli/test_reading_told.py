"""What the reader did with a table is told: by `score` on standard error, by `show`, and on the screen."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from screen_text import shows

from screener.ui.app import ScreenerApp
from screener.ui.source import Source


@pytest.fixture
def runs() -> str:
    """A pattern for two files of one layout, as a logger writes them: words, limits, a code for no reading."""
    rng = np.random.default_rng(3)
    for number in (1, 2):
        force = [f"{value:.3f}" for value in rng.normal(5.0, 1.0, 60)]
        heat = [f"{value:.2f}" for value in rng.normal(300.0, 2.0, 60)]
        force[3:5] = ["OVER", "OVER"]
        heat[10], heat[20] = "<290", "-9999"
        pairs = zip(force, heat, "ab" * 30, strict=True)
        rows = "\n".join(";".join(cells).replace(".", ",") for cells in pairs)
        Path(f"run_{number}.csv").write_text(f"force;heat;side\nN;K;\n{rows}\n")
    return "run_*.csv"


def test_score_tells_how_the_table_was_read(runs: str) -> None:
    told = screener("score", runs).err
    assert "  read as: semicolon, decimal comma, units in line 2\n" in told
    assert "  files: run_1.csv (rows 1 to 60), run_2.csv (rows 61 to 120)\n" in told
    assert "4 cells hold 'OVER' in force: read as missing." in told
    assert "--missing=-9999 leaves it out" in told
    assert "set aside: side (text" in told
    assert "run file: run.run" in told


def test_show_tells_it_too_and_counts_the_readings_beyond_a_limit(runs: str) -> None:
    screener("score", runs)
    shown = screener("show", "run.run", "heat").out
    assert "heat: 120 readings, 0 missing, 2 below a detection limit" in shown
    told = shown[shown.index("how the table was read") :]
    assert "read as: semicolon, decimal comma" in told
    assert "4 cells hold 'OVER' in force" in told
    assert "run_2.csv (rows 61 to 120)" in told


async def test_the_page_on_the_table_has_dialect_words_proposals_and_files(runs: str) -> None:
    screener("score", runs)
    async with ScreenerApp(Source("run.run", None, Path("run.run"))).run_test(size=(150, 45)) as pilot:
        await shows(pilot, "of 2 channels")
        await pilot.press("i")
        text = await shows(pilot, "Columns set aside: 1")
        assert "semicolon, decimal comma, units in line 2" in text
        assert "4 cells hold 'OVER' in force" in text
        assert text.count("--missing=-9999") == 1
        assert "run_2.csv  rows 61 to 120" in text


def test_readings_beyond_a_detection_limit_are_a_condition_in_show_and_in_the_export(runs: str) -> None:
    screener("score", runs)
    assert "conditions: 2 below detection limit" in screener("show", "run.run", "heat").out
    screener("export", "run.run", "out.csv")
    conditions = dict(pl.read_csv("out.csv").select("channel", "conditions").iter_rows())
    assert conditions["heat"].startswith("2 below detection limit")
    assert "detection limit" not in (conditions["force"] or "")
