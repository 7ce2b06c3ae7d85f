"""The report as Markdown, plots as text."""

from __future__ import annotations

import re
from collections.abc import Sequence

from screener.ui.report import HEAD, PLOTS, Content, caption

SPECIAL = re.compile(r"([\\`*_{}\[\]<>()#+!|~&$^-])")


def markdown(told: Content) -> str:
    """The whole document."""
    parts = [
        f"# {escaped(told.title)}",
        escaped(told.summary),
        "## How it was made",
        _table(("what", "value"), told.facts),
        f"## Columns set aside: {len(told.set_aside)}",
        _table(("column", "reason"), told.set_aside),
        f"## Channels not scored: {len(told.not_scored)}",
        _table(("channel", "reason"), told.not_scored),
        f"## Flagged channels: {len(told.flagged)}",
        _table(HEAD, told.flagged),
        f"## Decisions: {len(told.decided)}",
        _table(("channel", "decision", "note"), told.decided),
        "## Cautions",
        "\n".join(f"* {escaped(caution)}" for caution in told.cautions),
        "## Plots of flagged channels",
        *_plots(told),
    ]
    return "\n\n".join(part for part in parts if part) + "\n"


def escaped(text: str) -> str:
    """The text so that Markdown takes no character of it for its own."""
    return SPECIAL.sub(r"\\\1", text)


def _plots(told: Content) -> list[str]:
    parts = [
        f"### {escaped(str(plot.row['channel']))}\n\n{escaped(caption(plot.row))}\n\n{_fenced(plot.lines)}"
        for plot in told.plots
    ]
    more = len(told.flagged) - len(told.plots)
    return [*parts, *([f"{more:,} more are flagged; plots are shown of {PLOTS:,}."] if more else [])]


def _fenced(lines: Sequence[str]) -> str:
    return "\n".join(["```text", *(line.rstrip().replace("```", "'''") for line in lines), "```"])


def _table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table; nothing when it has no rows."""
    if not rows:
        return ""
    lines = [head, ["---"] * len(head), *([escaped(cell) for cell in row] for row in rows)]
    return "\n".join("| " + " | ".join(line) + " |" for line in lines)
