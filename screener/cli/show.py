"""`screener show`: one channel in numbers and as a text plot."""

import difflib
import os
import shutil
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.cli.options import TABLE_OR_RUN, plan_options
from screener.ui.views import View

if TYPE_CHECKING:
    from screener.records import Channel, Confirmation
    from screener.runs import RunFile
    from screener.ui.drawing import Drawing

Row = dict[str, Any]
VIEWS = [view.value.replace(" ", "-") for view in View if view is not View.FAMILIES]


@click.command()
@TABLE_OR_RUN
@click.argument("channel")
@click.option("--against", metavar="FAMILY", help="Family of the plot.  [default: the one held against]")
@click.option(
    "--view", type=click.Choice(VIEWS), multiple=True, help="Plot to print; may be repeated.  [default: quantile]"
)
@click.option("--by", type=click.Choice(["file"]), help="Readings, mean and sd of each file of several joined.")
@click.option("--width", type=click.IntRange(20, 1000), help="Cells across.  [default: the terminal's, at most 100]")
@click.option("--height", type=click.IntRange(6, 500), default=22, show_default=True, help="Lines of the plot.")
@click.option("--ascii", "plain", is_flag=True, help="Draw with ASCII characters only.")
@click.option(
    "--confirm",
    "samples",
    type=click.IntRange(100, 1_000_000),
    metavar="N",
    help="Confirm the verdict by N samples in the channel's own autocorrelation; its table is read again.",
)
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path, channel: str, **given: Any) -> None:
    """Print the numbers of CHANNEL against every family, and its quantile plot: actual against expected.

    A part of the name is enough when no other channel's name holds it.
    """
    from screener.cli.by_file import file_lines
    from screener.cli.confirming import confirmed
    from screener.cli.output import put
    from screener.cli.source import exit_code, finished_run
    from screener.stats.families import family_named

    against = family_named(given["against"]).name if given["against"] else ""
    with finished_run(ctx, path, given) as run:
        position = _position(run, channel)
        found = confirmed(run, position, given["samples"]) if given["samples"] else run.confirmation(position)
        results = run.results()
        row = next(results.filter(results["position"] == position).iter_rows(named=True), None)
        parts: list[Sequence[str]] = [[*_numbers(run, position, row), *_confirmation(found)]]
        if given["by"]:
            parts.append(file_lines(run, position))
        if row is not None and row["n"]:
            drawings = [
                _drawn(run, position, row["n"], against or row["family"], View(view.replace("-", " ")), given)
                for view in given["view"] or VIEWS[:1]
            ]
            parts += [
                _families(drawings[0]),
                _outermost(drawings),
                *(part for one in drawings for part in ([_heading(one)], one.lines)),
            ]
        parts.append(_reading(run))
        put(line.rstrip() for line in _apart(parts))
        ctx.exit(exit_code(run, results))


def _position(run: "RunFile", name: str) -> int:
    """Where the channel stands; by its exact name, or by the only name that holds the text.

    Raises: UsageError when there is no such channel, or several.
    """
    names = [channel.name for channel in run.facts.channels]
    if name in names:
        return names.index(name)
    for column in run.facts.set_aside:
        if column.name == name:
            raise click.UsageError(f"Column {name!r} was set aside: {column.reason}.")
    holding = [candidate for candidate in names if name.casefold() in candidate.casefold()]
    if len(holding) == 1:
        return names.index(holding[0])
    near = holding[:5] or difflib.get_close_matches(name, names, n=5, cutoff=0.4) or names[:5]
    problem = f"{len(holding)} channels match {name!r}" if holding else f"There is no channel {name!r}"
    raise click.UsageError(f"{problem}; there are for instance {', '.join(map(repr, near))}.")


def _numbers(run: "RunFile", position: int, row: Row | None) -> list[str]:
    """What was counted, and the verdict."""
    from screener.ui.numbers import p_text, r_text, size_text

    channel = run.facts.channels[position]
    if row is None:
        return [channel.name, "not scored yet: the run was stopped before it"]
    counted = "" if row["n"] is None else f": {row['n']:,} readings, {row['missing']:,} missing"
    head = f"{channel.name}{counted}{_limited(channel)}"
    if row["verdict"] == "not scored":
        return [head, f"not scored: {row['reason']}"]
    condition = [f"conditions: {row['conditions']}"] if row["conditions"] else []
    if row["plain_critical_r"] is not None and row["plain_critical_r"] != row["critical_r"]:
        condition.append(
            f"matched critical r {r_text(row['critical_r'])} for that condition, instead of the textbook "
            f"{r_text(row['plain_critical_r'])}"
        )
        if any(word in (row["conditions"] or "") for word in ("clipped", "detection limit")):
            condition.append("r, location and scale are those of the other readings, at their positions among all")
    sign = "<" if row["r"] < row["critical_r"] else ">="
    return [
        head,
        f"{row['verdict']} against {row['family']} at alpha {run.plan.alpha:g}, control {run.plan.control}: "
        f"r {r_text(row['r'])} {sign} critical {r_text(row['critical_r'])}",
        f"p {p_text(row['p'])}, q {p_text(row['q'])}, departure size {size_text(row['departure_size'])} "
        "(rms distance from the line, in standard deviations)",
        *condition,
    ]


def _confirmation(found: "Confirmation | None") -> list[str]:
    """What the last confirmation of the channel said."""
    from screener.ui.confirming import confirmation_words

    return [confirmation_words(found)] if found is not None else []


def _limited(channel: "Channel") -> str:
    """How many readings are only known to lie beyond a detection limit."""
    sides = {"below": channel.below, "above": channel.above}
    return "".join(f", {count:,} {side} a detection limit" for side, count in sides.items() if count)


def _reading(run: "RunFile") -> list[str]:
    """How the table was read."""
    from screener.cli.report import reading_lines

    lines = reading_lines(run.facts)
    return ["how the table was read", *(f"  {line}" for line in lines)] if lines else []


def _heading(drawn: "Drawing") -> str:
    """What the plot below shows."""
    return f"{drawn.wanted.view}: {drawn.wanted.view.meaning}"


def _families(drawn: "Drawing") -> list[str]:
    """A line for every family, and which come closest."""
    from screener.cli.report import aligned

    fits = [fit for fit in drawn.fits if fit["r"] is not None or fit["note"]]
    if not fits:
        return []
    head = ("family", "r", "critical r", "p", "location", "scale", "shapes")
    lines = aligned(head, [_family_cells(fit) for fit in fits])
    notes = [fit["note"] or "" for fit in fits]
    lines = [lines[0], *(f"{line}  {note}" for line, note in zip(lines[1:], notes, strict=True))]
    if drawn.closest:
        lines.append(drawn.closest)
    lines.append("location and scale of a family on the log axis are those of ln x")
    lines.append("families other than the normal and the one held against have textbook critical values")
    if any(fit["extrapolated"] for fit in fits):
        lines.append("* beyond what was simulated: from the fitted tail")
    return lines


def _outermost(drawings: Sequence["Drawing"]) -> list[str]:
    """The outermost readings by name, as far as a plot shows them."""
    from screener.cli.report import aligned
    from screener.ui.numbers import reading_text

    drawn = next((one for one in drawings if one.tails.low), None)
    if drawn is None:
        return []
    readings = [*drawn.tails.low, *reversed(drawn.tails.high)]
    cells = [
        (reading_text(one.reading), f"{one.row:,}", "" if one.off is None else f"{one.off:+.4g}") for one in readings
    ]
    off = f"off the line of {drawn.wanted.family}"
    return ["outermost readings, from the lowest to the highest", *aligned(("reading", "row", off), cells)]


def _family_cells(fit: Row) -> tuple[str, ...]:
    from screener.ui.families import shapes
    from screener.ui.numbers import p_text, r_text, reading_text

    if fit["r"] is None:
        return (fit["family"], *"-----", "")
    return (
        fit["family"],
        r_text(fit["r"]),
        r_text(fit["critical_r"]),
        p_text(fit["p"]) + ("*" if fit["extrapolated"] else " "),
        reading_text(fit["location"]),
        reading_text(fit["scale"]),
        ", ".join(f"{value:.4g}" for value in shapes(fit)),
    )


def _drawn(run: "RunFile", position: int, n: int, family: str, view: View, given: dict[str, Any]) -> "Drawing":
    from screener.plots import Charset
    from screener.ui.drawing import Wanted, drawing

    wanted = Wanted(position, n, family, given["width"] or _width(), given["height"], view, told=False)
    charset = Charset.ASCII if given["plain"] or not _draws_unicode() else Charset.UNICODE
    return drawing(run, run.facts, run.plan, wanted, charset=charset)


def _apart(parts: Sequence[Sequence[str]]) -> list[str]:
    """The lines of all parts that have any, an empty line between two."""
    lines = [line for part in parts if part for line in (*part, "")]
    return lines[:-1]


def _width() -> int:
    return min(100, shutil.get_terminal_size().columns) if sys.stdout.isatty() else 80


def _draws_unicode() -> bool:
    """Whether the output takes more than ASCII, and the terminal too if it goes to one."""
    from screener.ui.abilities import abilities

    if (sys.stdout.encoding or "").lower().replace("-", "") != "utf8":
        return False
    return not sys.stdout.isatty() or abilities(os.environ).unicode
