"""Options that several commands share, and the plan they make."""

from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import click

from screener.records import Control, Plan

DEFAULTS = Plan()

Command = TypeVar("Command", bound=Callable[..., Any])

TABLE_OR_RUN = click.argument("path", metavar="TABLE_OR_RUN", type=click.Path(path_type=Path))

RUN_PATH = click.option(
    "-o", "--output", "run_path", type=click.Path(path_type=Path), help="Run file to write or to go on with."
)

FAIL_ON_FLAG = click.option("--fail-on-flag", is_flag=True, help="Exit with 1 when a channel is flagged.")

PLAN_OPTIONS = (
    click.option("--family", default=DEFAULTS.family, show_default=True, help="Family the channels are held against."),
    click.option(
        "--alpha",
        type=float,
        default=DEFAULTS.alpha,
        show_default=True,
        help="Share of good channels flagged by chance.",
    ),
    click.option(
        "--control",
        type=click.Choice([control.value for control in Control]),
        default=Control.EACH.value,
        show_default=True,
        help="A flag means: r below its critical value (each), or q below alpha (fdr).",
    ),
    click.option(
        "--positions",
        default=DEFAULTS.positions,
        show_default=True,
        help="Plotting positions: a rule's name or a number.",
    ),
    click.option(
        "--channels",
        multiple=True,
        metavar="GLOB",
        help="Screen only the columns of these names, also such as look like counters, times or codes.",
    ),
    click.option("--skip", multiple=True, metavar="GLOB", help="Leave the columns of these names aside."),
    click.option("--missing", multiple=True, metavar="TOKEN", help="A cell text that means a missing reading."),
    click.option(
        "--expect",
        multiple=True,
        metavar="GLOB=FAMILY",
        help="Hold channels of these names against another family, such as 'runout*=half-normal'.",
    ),
    click.option(
        "--match/--plain",
        default=DEFAULTS.match,
        show_default=True,
        help="Critical values of a channel in its own condition (rounded, clipped, serial), or the textbook ones.",
    ),
    click.option("--seed", type=int, default=DEFAULTS.seed, show_default=True, help="Seed of everything random."),
)

TABLE_OPTIONS = (
    click.option("--separator", default="", metavar="SIGN", help="What separates cells, such as ; or tab.  [as found]"),
    click.option("--decimal", default="", metavar="SIGN", help="The decimal sign, . or ,  [as voted by the cells]"),
    click.option(
        "--header-line", type=click.IntRange(min=-1), default=-1, metavar="LINE", help="Line of the names; 0: none."
    ),
    click.option(
        "--units-line", type=click.IntRange(min=-1), default=-1, metavar="LINE", help="Line of the units; 0: none."
    ),
    click.option("--encoding", default="", metavar="NAME", help="Encoding of the text, such as cp1252.  [as found]"),
    click.option("--comment", default="", metavar="SIGN", help="Lines that begin so are left out.  [as found]"),
    click.option(
        "--shape",
        type=click.Choice(["columns", "rows", "long"]),
        default=None,
        help="Where a channel stands: a column, a row, or a name beside each value.  [as found]",
    ),
    click.option("--part", default="", metavar="NAME", help="Sheet, group or variable to read.  [the first table]"),
)
"""How a table is written, where what is found is wrong."""

JOBS = click.option("--jobs", type=click.IntRange(min=1), default=None, help="Workers.  [default: usable cores]")


def _use_plan(ctx: click.Context, _option: click.Parameter, path: Path | None) -> None:
    """Let what the plan file sets be the defaults of the other options."""
    if path is not None:
        from screener.cli.plan_file import read_plan

        # An empty shape means as found, which the option says by its absence.
        found = {name: value for name, value in read_plan(path).items() if (name, value) != ("shape", "")}
        ctx.default_map = {**(ctx.default_map or {}), **found}


PLAN_FILE = click.option(
    "--plan",
    "plan_file",
    type=click.Path(path_type=Path),
    is_eager=True,
    expose_value=False,
    callback=_use_plan,
    help="Settings from this file, as `screener plan` prints it; options given beside it override it.",
)


def plan_options(command: Command) -> Command:
    """Add the options that make a plan, and --jobs."""
    for option in reversed((PLAN_FILE, *PLAN_OPTIONS, *TABLE_OPTIONS, JOBS)):
        command = option(command)
    return command


def plan_from(given: dict[str, Any]) -> Plan:
    """The plan of the parsed options."""
    return Plan(
        family=given["family"],
        alpha=given["alpha"],
        control=Control(given["control"]),
        positions=given["positions"],
        channels=given["channels"],
        skip=given["skip"],
        missing=given["missing"],
        seed=given["seed"],
        separator=given["separator"],
        decimal=given["decimal"],
        header_line=given["header_line"],
        units_line=given["units_line"],
        encoding=given["encoding"],
        comment=given["comment"],
        shape=given["shape"] or "",
        part=given["part"],
        expect=given["expect"],
        match=given["match"],
    )


def refuse_plan_for_run(ctx: click.Context, path: Path) -> None:
    """Raise UsageError when options for a table are given together with a run file, which has its own plan."""
    options = [
        option for option in ctx.command.params if option.name in {*Plan.__dataclass_fields__, "plan_file", "run_path"}
    ]
    given = [option for option in options if _was_given(ctx, option)]
    if given:
        raise click.UsageError(
            f"{str(path)!r} is a run file and keeps the plan it was scored with; {given[0].opts[0]} goes with a table. "
            "Score the table again to change the plan."
        )


def _was_given(ctx: click.Context, option: click.Parameter) -> bool:
    return ctx.get_parameter_source(option.name or "") is click.core.ParameterSource.COMMANDLINE
