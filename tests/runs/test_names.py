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
