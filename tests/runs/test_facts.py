"""What is known about a table survives the run file."""

import json
from dataclasses import asdict, replace
from pathlib import Path

from screener.records import Channel, Plan, Proposal, SourceFile
from screener.runs import RunFile
from screener.runs.facts import plan_from_json
from tests.runs.synthetic import facts


def test_dialect_proposals_files_and_censored_counts_come_back(tmp_path: Path) -> None:
    told = replace(
        facts(1),
        channels=(Channel(0, "p", "bar", below=3, above=1), Channel(1, "q")),
        dialect="semicolon, decimal comma, 3 preamble lines, units in line 5",
        proposals=(Proposal("-9999.0", 2, 17),),
        files=(SourceFile("run_1.csv", 0, 70), SourceFile("run_2.csv", 70, 50)),
    )
    RunFile.create(tmp_path / "a.run", told, Plan(), version="0", null_version="0").close()
    with RunFile.open(tmp_path / "a.run") as run:
        assert run.facts == told


def test_every_setting_of_a_plan_comes_back(tmp_path: Path) -> None:
    plan = Plan(
        separator=";",
        decimal=",",
        header_line=4,
        units_line=0,
        encoding="cp1252",
        comment="#",
        shape="rows",
        part="Sheet 2",
    )
    assert plan_from_json(json.dumps(asdict(plan))) == plan


def test_a_plan_of_before_these_settings_is_read_with_their_defaults() -> None:
    assert plan_from_json('{"family": "normal", "alpha": 0.05}') == Plan()
