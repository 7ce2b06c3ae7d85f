"""Plan files: what `screener plan` writes, what --plan reads, and what is said of faults."""

import tomllib
from dataclasses import asdict
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from hypothesis import given
from hypothesis import strategies as st

from screener.cli.plan_file import read_plan
from screener.cli.plan_text import plan_lines
from screener.records import Channel, Control, Plan, SetAside, TableFacts
from screener.runs import RunFile

texts = st.text(st.characters(exclude_categories=["Cs"]))
names = st.lists(texts.filter(bool)).map(tuple)
plans = st.builds(
    Plan,
    family=st.sampled_from(["normal", "Weibull", "F"]),
    alpha=st.floats(0.0, 1.0, exclude_min=True, exclude_max=True),
    control=st.sampled_from(Control),
    positions=st.sampled_from(["filliben", "0.375"]),
    match=st.booleans(),
    seed=st.integers(),
    channels=names,
    skip=names,
    missing=names,
    expect=st.lists(texts.filter(bool), unique=True).map(lambda keys: tuple(f"{key}=Cauchy" for key in keys)),
    separator=texts,
    header_line=st.integers(-1),
    shape=st.sampled_from(["", "columns", "rows", "long"]),
    part=texts,
)


def plan_of(run: str) -> Plan:
    with RunFile.open(Path(run), read_only=True) as file:
        return file.plan


@given(plan=plans)
def test_a_plan_that_is_written_is_read_back_the_same(tmp_path_factory: pytest.TempPathFactory, plan: Plan) -> None:
    path = tmp_path_factory.getbasetemp() / "any.toml"
    path.write_text("\n".join(plan_lines(plan)), encoding="utf-8", newline="\n")
    found = read_plan(path)
    assert Plan(**{**found, "control": Control(found["control"])}) == plan


def test_the_printed_plan_holds_every_setting_at_its_default() -> None:
    printed = tomllib.loads(screener("plan").out)
    flat = {**printed, **printed.pop("table"), "expect": [*printed.pop("expect")]}
    flat.pop("table", None)
    defaults = {name: list(value) if isinstance(value, tuple) else value for name, value in asdict(Plan()).items()}
    assert flat == defaults


def test_a_run_under_a_plan_is_that_under_the_same_options(table: Path) -> None:
    options = ["--alpha", "0.01", "--expect", "wait*=exponential", "--control", "fdr", "--skip", "level_2*"]
    assert screener("plan", table, *options, "-o", "rig.toml").code == 0
    assert screener("score", table, *options, "-o", "options.run").code == 0
    assert screener("score", table, "--plan", "rig.toml", "-o", "plan.run").code == 0
    assert plan_of("plan.run") == plan_of("options.run")
    with (
        RunFile.open(Path("plan.run"), read_only=True) as one,
        RunFile.open(Path("options.run"), read_only=True) as two,
    ):
        assert one.results().equals(two.results())
        assert one.results()["family"].to_list() == ["normal", "exponential"]


def test_an_option_beside_a_plan_overrides_its_setting_and_no_other(table: Path) -> None:
    Path("p.toml").write_text('alpha = 0.2\nmissing = [-9999, "n.d."]\n[expect]\n"wait*" = "gamma"\n')
    assert screener("score", table, "--plan", "p.toml", "--alpha", "0.01", "-o", "a.run").code == 0
    assert plan_of("a.run") == Plan(alpha=0.01, missing=("-9999", "n.d."), expect=("wait*=gamma",))
    assert screener("--plan", "p.toml", table, "--expect", "level*=F", "-o", "b.run").code == 0
    assert plan_of("b.run") == Plan(alpha=0.2, missing=("-9999", "n.d."), expect=("level*=F",))


def test_the_plan_of_a_run_is_printed_from_its_run_file(table: Path) -> None:
    assert screener("score", table, "--alpha", "0.02", "--expect", "wait [s]=gamma", "-o", "a.run").code == 0
    Path("again.toml").write_text(screener("plan", "a.run").out, encoding="utf-8")
    assert screener("score", table, "--plan", "again.toml", "-o", "a.run").code == 0
    assert plan_of("a.run") == Plan(alpha=0.02, expect=("wait [s]=gamma",))
    with RunFile.open(Path("a.run"), read_only=True) as run:
        assert run.results()["family"].to_list() == ["normal", "normal", "gamma"]


def test_what_was_found_in_a_table_stands_beside_its_settings_and_can_be_taken_as_it_stands() -> None:
    level = np.random.default_rng(3).normal(20.0, 1.0, (400, 3)).round(3)
    level[::40, 0] = -9999
    frame = pl.DataFrame(level, schema=["level_1 [mm]", "level_2 [mm]", "level_3 [mm]"])
    frame.with_columns(operator=pl.lit("ann")).write_csv("t.csv", separator=";")
    lines = screener("plan", "t.csv").out.splitlines()
    assert "# Found: semicolon" in "\n".join(lines)
    assert any(line.startswith("#   operator: ") for line in lines)
    assert '# "level_*" = "normal"  # 3 channels' in lines
    (proposed,) = (line for line in lines if line.startswith("# missing ="))
    taken = [proposed.removeprefix("# ") if line == proposed else line for line in lines if line != "missing = []"]
    Path("t.toml").write_text("\n".join(taken), encoding="utf-8")
    assert screener("score", "t.csv", "--plan", "t.toml").code == 0
    with RunFile.open(Path("t.run"), read_only=True) as run:
        assert run.results()["missing"].to_list() == [10, 0, 0]


def test_names_of_a_table_cannot_become_settings() -> None:
    evil = 'x"\n]alpha = 0.9\n#'
    facts = TableFacts(
        Path(f"{evil}.csv"),
        "CSV",
        9,
        tuple(Channel(k, f"{evil}*[{k}") for k in range(3)),
        (SetAside(evil, evil),),
        "",
        remarks=(evil,),
        dialect=evil,
    )
    read = tomllib.loads("\n".join(plan_lines(Plan(), facts)))
    assert read == tomllib.loads("\n".join(plan_lines(Plan())))


def test_every_fault_of_a_plan_is_told_at_once_by_its_key(table: Path) -> None:
    Path("p.toml").write_text(
        'alpha = 5\nfamly = "normal"\ncontrol = "both"\nseparator = ";"\nmatch = 1\nskip = "a"\nmissing = [true]\n'
        '[expect]\n"wait*" = "nrmal"\nseed = 3\n[table]\nheader_line = -2\nshape = "round"\n'
    )
    outcome = screener("score", table, "--plan", "p.toml")
    assert (outcome.code, outcome.out) == (5, "")
    (sentence,) = outcome.complaints
    for told in (
        "alpha is 5: it must be a number between 0 and 1",
        "there is no setting 'famly', perhaps 'family' is meant",
        "control is 'both': it must be one of 'each', 'fdr'",
        "separator belongs in [table]",
        "match is 1: it must be true or false",
        "skip is 'a': it must be a list of texts",
        "missing is [True]: it must be a list of cell texts",
        "expect.'wait*' is 'nrmal': There is no family named 'nrmal'",
        "seed belongs above the first section",
        "table.header_line is -2: it must be a whole number, -1 or more",
        "table.shape is 'round': it must be one of",
        "`screener plan` prints a plan that works.",
    ):
        assert told in sentence
    assert not list(Path().glob("*.run"))


@pytest.mark.parametrize(
    ("content", "reason"),
    [
        (None, "No such file"),
        (b"alpha = \n", "line 1"),
        (b"\xff\xfe", "not UTF-8"),
        (b"expect = 3\n", "expect must be a section, [expect]"),
        (b'[expect]\n"" = "normal"\n', "a pattern must not be empty"),
    ],
)
def test_an_unreadable_plan_is_one_sentence_and_exit_code_5(table: Path, content: bytes | None, reason: str) -> None:
    if content is not None:
        Path("p.toml").write_bytes(content)
    outcome = screener("score", table, "--plan", "p.toml")
    assert (outcome.code, outcome.out, len(outcome.complaints)) == (5, "", 1)
    assert "'p.toml'" in outcome.err
    assert reason in outcome.err
    assert outcome.err.count("\n") == 1


def test_a_plan_written_by_an_editor_with_a_byte_order_mark_is_read(table: Path) -> None:
    Path("p.toml").write_bytes(b"\xef\xbb\xbfalpha = 0.3\r\n")
    assert screener("score", table, "--plan", "p.toml", "-o", "a.run").code == 0
    assert plan_of("a.run").alpha == 0.3


def test_a_plan_is_refused_with_a_run_file_and_never_overwritten(table: Path, run_file: Path) -> None:
    Path("p.toml").write_text("alpha = 0.3\n")
    refused = screener("flagged", run_file, "--plan", "p.toml")
    assert refused.code == 2
    assert "--plan goes with a table" in refused.err
    taken = screener("plan", table, "-o", "p.toml")
    assert (taken.code, taken.out) == (5, "")
    assert "that exists" in taken.err
    assert Path("p.toml").read_text() == "alpha = 0.3\n"


def test_an_expectation_that_fits_no_channel_is_told(table: Path) -> None:
    outcome = screener("score", table, "--expect", "runout*=half-normal")
    assert outcome.code == 0
    assert "No column matches 'runout*'." in outcome.err
