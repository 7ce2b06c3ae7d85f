"""Where the run file of a table goes."""

from pathlib import Path

import pytest

from screener.runs import default_run_path


@pytest.mark.parametrize(
    ("table", "run"),
    [
        ("pump_rig.parquet", "pump_rig.run"),
        ("data/pump_rig.csv.gz", "data/pump_rig.run"),
        ("LOT7.CSV", "LOT7.run"),
        ("a.b.tsv.zst", "a.b.run"),
        ("log.2024-05-01", "log.2024-05-01.run"),
        ("readings", "readings.run"),
        ("readings.gz", "readings.run"),
        (".csv", ".csv.run"),
        ("/mnt/lab/line 3.arrow", "/mnt/lab/line 3.run"),
    ],
)
def test_a_run_file_stands_beside_its_table_with_the_ending_changed(table: str, run: str) -> None:
    assert default_run_path(Path(table)) == Path(run)


@pytest.mark.parametrize(
    ("pattern", "run"),
    [
        ("run_*.csv", "run.run"),
        ("data/lot-7_[0-9][0-9].csv.gz", "data/lot-7.run"),
        ("*_pump.parquet", "pump.run"),
        ("2024-0?.csv", "2024-0.run"),
        ("*.csv", "tables.run"),
        ("run_*", "run.run"),
    ],
)
def test_the_run_file_of_several_tables_is_named_by_what_their_names_have_in_common(pattern: str, run: str) -> None:
    assert default_run_path(Path(pattern)) == Path(run)


def test_a_table_whose_name_only_looks_like_a_pattern_keeps_its_name(tmp_path: Path) -> None:
    (tmp_path / "force [N].csv").touch()
    assert default_run_path(tmp_path / "force [N].csv") == tmp_path / "force [N].run"
