"""Every command on a real table."""

import json
import shlex
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import program, screener
from scipy import stats

from screener.records import RESULT_COLUMNS
from screener.runs import RunFile

FLAGGED = ["wait [s]"]


def test_score_prints_a_summary_and_nothing_else_on_standard_output(table: Path) -> None:
    outcome = screener("score", table)
    assert outcome.code == 0
    assert outcome.out.splitlines() == [
        "rig.csv: 200 rows x 3 channels",
        "held against normal, alpha 0.05, control each, filliben positions",
        "3 channels: 1 flagged, about 0.15 expected by chance",
    ]
    assert "set aside: operator (text" in outcome.err
    assert "run file: rig.run" in outcome.err


def test_score_again_takes_up_the_run_and_another_plan_gets_a_file_of_its_own(table: Path) -> None:
    first = screener("score", table)
    again = screener("score", table)
    assert again.out == first.out
    assert "scored before: 3 of 3 channels" in again.err
    assert "run file: rig-2.run" in screener("score", table, "--alpha", "0.01").err
    assert "run file: rig-2.run" in screener("score", table, "--alpha", "0.01").err
    assert "run file: named.run" in screener("score", table, "-o", "named.run").err


def test_a_changed_table_is_scored_anew(table: Path) -> None:
    screener("score", table)
    table.write_text(table.read_text() + "ann,1,2,3\n")
    outcome = screener("score", table)
    assert outcome.out.startswith("rig.csv: 201 rows x 3 channels")
    assert "run file: rig-2.run" in outcome.err


@pytest.mark.parametrize("command", ["score", "flagged"])
def test_fail_on_flag_turns_a_flag_into_exit_code_1(table: Path, command: str) -> None:
    assert screener(command, table).code == 0
    assert screener(command, table, "--fail-on-flag").code == 1
    assert screener(command, table, "--fail-on-flag", "--skip", "wait*").code == 0


@pytest.mark.parametrize("source", ["rig.csv", "rig.run"])
def test_flagged_prints_names_one_a_line(run_file: Path, source: str) -> None:
    outcome = screener("flagged", source)
    assert (outcome.code, outcome.out) == (0, "wait [s]\n")


def test_flagged_prints_nothing_when_nothing_is_flagged(table: Path) -> None:
    outcome = screener("flagged", table, "--skip", "wait*")
    assert (outcome.code, outcome.out) == (0, "")


@pytest.mark.parametrize("arguments", [("rig.csv",), ("rig.run",), ("open", "rig.csv"), ("--jobs", "1", "rig.csv")])
def test_without_a_terminal_the_summary_and_the_flagged_rows_are_printed(
    run_file: Path, arguments: tuple[str, ...]
) -> None:
    outcome = screener(*arguments)
    assert outcome.code == 0
    summary, rows = outcome.out.split("\n\n")
    assert summary == screener("score", "rig.csv").out.rstrip()
    assert [line.split()[0] for line in rows.splitlines()] == ["flagged", "wait"]


def test_the_program_itself_behaves_as_its_parts(table: Path) -> None:
    outcome = program("flagged", table, "--fail-on-flag", folder=Path.cwd())
    assert (outcome.code, outcome.out) == (1, "wait [s]\n")
    assert program(folder=Path.cwd()).code == 2


@pytest.mark.parametrize("source", ["rig.csv", "rig.run"])
@pytest.mark.parametrize("ending", [".csv", ".parquet", ".json"])
def test_export_writes_every_channel_with_the_agreed_columns(run_file: Path, source: str, ending: str) -> None:
    file = Path(f"out{ending}")
    outcome = screener("export", source, file)
    assert (outcome.code, outcome.out) == (0, "")
    assert f"3 channels written to out{ending}" in outcome.err
    exported = read_export(file)
    assert exported.columns == list(RESULT_COLUMNS)
    with RunFile.open(run_file, read_only=True) as run:
        results = run.results()
    for name in ("channel", "n", "verdict"):
        assert exported[name].to_list() == results[name].to_list()
    for name in ("r", "critical_r", "p", "q"):
        assert exported[name].to_list() == results[name].to_list()


def test_export_of_the_flagged_only(run_file: Path) -> None:
    screener("export", run_file, "out.csv", "--flagged-only")
    assert read_export(Path("out.csv"))["channel"].to_list() == FLAGGED


def read_export(file: Path) -> pl.DataFrame:
    if file.suffix == ".json":
        return pl.DataFrame(json.loads(file.read_text())["channels"], infer_schema_length=None)
    return pl.read_parquet(file) if file.suffix == ".parquet" else pl.read_csv(file)


def test_show_prints_numbers_that_hold_outside_the_program(run_file: Path) -> None:
    outcome = screener("show", run_file, "wait [s]")
    assert outcome.code == 0
    readings = pl.read_csv("rig.csv")["wait [s]"].to_numpy()
    r = stats.probplot(readings)[1][2]
    lines = outcome.out.splitlines()
    assert lines[0] == "wait [s]: 200 readings, 0 missing"
    assert lines[1].startswith(f"flagged against normal at alpha 0.05, control each: r {r:.4f} < critical 0.99")
    row = next(line.split() for line in lines if line.startswith("normal "))
    assert float(row[1]) == pytest.approx(r, abs=5e-5)
    assert float(row[4]) == pytest.approx(np.mean(readings), rel=1e-5)
    slope = stats.probplot(readings)[1][0]
    assert float(row[5]) == pytest.approx(slope, rel=1e-5)
    assert "expected if normal" in outcome.out


def test_show_finds_a_channel_by_the_part_of_its_name_that_no_other_has(run_file: Path) -> None:
    assert screener("show", run_file, "WAIT").out == screener("show", run_file, "wait [s]").out


def plot_in(text: str, view: str) -> str:
    """The plot under the heading of that view."""
    parts = text.split("\n\n")
    return parts[next(k for k, part in enumerate(parts) if part.startswith(f"{view}: ")) + 1].rstrip("\n")


def test_show_draws_against_another_family_in_ascii_and_at_the_size_asked_for(run_file: Path) -> None:
    outcome = screener(
        "show", run_file, "wait", "--against", "exponential", "--ascii", "--width", "60", "--height", "12"
    )
    assert outcome.code == 0
    assert outcome.out.isascii()
    assert "expected if exponential" in outcome.out
    plot = plot_in(outcome.out, "quantile").splitlines()
    assert len(plot) == 12
    assert max(map(len, plot)) <= 60


@pytest.mark.parametrize(
    ("view", "label"),
    [
        ("difference", "actual minus expected"),
        ("low-tail", "expected if normal"),
        ("high-tail", "expected if normal"),
        ("run-order", "row"),
        ("lag", "reading in the row before"),
        ("histogram", "readings"),
    ],
)
def test_show_prints_every_view_of_a_channel(run_file: Path, view: str, label: str) -> None:
    outcome = screener("show", run_file, "wait", "--view", view)
    assert outcome.code == 0
    assert label in plot_in(outcome.out, view.replace("-", " "))


def test_show_says_which_families_come_closest(run_file: Path) -> None:
    assert "closest" in screener("show", run_file, "wait").out
    assert "cannot be told apart at n = 200" in screener("show", run_file, "level_1").out


def test_show_says_why_a_channel_is_not_scored() -> None:
    Path("t.csv").write_text("a,b\n1,inf\n2,1\n3.3,inf\n")
    outcome = screener("show", "t.csv", "b")
    assert outcome.code == 0
    assert outcome.out.splitlines()[:2] == [
        "b: 1 readings, 2 missing",
        "not scored: too few readings: 1, at least 3 are needed",
    ]


def test_critical_gives_the_same_values_in_every_format() -> None:
    told = screener("critical", "20", "5000", "--alpha", "0.05").out.splitlines()
    table = screener("critical", "20", "5000", "--alpha", "0.05", "--format", "csv").out.splitlines()
    document = json.loads(screener("critical", "20", "5000", "--alpha", "0.05", "--format", "json").out)
    exact = [row["critical_r"] for row in document["critical"]]
    assert table == ["n,alpha_0.05", f"20,{exact[0]!r}", f"5000,{exact[1]!r}"]
    assert [float(line.split()[1]) for line in told[2:]] == pytest.approx(exact, abs=5e-5)


def test_critical_is_the_value_that_the_verdict_uses(run_file: Path) -> None:
    document = json.loads(screener("critical", "200", "--alpha", "0.05", "--format", "json").out)
    with RunFile.open(run_file, read_only=True) as run:
        assert run.results()["critical_r"].to_list() == [document["critical"][0]["critical_r"]] * 3


@pytest.mark.parametrize(
    ("options", "phrase"),
    [
        (("--family", "norml"), "no family named 'norml'"),
        (("--alpha", "2"), "between 0 and 1"),
        (("--positions", "x"), "no plotting positions 'x'"),
    ],
)
def test_critical_refuses_what_has_no_null(options: tuple[str, ...], phrase: str) -> None:
    outcome = screener("critical", "20", *options)
    assert (outcome.code, outcome.out) == (5, "")
    assert phrase in outcome.complaints[0]


def test_nulls_info_says_what_is_held_and_how_sure_it_is() -> None:
    outcome = screener("nulls", "info")
    assert outcome.code == 0
    assert "filliben positions" in outcome.out
    assert "normal" in outcome.out
    rows = [line.split() for line in outcome.out.splitlines() if " pp. " in line]
    assert [rows[0][0], rows[-1][0]] == ["3", "100,000"]
    assert max(float(row[2]) for row in rows) <= 0.1


def test_nulls_build_says_at_once_that_it_cannot_write_where_it_should() -> None:
    Path("file").touch()
    outcome = screener("nulls", "build", "-o", "file/table.npz")
    assert outcome.code == 1
    assert outcome.complaints[0].startswith("screener: Couldn't write 'file")


def test_null_tables_that_are_not_held_are_asked_for_in_a_sentence(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_CACHE_HOME", str(Path.cwd()))
    outcome = screener("nulls", "info", "--positions", "blom")
    assert outcome.code != 0
    assert outcome.out == ""
    assert "`screener nulls build --positions blom`" in outcome.complaints[0]


def test_the_command_that_goes_on_names_every_option_of_the_plan(table: Path) -> None:
    words = ["--alpha=0.01", "--control=fdr", "--skip=x *", "--skip=y", "--header-line=1", "-o", "my run.run"]
    assert screener("score", table, *words).code == 0
    sentence = screener("score", "my run.run").complaints[0]
    command = shlex.split(sentence.split("`")[1])
    assert command == ["screener", "score", "rig.csv", *words]
    again = screener(*command[1:])
    assert again.code == 0
    assert "scored before: 3 of 3 channels" in again.err
