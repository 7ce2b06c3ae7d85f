"""Reports: Markdown and HTML that stand by themselves and say all that is needed to repeat the run."""

import re
from html.parser import HTMLParser
from pathlib import Path
from typing import ClassVar

import numpy as np
import polars as pl
import pytest
from command_line import screener

from screener.records import Decision
from screener.runs import RunFile


class Checked(HTMLParser):
    """Notes tags, attributes and text, and that every tag is closed."""

    VOID: ClassVar[set[str]] = {"meta", "br", "path", "rect"}

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []
        self.text = ""

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.text += data


@pytest.fixture
def decided(run_file: Path) -> Path:
    """The run of the small table, with a decision and a note."""
    with RunFile.open(run_file) as run:
        run.decide([2], Decision.TRANSFORM)
        run.annotate([2], "waiting <b>times</b> | *ask*")
    return run_file


def test_the_html_report_is_one_whole_file_with_a_drawing_of_every_flagged_channel(decided: Path) -> None:
    assert screener("export", decided, "out.html").code == 0
    page = Checked()
    page.feed(Path("out.html").read_text())
    assert page.open == []
    assert page.tags.count("svg") == 1
    assert "script" not in page.tags
    assert not [name for name, _ in page.attributes if name in {"src", "href", "onclick", "onload"}]
    with RunFile.open(decided, read_only=True) as run:
        fingerprint, version = run.facts.fingerprint, run.version
    for said in (
        "3 channels: 1 flagged, about 0.15 expected by chance.",
        fingerprint,
        f"screener {version}",
        "operator",
        "wait [s]",
        "use transformed",
        "waiting <b>times</b> | *ask*",
        "governing standard",
    ):
        assert said in page.text


def test_every_reading_of_a_small_channel_is_drawn(decided: Path) -> None:
    screener("export", decided, "out.html")
    dots = re.search(r'class="points" d="([^"]*)"', Path("out.html").read_text())
    assert dots is not None
    assert dots.group(1).count("M") == 200


def test_the_markdown_report_says_the_same_with_text_plots(decided: Path) -> None:
    assert screener("export", decided, "out.md").code == 0
    text = Path("out.md").read_text()
    assert text.startswith("# Screen of rig.csv\n\n3 channels: 1 flagged, about 0.15 expected by chance.")
    assert "### wait \\[s\\]" in text
    assert "expected if normal" in text.split("```text")[1]
    assert r"waiting \<b\>times\</b\> \| \*ask\*" in text
    assert len({line.count("|") - line.count(r"\|") for line in text.splitlines() if line.startswith("| wait")}) <= 2
    assert "## Columns set aside: 1" in text
    assert "governing standard" in text


def test_hostile_names_stay_text_in_both_reports() -> None:
    name = "<script>alert(1)</script>"
    readings = np.random.default_rng(1).exponential(size=50)
    pl.DataFrame({name: readings, "[x](javascript:1)": readings[::-1]}).write_csv("h.csv")
    assert screener("score", "h.csv").code == 0
    for ending in (".html", ".md"):
        assert screener("export", "h.run", f"out{ending}").code == 0
    assert "<script" not in Path("out.html").read_text()
    assert "](javascript" not in Path("out.md").read_text()


def test_a_report_that_cannot_be_written_is_refused_in_a_sentence(decided: Path) -> None:
    outcome = screener("export", decided, "missing/out.html")
    assert outcome.code == 4
    assert "Couldn't export to 'missing/out.html': there is no such folder" in outcome.complaints[0]
