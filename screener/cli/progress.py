"""Progress of a run on standard error."""

import time
from collections.abc import Iterable

import click

from screener.records import BlockFailed, BlockScored, Event, RunFinished, TableOpened


def watched(events: Iterable[Event]) -> TableOpened:
    """Go through a run's events, telling of them on standard error; the opening event.

    On a terminal one line is rewritten; elsewhere only the beginning and what went wrong are told.
    """
    stream = click.get_text_stream("stderr")
    rewriting = stream.isatty()
    opened: TableOpened | None = None
    done = total = 0
    started = time.monotonic()
    for event in events:
        if isinstance(event, TableOpened):
            opened, done, total = event, event.channels_done, len(event.facts.channels)
            _tell_opening(event)
            started = time.monotonic()
            first_done = done
        elif isinstance(event, BlockScored):
            done += event.scores.span.stop - event.scores.span.first
            if rewriting:
                click.echo(
                    f"\r{progress_line(done, first_done, total, time.monotonic() - started)}", err=True, nl=False
                )
        elif isinstance(event, BlockFailed):
            click.echo(f"{chr(13) if rewriting else ''}screener: {event.message}", err=True)
        elif isinstance(event, RunFinished) and rewriting and total:
            click.echo(err=True)
    assert opened is not None
    return opened


def progress_line(done: int, first_done: int, total: int, seconds: float) -> str:
    """How far a run is, its rate and the time left, padded to 60 cells."""
    rate = (done - first_done) / seconds if seconds > 0 else 0.0
    left = f", {(total - done) / rate:.0f} s left" if rate and done < total else ""
    return f"{done:,} of {total:,} channels, {rate:,.0f} a second{left}".ljust(60)


def _tell_opening(event: TableOpened) -> None:
    facts = event.facts
    click.echo(f"{facts.path}: {facts.format}, {facts.rows:,} rows, {len(facts.channels):,} channels", err=True)
    for remark in facts.remarks:
        click.echo(f"  {remark}", err=True)
    if facts.set_aside:
        names = ", ".join(column.name for column in facts.set_aside[:6])
        more = f" and {len(facts.set_aside) - 6} more" if len(facts.set_aside) > 6 else ""
        click.echo(f"  {len(facts.set_aside)} columns set aside: {names}{more}", err=True)
    if event.channels_done:
        click.echo(f"  going on after {event.channels_done:,} channels scored before", err=True)
    click.echo(f"  run file: {event.run_path}", err=True)
