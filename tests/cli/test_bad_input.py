"""Whatever a user gets wrong ends in one sentence and the documented exit code."""

import os
import shutil
import sqlite3
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from command_line import Outcome, screener

from screener.runs import RunFile

COMMANDS: dict[str, Callable[[str], tuple[str, ...]]] = {
    "open": lambda path: (path,),
    "score": lambda path: ("score", path),
    "flagged": lambda path: ("flagged", path),
    "export": lambda path: ("export", path, "out.csv"),
    "show": lambda path: ("show", path, "a"),
}

BAD_TABLES: dict[str, tuple[bytes | None, str]] = {
    "missing.csv": (None, "there is no such file"),
    "empty.csv": (b"", "the file is empty"),
    "rubbish.csv": (np.random.default_rng(1).bytes(3000), "binary data"),
    "rubbish.parquet": (np.random.default_rng(1).bytes(3000), "binary data"),
    "cut.parquet": (b"PAR1" + bytes(200), ""),
    "words.csv": (b"a,b\nx,y\nz,w\n", "no column holds readings"),
    "head.csv": (b"a,b\n", "no readings"),
    "blank.csv": (b"a,b\n,\n,\n,\n", "no column holds readings"),
}


def assert_refused(outcome: Outcome, code: int) -> str:
    """The one sentence on standard error; nothing is on standard output."""
    assert outcome.code == code, outcome.err
    assert outcome.out == ""
    assert len(outcome.complaints) == 1, outcome.err
    assert outcome.err.count("\n") == 1, outcome.err
    assert outcome.complaints[0].endswith((".", "`", "?"))
    return outcome.complaints[0]


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize("name", BAD_TABLES)
def test_an_unusable_table_is_one_sentence_and_exit_code_3(name: str, command: str) -> None:
    content, reason = BAD_TABLES[name]
    if content is not None:
        Path(name).write_bytes(content)
    sentence = assert_refused(screener(*COMMANDS[command](name)), 3)
    assert repr(name) in sentence
    assert reason in sentence
    assert not list(Path().glob("*.run"))


@pytest.mark.parametrize("command", COMMANDS)
def test_a_folder_is_no_table(command: str) -> None:
    Path("folder.csv").mkdir()
    assert "directory" in assert_refused(screener(*COMMANDS[command]("folder.csv")), 3)


@pytest.mark.parametrize(
    ("content", "reasons"),
    [
        ("a,b\n1.5,2.5\n", ["too few readings: 1, at least 3 are needed"] * 2),
        ("a,b\n1.5,inf\n2.5,-inf\n3.7,2\n4,inf\n", [None, "too few readings: 1, at least 3 are needed"]),
        ("a,a\n1.5,1\n2.5,2\n3.7,2.7\n4,7\n", [None, None]),
        ("a,b\n1.5,\n2.5,\n3.7,\n4,\n", [None]),
    ],
    ids=["one reading per channel", "infinite values", "duplicate names", "an empty channel beside a full one"],
)
def test_what_cannot_be_judged_is_not_scored_with_its_reason(content: str, reasons: list[str | None]) -> None:
    Path("t.csv").write_text(content)
    outcome = screener("score", "t.csv")
    assert (outcome.code, outcome.complaints) == (0, [])
    with RunFile.open(Path("t.run"), read_only=True) as run:
        results = run.results()
    assert results["reason"].to_list() == reasons
    assert [verdict == "not scored" for verdict in results["verdict"]] == [reason is not None for reason in reasons]
    assert results["channel"].n_unique() == results.height


@pytest.mark.parametrize(
    ("options", "phrase"),
    [
        (("--family", "norml"), "There is no family named 'norml'. Known: normal, logistic"),
        (("--positions", "nowhere"), "There are no plotting positions 'nowhere'. Known: filliben"),
        (("--positions", "7"), "plotting positions"),
        (("--alpha", "0"), "alpha 0: it must lie between 0 and 1"),
        (("--alpha", "1"), "alpha 1: it must lie between 0 and 1"),
        (("--alpha", "nan"), "it must lie between 0 and 1"),
        (("--channels", "zzz*"), "'zzz*'"),
        (("--skip", "*"), ""),
    ],
)
def test_an_impossible_plan_is_one_sentence_and_exit_code_5(table: Path, options: tuple[str, ...], phrase: str) -> None:
    assert phrase in assert_refused(screener("score", table, *options), 5)


@pytest.mark.parametrize(
    ("arguments", "phrase"),
    [
        (("score",), "Missing argument 'TABLE'"),
        (("score", "rig.csv", "--alpha", "x"), "'x' is not a valid float"),
        (("score", "rig.csv", "--jobs", "0"), "0 is not in the range"),
        (("score", "rig.csv", "--no-such"), "--no-such"),
        (("score", "rig.run"), "`screener score rig.csv -o rig.run` goes on with it"),
        (("rig.run", "--alpha", "0.01"), "'rig.run' is a run file and keeps the plan"),
        (("rig.run", "-o", "other.run"), "-o goes with a table"),
        (("show", "rig.run", "nobody"), "There is no channel 'nobody'; there are for instance 'level_1 [mm]'"),
        (("show", "rig.run", "level"), "2 channels match 'level'"),
        (("show", "rig.run", "operator"), "Column 'operator' was set aside: text"),
        (("export", "rig.run", "rig.run"), "'rig.run' is what the results come from"),
        (("export", "rig.run", "rig.csv"), "'rig.csv' is what the results come from"),
        (("export", "rig.csv", "./rig.csv"), "'rig.csv' is what the results come from"),
        (("scor", "rig.csv"), "There is no command and no file 'scor'"),
        (("critical", "2"), "2 is not in the range"),
    ],
)
def test_wrong_usage_is_one_sentence_and_exit_code_2(run_file: Path, arguments: tuple[str, ...], phrase: str) -> None:
    content = Path("rig.csv").read_bytes(), run_file.read_bytes()
    assert phrase in assert_refused(screener(*arguments), 2)
    assert (Path("rig.csv").read_bytes(), run_file.read_bytes()) == content


@pytest.mark.parametrize(
    ("arguments", "phrase"),
    [
        (("score", "rig.csv", "-o", "no/such/x.run"), "there is no such folder"),
        (("score", "rig.csv", "-o", "."), "it is a folder"),
        (("score", "rig.csv", "-o", "rig.csv"), "it is not a run file"),
        (("score", "rig.csv", "--alpha", "0.01", "-o", "rig.run"), "it holds another table, table content or plan"),
        (("score", "other.csv", "-o", "rig.run"), "it holds another table, table content or plan"),
        (("export", "rig.run", "x.xls"), "Use one of .csv, .parquet, .json"),
        (("export", "rig.run", "no/such/x.csv"), "there is no such folder"),
        (("flagged", "text.run"), "it is not a run file"),
        (("old.run",), "it has schema 99"),
        (("flagged", "damaged.run"), "damaged"),
    ],
)
def test_an_unusable_run_or_export_file_is_one_sentence_and_exit_code_4(
    run_file: Path, arguments: tuple[str, ...], phrase: str
) -> None:
    Path("other.csv").write_text("a\n1\n2\n4\n")
    Path("text.run").write_bytes(bytes(range(256)))
    shutil.copy(run_file, "old.run")
    with sqlite3.connect("old.run") as connection:
        connection.execute("PRAGMA user_version = 99")
    connection.close()
    damage(run_file, Path("damaged.run"))
    assert phrase in assert_refused(screener(*arguments), 4)


def damage(run_file: Path, copy: Path) -> None:
    """A copy with everything after its first page overwritten."""
    content = run_file.read_bytes()
    copy.write_bytes(content[:4096] + b"\xa5" * (len(content) - 4096))


@pytest.mark.parametrize("how", ["damaged", "of another schema", "foreign", "a folder"])
def test_an_unusable_run_file_beside_the_table_is_left_alone_and_another_name_taken(run_file: Path, how: str) -> None:
    if how == "damaged":
        damage(run_file, run_file)
    elif how == "of another schema":
        with sqlite3.connect(run_file) as connection:
            connection.execute("PRAGMA user_version = 99")
        connection.close()
    else:
        run_file.unlink()
        run_file.mkdir() if how == "a folder" else run_file.write_text("a note of the user's")
    content = None if run_file.is_dir() else run_file.read_bytes()
    outcome = screener("score", "rig.csv")
    assert outcome.code == 0
    assert "run file: rig-2.run" in outcome.err
    assert content is None or run_file.read_bytes() == content


def test_a_file_named_like_a_command_is_reached_by_its_path(table: Path) -> None:
    table.rename("flagged")
    assert screener("flagged").code == 2
    assert screener("./flagged").out.startswith("flagged: 200 rows x 3 channels")
    assert screener("score", "flagged").code == 0


@pytest.mark.parametrize("command", COMMANDS)
def test_control_characters_of_names_and_paths_never_reach_the_terminal(command: str) -> None:
    path = Path("re\x1b[31md\x9b.csv")
    path.write_text('"a\x1b]0;owned\x07","b\x1b[2J"\n' + "".join(f"{k**1.5},{k * k}\n" for k in range(50)))
    outcome = screener(*COMMANDS[command](str(path)))
    assert outcome.code == 0
    assert set(outcome.out + outcome.err) & {"\x1b", "\x9b", "\x07"} == set()
    again = screener("score", path, "--\x1b[31m")
    assert (again.code, "\x1b" in again.err) == (2, False)


def test_a_pipe_is_refused_without_waiting_for_what_it_brings() -> None:
    os.mkfifo("pipe")
    assert "send it to standard input" in assert_refused(screener("score", "pipe"), 3)
