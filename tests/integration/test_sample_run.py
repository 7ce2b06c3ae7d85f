"""The sample runs, scored by the program and held against the file that says how they were made."""

import shutil
from pathlib import Path

import polars as pl
import pytest
from command_line import program, screener

from screener.runs import RunFile

SAMPLES = Path(__file__).parents[2] / "sample_runs"


def truth(name: str) -> pl.DataFrame:
    return pl.read_csv(SAMPLES / "truth.csv", infer_schema_length=None).filter(pl.col("table") == name)


@pytest.mark.parametrize(("name", "channels"), [("pump_rig.parquet", 240), ("pump_rig_short.csv", 40)])
def test_a_sample_run_gives_its_channels_and_sets_the_rest_aside(tmp_path: Path, name: str, channels: int) -> None:
    shutil.copy(SAMPLES / name, tmp_path)
    outcome = program("score", name, folder=tmp_path)
    assert outcome.code == 0
    assert f"{channels} channels: " in outcome.out
    run_path = tmp_path / Path(name).with_suffix(".run")
    with RunFile.open(run_path, read_only=True) as run:
        assert [channel.name for channel in run.facts.channels] == truth(name)["channel"].to_list()
        assert [channel.unit for channel in run.facts.channels] == truth(name)["unit"].to_list()
        reasons = {column.name: column.reason for column in run.facts.set_aside}
        assert run.results()["missing"].to_list() == truth(name)["missing"].to_list()
    assert set(reasons) == {
        *("timestamp", "cycle", "operator"),
        *("relief_valve_open", "supply_setpoint [V]", "spare_07 [mV]"),
    }
    assert all(reasons.values())


def test_every_departing_channel_of_the_sample_run_is_flagged(tmp_path: Path) -> None:
    outcome = screener("score", SAMPLES / "pump_rig.parquet", "-o", tmp_path / "x.run")
    assert outcome.code == 0
    names = set(screener("flagged", tmp_path / "x.run").out.splitlines())
    departing = set(truth("pump_rig.parquet").filter(pl.col("right_answer") == "flagged")["channel"])
    assert len(departing) == 87
    assert departing <= names


def test_the_independent_unrounded_normal_channels_of_the_sample_run_are_clear(tmp_path: Path) -> None:
    # Thirteen channels at alpha .01: one flagged by chance is to be expected in one of eight such sets, three in none.
    outcome = screener("score", SAMPLES / "pump_rig.parquet", "-o", tmp_path / "x.run", "--alpha", "0.01")
    assert outcome.code == 0
    names = set(screener("flagged", tmp_path / "x.run").out.splitlines())
    normal = set(truth("pump_rig.parquet").filter(pl.col("class") == "normal")["channel"])
    assert len(normal) == 13
    assert len(normal & names) <= 2
