"""Progress of a run on standard error."""

import sys
import time
from collections.abc import Iterable

import click

from screener.records import BlockFailed, BlockScored, Event, TableOpened

SET_ASIDE_SHOWN = 8
"""Columns set aside that are named; the rest are counted."""


def watched(events: Iterable[Event]) -> TableOpened:
    """Go through a run's events, telling of them on standard error; the opening event.

    On a terminal one line is rewritten; elsewhere only the beginning and what went wrong are told.
    """
    remaining = iter(events)
    opened = next(remaining)
    assert isinstance(opened, TableOpened)
    click.echo("\n".join(opening_lines(opened)), err=True)
    rewriting = sys.stderr.isatty()
    done, total, started = opened.channels_done, len(opened.facts.channels), time.monotonic()
    for event in remaining:
        if isinstance(event, BlockFailed):
            click.echo(f"screener: {event.message}", err=True)
        elif isinstance(event, BlockScored) and rewriting:
            done += event.scores.span.stop - event.scores.span.first
            rate = (done - opened.channels_done) / max(time.monotonic() - started, 1e-9)
            click.echo(f"\r{progress_line(done, total, rate)}", err=True, nl=done == total)
    return opened


def progress_line(done: int, total: int, rate: float) -> str:
    """How far a run is, its rate in channels a second and the time left, padded so that it covers an earlier line."""
    left = f", {(total - done) / rate:.0f} s left" if done < total else ""
    return f"{done:,} of {total:,} channels, {rate:,.0f} a second{left}".ljust(60)


def opening_lines(event: TableOpened) -> list[str]:
    """What was read, what was set aside and why, and where the results go."""
    facts = event.facts
    lines = [f"{facts.path}: {facts.format}, {facts.rows:,} rows, {len(facts.channels):,} channels"]
    lines += [f"  {remark}" for remark in facts.remarks]
    lines += [f"  set aside: {column.name} ({column.reason})" for column in facts.set_aside[:SET_ASIDE_SHOWN]]
    if len(facts.set_aside) > SET_ASIDE_SHOWN:
        lines.append(f"  set aside: {len(facts.set_aside) - SET_ASIDE_SHOWN:,} more columns")
    if event.channels_done:
        lines.append(f"  going on after {event.channels_done:,} channels scored before")
    return [*lines, f"  run file: {event.run_path}"]
