"""What the reader did with the table: what it set aside and what it remarks, with the blocks that failed."""

from __future__ import annotations

from collections.abc import Sequence

from screener.records import SourceFile
from screener.ui.messages import RunOpened
from screener.ui.palette import PLAIN, QUIET, STRONG
from screener.ui.screens.page import Page
from screener.ui.shown import shown
from screener.ui.widgets.lines import Line, plain


def reading_page(run: RunOpened, lost: Sequence[str]) -> Page:
    """A page on one run."""
    facts, plan = run.facts, run.plan
    asked = [proposal.sentence() for proposal in facts.proposals]
    paragraphs: list[Line] = [
        plain("The table as it was read", STRONG),
        plain(f"  file          {shown(str(facts.path))}"),
        plain(f"  format        {shown(facts.format)}"),
        *([plain(f"  read as       {shown(facts.dialect)}")] if facts.dialect else []),
        plain(f"  size          {facts.rows:,} rows x {len(facts.channels):,} channels"),
        plain(f"  fingerprint   {facts.fingerprint}"),
        plain(f"  run file      {shown(str(run.run_path))}"),
        plain(f"  positions     {plan.positions}"),
        plain(""),
        *_section("Remarks of the reader", [shown(remark) for remark in facts.remarks if remark not in asked], "none"),
        *_section("Proposals, not applied", [shown(sentence) for sentence in asked], "none"),
        *_files(facts.files),
        *_section("Blocks that could not be scored", [shown(sentence) for sentence in lost], "none"),
        plain(f"Columns set aside: {len(facts.set_aside)}", STRONG),
        *([(f"  {shown(column.name)}  ", PLAIN), (shown(column.reason), QUIET)] for column in facts.set_aside),
    ]
    return Page(paragraphs, id="reading")


def _files(files: Sequence[SourceFile]) -> list[Line]:
    """Which rows came from which file."""
    if not files:
        return []
    rows = [f"rows {file.first_row + 1:,} to {file.first_row + file.rows:,}" for file in files]
    lines: list[Line] = [
        [(f"  {shown(file.name)}  ", PLAIN), (which, QUIET)] for file, which in zip(files, rows, strict=True)
    ]
    return [plain(f"Files: {len(files)}", STRONG), *lines, plain("")]


def _section(heading: str, sentences: Sequence[str], nothing: str) -> list[Line]:
    return [plain(heading, STRONG), *(plain(f"  {sentence}") for sentence in sentences or [nothing]), plain("")]
