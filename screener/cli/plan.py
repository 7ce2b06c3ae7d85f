"""`screener plan`: a plan file to begin with."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from screener.cli.options import plan_from, plan_options, refuse_plan_for_run
from screener.errors import PlanError

if TYPE_CHECKING:
    from screener.records import Plan, TableFacts


@click.command()
@click.argument("path", metavar="[TABLE_OR_RUN]", required=False, type=click.Path(path_type=Path))
@click.option("-o", "--output", type=click.Path(path_type=Path), help="Write to this file, which must be new.")
@plan_options
@click.pass_context
def command(ctx: click.Context, /, path: Path | None, output: Path | None, **given: Any) -> None:
    """Print a commented plan file with every setting.

    With a table, what was found in it stands beside the settings: columns set aside, codes that look like missing
    readings, groups of names. With a run file, it is the plan of that run. Options set what they name.
    """
    from screener.cli.output import path_text, put, tell
    from screener.cli.plan_text import plan_lines

    lines = plan_lines(*_found(ctx, path, given))
    if output is None:
        put(lines)
    else:
        _write(lines, output)
        tell(f"plan written to {path_text(output)}")


def _found(ctx: click.Context, path: Path | None, given: dict[str, Any]) -> "tuple[Plan, TableFacts | None]":
    """The plan, and what is known of the table."""
    from screener.cli.source import is_run

    if path is None:
        return plan_from(given), None
    if is_run(path):
        from screener.runs import RunFile

        refuse_plan_for_run(ctx, path)
        with RunFile.open(path, read_only=True) as run:
            return run.plan, run.facts
    from screener.screening.start import check_plan
    from screener.tables import open_table

    plan = plan_from(given)
    check_plan(plan)
    return plan, open_table(path, plan).facts


def _write(lines: list[str], path: Path) -> None:
    try:
        with path.open("x", encoding="utf-8", errors="backslashreplace") as stream:
            stream.write("".join(f"{line}\n" for line in lines))
    except FileExistsError:
        raise PlanError(f"Couldn't write plan {str(path)!r}: that exists. Give another name, or remove it.") from None
    except OSError as error:
        raise PlanError(f"Couldn't write plan {str(path)!r}: {error.strerror}. Give another name.") from error
