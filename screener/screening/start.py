"""A run from its beginning, or from where one stopped: table, run file, events stored as they come."""

import os
from collections.abc import Callable, Iterator
from concurrent.futures import Executor
from pathlib import Path

from platformdirs import user_state_path

from screener import __version__
from screener.errors import PlanError, RunFileError
from screener.records import BlockFailed, BlockScored, Event, Plan, RunFinished, TableFacts, TableOpened
from screener.runs import RunFile, default_run_path, is_run_file
from screener.screening.kept_samples import simulated_nulls
from screener.screening.null_source import nulls_for
from screener.screening.screen import held_against, screen
from screener.screening.workers import blocks_at_once, bytes_at_work, most_in_block, thread_workers
from screener.stats.correlation import table_ahead
from screener.stats.null.packing import NULL_VERSION
from screener.stats.positions import rule_key
from screener.tables import Table, block_bytes, machine_memory, open_table, spans


def start(
    table_path: Path,
    plan: Plan,
    run_path: Path | None = None,
    *,
    jobs: int,
    cancelled: Callable[[], bool] = lambda: False,
) -> Iterator[Event]:
    """Open the table and its run file, then score what the run file does not hold yet.

    An event is yielded when the run file already holds it.
    """
    check_plan(plan)
    with thread_workers(jobs) as executor:
        executor.submit(table_ahead)
        table = open_table(table_path, plan)
        yield from _scored(table, plan, run_path, executor, jobs, cancelled)


def _scored(
    table: Table, plan: Plan, run_path: Path | None, executor: Executor, jobs: int, cancelled: Callable[[], bool]
) -> Iterator[Event]:
    with run_for(table.facts, plan, run_path) as run:
        done = run.channels_done()
        yield TableOpened(table.facts, plan, run.path, len(done))
        nulls = yield from nulls_for(plan.positions, table.facts.rows, jobs, cancelled)
        if nulls is None:
            yield RunFinished(cancelled=True, seconds=0.0)
            return
        # Another version, or another number of workers, may have cut the channels elsewhere.
        budget = bytes_at_work(machine_memory())
        cut = spans(table.facts, most_bytes=most_in_block(jobs, budget))
        todo = [span for span in cut if not done.issuperset(range(span.first, span.stop))]
        ahead = blocks_at_once(jobs, block_bytes(table.facts, cut), budget)
        simulated = simulated_nulls(cancelled)
        for event in screen(
            table, plan, nulls, spans=todo, executor=executor, simulated=simulated, ahead=ahead, cancelled=cancelled
        ):
            if isinstance(event, BlockScored):
                run.store(event.scores)
            elif isinstance(event, BlockFailed):
                run.store_failure(event.span, event.message)
            elif isinstance(event, RunFinished) and not (event.cancelled or run.finished):
                run.finish()
            yield event


def check_plan(plan: Plan) -> None:
    """Raise PlanError when the plan asks for something impossible."""
    held_against([], plan)
    rule_key(plan.positions)
    if not 0.0 < plan.alpha < 1.0:
        raise PlanError(f"Couldn't use alpha {plan.alpha:g}: it must lie between 0 and 1, such as 0.05.")


def run_for(facts: TableFacts, plan: Plan, path: Path | None) -> RunFile:
    """The run file at path, taken up again if it holds this table and plan, else made.

    Without a path it lies beside the table (or, where nothing can be written there, in the user's state folder), under
    the first name that is free or holds this very run.
    Raises: RunFileError when the file at a given path is something else.
    """
    if path is not None:
        return _at(path, facts, plan)
    beside = default_run_path(facts.path)
    if not os.access(beside.parent, os.W_OK):
        beside = user_state_path("screener", ensure_exists=True) / beside.name
    return _at_first_fitting(beside, facts, plan)


def _at(path: Path, facts: TableFacts, plan: Plan) -> RunFile:
    if not os.path.lexists(path):
        return _create(path, facts, plan)
    run = RunFile.open(path)
    if _same_run(run, facts, plan):
        return run
    run.close()
    raise RunFileError(
        f"Couldn't use run file {str(path)!r}: it holds another table, table content or plan. "
        "Give another name with -o, or remove it."
    )


def _at_first_fitting(path: Path, facts: TableFacts, plan: Plan) -> RunFile:
    number = 1
    while True:
        candidate = path if number == 1 else path.with_name(f"{path.stem}-{number}{path.suffix}")
        if not os.path.lexists(candidate):
            return _create(candidate, facts, plan)
        run = _opened(candidate)
        if run is not None:
            if _same_run(run, facts, plan):
                return run
            run.close()
        number += 1


def _opened(path: Path) -> RunFile | None:
    """The run file at path; None when it is none, is damaged, of another schema, or not ours to write."""
    if not (is_run_file(path) and os.access(path, os.W_OK)):
        return None
    try:
        return RunFile.open(path)
    except RunFileError:
        return None


def _create(path: Path, facts: TableFacts, plan: Plan) -> RunFile:
    return RunFile.create(path, facts, plan, version=__version__, null_version=NULL_VERSION)


def _same_run(run: RunFile, facts: TableFacts, plan: Plan) -> bool:
    return (run.facts.fingerprint, run.plan, run.null_version) == (facts.fingerprint, plan, NULL_VERSION)
