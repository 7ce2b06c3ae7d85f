"""Results for other programs."""

import csv
import json
import os
from collections.abc import Callable
from contextlib import AbstractContextManager
from dataclasses import replace
from pathlib import Path

import polars as pl
import pytest
from polars.testing import assert_frame_equal

from screener.errors import RunFileError
from screener.records import RESULT_COLUMNS
from screener.runs import export
from tests.runs.synthetic import PLAN, block, facts, files_in, stored_run, unfitted


@pytest.fixture
def results(tmp_path_factory: pytest.TempPathFactory) -> pl.DataFrame:
    scores = unfitted(block(0, 8), 3, note="outside support")
    with stored_run(tmp_path_factory.mktemp("run") / "a.run", scores) as run:
        return run.results()


def renamed(results: pl.DataFrame, *names: str) -> pl.DataFrame:
    return results.head(len(names)).with_columns(channel=pl.Series(names))


def test_parquet_is_exact(tmp_path: Path, results: pl.DataFrame) -> None:
    export(results, facts(8), PLAN, tmp_path / "a.parquet")
    assert_frame_equal(pl.read_parquet(tmp_path / "a.parquet"), results.drop("position"), check_exact=True)


def test_csv_has_the_columns_of_the_contract_and_numbers_that_read_back_exactly(
    tmp_path: Path, results: pl.DataFrame
) -> None:
    export(results, facts(8), PLAN, tmp_path / "a.CSV")
    with (tmp_path / "a.CSV").open(newline="") as file:
        header, *rows = list(csv.reader(file))
    assert header == list(RESULT_COLUMNS)
    column = header.index("r")
    assert [float(row[column]) if row[column] else None for row in rows] == results["r"].to_list()
    assert rows[3][header.index("reason")] == "outside the support of normal"
    assert rows[3][header.index("departure")] == ""


def test_json_says_what_was_run_and_is_exact(tmp_path: Path, results: pl.DataFrame) -> None:
    export(results, facts(8, Path("lab/rig.csv")), PLAN, tmp_path / "a.json")
    read = json.loads((tmp_path / "a.json").read_bytes())
    assert read["channels"] == results.drop("position").to_dicts()
    assert read["channels"][3]["r"] is None
    assert read["about"]["plan"]["alpha"] == 0.01
    assert read["about"]["plan"]["seed"] == 7
    assert read["about"]["table"]["path"] == "lab/rig.csv"
    assert read["about"]["table"]["fingerprint"] == "5f3c"
    assert read["about"]["table"]["set_aside"][0] == {"name": "lot", "reason": "text"}
    assert read["about"]["exported_by"].startswith("screener ")


def test_json_has_null_where_a_number_is_not_finite_and_any_path(tmp_path: Path, results: pl.DataFrame) -> None:
    odd = results.with_columns(step=pl.Series([float("inf"), float("nan"), -float("inf"), 0.5, *[None] * 4]))
    table = Path(os.fsdecode(b"lab/\xff.csv"))
    export(odd, facts(8, table), PLAN, tmp_path / "a.json")
    read = json.loads((tmp_path / "a.json").read_text())
    assert [row["step"] for row in read["channels"]] == [None, None, None, 0.5, None, None, None, None]
    assert Path(read["about"]["table"]["path"]) == table


def exported_channels(path: Path) -> list[str]:
    if path.suffix == ".json":
        return [row["channel"] for row in json.loads(path.read_text())["channels"]]
    frame = pl.read_csv(path) if path.suffix == ".csv" else pl.read_parquet(path)
    return frame["channel"].to_list()


@pytest.mark.parametrize("ending", [".csv", ".parquet", ".json"])
def test_rows_are_written_as_they_were_filtered_and_sorted(tmp_path: Path, results: pl.DataFrame, ending: str) -> None:
    path = tmp_path / f"a{ending}"
    shown = results.filter(pl.col("r").is_not_null()).sort("r", descending=True).head(3)
    export(shown, facts(8), PLAN, path)
    assert exported_channels(path) == shown["channel"].to_list()
    export(results.clear(), facts(8), PLAN, path)
    assert exported_channels(path) == []


def test_csv_defuses_what_a_spreadsheet_would_run_and_the_others_do_not_change_it(
    tmp_path: Path, results: pl.DataFrame
) -> None:
    names = ("=1+1", "+x", "-5V rail", "@sum", "\tx", "\rx", "a=b", "'=1")
    hostile = renamed(results, *names)
    for ending in ("csv", "parquet", "json"):
        export(hostile, facts(8), PLAN, tmp_path / f"a.{ending}")
    with (tmp_path / "a.csv").open(newline="") as file:
        defused = [row["channel"] for row in csv.DictReader(file)]
    assert defused == ["'=1+1", "'+x", "'-5V rail", "'@sum", "'\tx", "'\rx", "a=b", "'=1"]
    assert exported_channels(tmp_path / "a.parquet") == list(names)
    assert exported_channels(tmp_path / "a.json") == list(names)


def test_csv_leaves_negative_numbers_alone(tmp_path: Path, results: pl.DataFrame) -> None:
    export(results.with_columns(r=-pl.col("r")), facts(8), PLAN, tmp_path / "a.csv")
    read = pl.read_csv(tmp_path / "a.csv", infer_schema_length=None)
    assert read["r"].to_list() == (-results["r"]).to_list()


def test_names_with_separators_quotes_and_line_breaks_survive_in_csv(tmp_path: Path, results: pl.DataFrame) -> None:
    names = ('a,b"c', "two\nlines", "µ;机", " padded ")
    export(renamed(results, *names), facts(8), PLAN, tmp_path / "a.csv")
    with (tmp_path / "a.csv").open(newline="", encoding="utf-8") as file:
        assert [row["channel"] for row in csv.DictReader(file)] == list(names)


@pytest.mark.parametrize("name", ["a.xls", "a", "a.csv.gz", ".json"])
def test_an_unknown_extension_lists_the_known_ones(tmp_path: Path, results: pl.DataFrame, name: str) -> None:
    with pytest.raises(RunFileError, match=r"Use one of \.csv, \.parquet, \.json, \.md, \.html\.$") as caught:
        export(results, facts(8), PLAN, tmp_path / name)
    assert caught.value.exit_code == 4
    assert files_in(tmp_path) == []


def test_a_folder_or_a_missing_one_is_refused(tmp_path: Path, results: pl.DataFrame) -> None:
    (tmp_path / "a.csv").mkdir()
    with pytest.raises(RunFileError, match=r"Couldn't export to '.*a\.csv': it is a folder"):
        export(results, facts(8), PLAN, tmp_path / "a.csv")
    with pytest.raises(RunFileError, match="there is no such folder"):
        export(results, facts(8), PLAN, tmp_path / "nowhere" / "a.csv")
    assert files_in(tmp_path) == ["a.csv"]


def test_a_full_disk_leaves_the_earlier_export_whole(
    tmp_path: Path, results: pl.DataFrame, file_size_limit: Callable[[int], AbstractContextManager[None]]
) -> None:
    export(results, facts(8), PLAN, tmp_path / "a.csv")
    before = (tmp_path / "a.csv").read_bytes()
    with file_size_limit(100), pytest.raises(RunFileError, match=r"the disk is full\. Free some space"):
        export(results.head(4), facts(8), PLAN, tmp_path / "a.csv")
    assert (tmp_path / "a.csv").read_bytes() == before
    assert files_in(tmp_path) == ["a.csv"]
    export(results.head(4), facts(8), PLAN, tmp_path / "a.csv")
    assert len((tmp_path / "a.csv").read_bytes()) < len(before)


def test_a_folder_without_permission_is_refused(
    shared_folder: Path, ordinary_user: Callable[[], AbstractContextManager[None]], results: pl.DataFrame
) -> None:
    shared_folder.chmod(0o555)
    with ordinary_user(), pytest.raises(RunFileError, match="you may not write there"):
        export(results, facts(8), PLAN, shared_folder / "a.csv")


def test_remarks_and_names_from_a_hostile_table_do_not_break_json(tmp_path: Path, results: pl.DataFrame) -> None:
    table = replace(facts(8), remarks=('"}], \u2028 \ud800',))
    export(results, table, PLAN, tmp_path / "a.json")
    assert json.loads((tmp_path / "a.json").read_text())["about"]["table"]["remarks"] == ['"}], \u2028 \ud800']
