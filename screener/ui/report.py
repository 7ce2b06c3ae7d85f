"""A report on a run that another person can read and repeat: Markdown with text plots, or HTML with drawn ones."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from screener import __version__
from screener.ui.drawing import Wanted, drawing, view_of
from screener.ui.numbers import count_text, p_text, r_text, size_text
from screener.ui.screens.help import cautions
from screener.ui.shown import shown

if TYPE_CHECKING:
    import polars as pl

    from screener.plots import QuantileView
    from screener.runs import RunFile

Row = dict[str, Any]

PLOTS = 200
"""Flagged channels of which a plot is shown, smallest p first; the rest is only listed."""
WIDTH, HEIGHT = 78, 20
HEAD = ("channel", "n", "r", "critical r", "p", "off (sd)", "departure", "closest", "decision", "note")


@dataclass(frozen=True, slots=True)
class Plot:
    """One flagged channel."""

    row: Row
    view: QuantileView
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Content:
    """All that a report says, in either form."""

    title: str
    summary: str
    facts: tuple[tuple[str, str], ...]
    set_aside: tuple[tuple[str, str], ...]
    not_scored: tuple[tuple[str, str], ...]
    flagged: tuple[tuple[str, ...], ...]
    decided: tuple[tuple[str, str, str], ...]
    plots: tuple[Plot, ...]
    cautions: tuple[str, ...]


def write_report(run: RunFile, rows: pl.DataFrame, path: Path) -> None:
    """Write the report on these rows of a run, all or nothing; raises RunFileError when it cannot be written."""
    from screener.runs import write_whole
    from screener.ui.report_html import html
    from screener.ui.report_markdown import markdown

    told = content(run, rows)
    text = html(told) if path.suffix.lower() == ".html" else markdown(told)
    write_whole(path, text.encode("utf-8", "backslashreplace"))


def content(run: RunFile, rows: pl.DataFrame) -> Content:
    """What is to be told of these rows."""
    from screener.runs import summarise

    flagged = list(rows.filter(rows["verdict"] == "flagged").sort("p", "r").iter_rows(named=True))
    return Content(
        title=f"Screen of {shown(run.facts.path.name)}",
        summary=summarise(run.results(), run.facts, run.plan).sentence() + ".",
        facts=tuple(_facts(run)),
        set_aside=tuple((shown(column.name), shown(column.reason)) for column in run.facts.set_aside),
        not_scored=tuple(_pairs(rows.filter(rows["verdict"] == "not scored"), "reason")),
        flagged=tuple(map(_cells, flagged)),
        decided=tuple(_decided(rows)),
        plots=tuple(_plot(run, row) for row in flagged[:PLOTS]),
        cautions=cautions(),
    )


def _facts(run: RunFile) -> list[tuple[str, str]]:
    """How the run was made, so that it can be repeated."""
    facts, plan = run.facts, run.plan
    size = f"{facts.rows:,} rows x {len(facts.channels):,} channels"
    return [
        ("table", f"{shown(facts.path.name)} ({shown(facts.format)}), {size}"),
        *([("written as", shown(facts.dialect))] if facts.dialect else []),
        ("fingerprint", facts.fingerprint),
        *(("remark", shown(remark)) for remark in facts.remarks),
        ("family", "; ".join([plan.family, *plan.expect])),
        ("alpha", f"{plan.alpha:g}, control {plan.control}"),
        ("positions", plan.positions),
        *([("channels", ", ".join(map(shown, plan.channels)))] if plan.channels else []),
        *([("skipped", ", ".join(map(shown, plan.skip)))] if plan.skip else []),
        *([("missing readings", ", ".join(map(shown, plan.missing)))] if plan.missing else []),
        ("seed", str(plan.seed)),
        ("scored", f"{run.created} (UTC), by screener {run.version}, null tables {run.null_version}"),
        ("reported by", f"screener {__version__}"),
    ]


def _cells(row: Row) -> tuple[str, ...]:
    return (
        shown(row["channel"]),
        count_text(row["n"]),
        r_text(row["r"]),
        r_text(row["critical_r"]),
        p_text(row["p"]),
        size_text(row["departure_size"]),
        *(shown(row[name] or "") for name in ("departure", "closest", "decision", "note")),
    )


def _pairs(rows: pl.DataFrame, name: str) -> list[tuple[str, str]]:
    return [(shown(row["channel"]), shown(row[name] or "")) for row in rows.iter_rows(named=True)]


def _decided(rows: pl.DataFrame) -> list[tuple[str, str, str]]:
    held = rows.filter(rows["decision"].is_not_null() | rows["note"].is_not_null())
    return [
        (shown(r["channel"]), shown(r["decision"] or ""), shown(r["note"] or "")) for r in held.iter_rows(named=True)
    ]


def _plot(run: RunFile, row: Row) -> Plot:
    from screener.plots import Charset

    wanted = Wanted(row["position"], row["n"], row["family"], WIDTH, HEIGHT)
    drawn = drawing(run, run.facts, run.plan, wanted, charset=Charset.UNICODE)
    return Plot(row, view_of(run, run.plan, wanted, drawn.fit), drawn.lines)


def caption(row: Row) -> str:
    """What stands under a channel's name."""
    words = [
        f"r {r_text(row['r'])} below critical {r_text(row['critical_r'])}",
        f"p {p_text(row['p'])}",
        f"off the line by {size_text(row['departure_size'])} sd (rms)",
    ]
    extra: Sequence[str] = [shown(row[name]) for name in ("departure", "conditions", "advice", "decision") if row[name]]
    return "; ".join([*words, *extra])
