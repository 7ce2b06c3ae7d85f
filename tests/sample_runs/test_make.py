"""The sample runs come out of their script, and are what their truth file says."""

import subprocess
import sys
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

FOLDER = Path(__file__).parents[2] / "sample_runs"
LOG_COLUMNS = {"timestamp", "cycle", "operator", "relief_valve_open", "supply_setpoint [V]", "spare_07 [mV]"}
TABLES = ("pump_rig.parquet", "pump_rig_short.csv")


def read(path: Path) -> pl.DataFrame:
    """The table at that path, every column inferred from all of its cells."""
    return pl.read_parquet(path) if path.suffix == ".parquet" else pl.read_csv(path, infer_schema_length=None)


def truth_of(table: str) -> pl.DataFrame:
    """The lines of the truth file for one table."""
    return read(FOLDER / "truth.csv").filter(pl.col("table") == table)


@pytest.fixture(scope="module")
def made_again(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the files as the script writes them now."""
    folder = tmp_path_factory.mktemp("sample_runs")
    subprocess.run([sys.executable, str(FOLDER / "make.py"), str(folder)], check=True, capture_output=True)
    return folder


@pytest.mark.parametrize("name", [*TABLES, "truth.csv"])
def test_the_script_makes_the_same_values_again(made_again: Path, name: str) -> None:
    assert_frame_equal(read(made_again / name), read(FOLDER / name), check_exact=True)


@pytest.mark.parametrize(("table", "shape"), [(TABLES[0], (4000, 240)), (TABLES[1], (300, 40))])
def test_a_table_holds_the_channels_of_the_truth_file_and_a_log(table: str, shape: tuple[int, int]) -> None:
    frame = read(FOLDER / table)
    channels = [name for name in frame.columns if name not in LOG_COLUMNS]
    assert (frame.height, len(channels)) == shape
    assert channels == truth_of(table)["channel"].to_list()
    assert len(frame.columns) == len(channels) + len(LOG_COLUMNS)


@pytest.mark.parametrize("table", TABLES)
def test_every_reading_is_a_whole_multiple_of_the_stated_step(table: str) -> None:
    frame = read(FOLDER / table)
    for channel, step in truth_of(table).select("channel", "step").iter_rows():
        counts = frame[channel].drop_nulls().to_numpy() / step
        assert np.abs(counts - np.rint(counts)).max() < 1e-6, channel


@pytest.mark.parametrize("table", TABLES)
def test_missing_readings_are_as_many_as_stated(table: str) -> None:
    truth = truth_of(table)
    counted = [read(FOLDER / table)[channel].null_count() for channel in truth["channel"]]
    assert counted == truth["missing"].to_list()


def test_independent_and_serial_normal_channels_follow_themselves_as_stated() -> None:
    frame = read(FOLDER / TABLES[0])
    normal = truth_of(TABLES[0]).filter(pl.col("class").str.starts_with("normal"), pl.col("missing") == 0)
    ordinary = normal.filter((pl.col("clipped_low") + pl.col("clipped_high")) == 0)
    for channel, ar in ordinary.select("channel", "ar").iter_rows():
        coefficients = [float(word) for word in (ar or "").split()]
        lag_1 = coefficients[0] / (1.0 - sum(coefficients[1:])) if coefficients else 0.0
        away = frame[channel].to_numpy() - frame[channel].mean()
        assert np.sum(away[1:] * away[:-1]) / np.sum(away**2) == pytest.approx(lag_1, abs=5.0 / np.sqrt(frame.height))


@pytest.mark.parametrize("column", ["right_answer", "class"])
def test_the_counts_in_the_description_are_those_of_the_truth_file(column: str) -> None:
    description = (FOLDER / "truth.md").read_text(encoding="utf-8")
    each_table = [(pl.col("table") == table).sum().alias(table) for table in TABLES]
    lines = read(FOLDER / "truth.csv").group_by(pl.col("right_answer").alias("answer"), column).agg(each_table).rows()
    for _, name, full, short in lines:
        line = f"| {name} | {full} | {short} |"
        assert (line if column == "class" else f"| **right answer {name}** | **{full}** | **{short}** |") in description
