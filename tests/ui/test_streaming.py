"""The screen while a run is going on: events come, rows with them."""

import threading
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from made_run import made_facts, made_run, made_scores
from screen_text import screen_lines, screen_text, shows

from screener.errors import ScreenerError, TableError
from screener.records import BlockFailed, BlockScored, Event, NullsPrepared, Plan, RunFinished, Span, TableOpened
from screener.runs import RunFile
from screener.ui.abilities import Abilities
from screener.ui.app import ScreenerApp
from screener.ui.source import Source

SIZE = (80, 24)
CHANNELS = 100
BLOCK = 10


class SteppedRun:
    """A run that goes on by one block whenever it is told to."""

    def __init__(self, folder: Path, *, failing: int | None = None) -> None:
        self.path = folder / "stepped.run"
        self.failing = failing
        self.gates = threading.Semaphore(0)
        self.was_cancelled = False

    def step(self, blocks: int = 1) -> None:
        """Let so many blocks pass."""
        self.gates.release(blocks)

    def start(self, cancelled: Callable[[], bool]) -> Iterator[Event]:
        """The events, each once it is in the run file."""
        facts, plan = made_facts(CHANNELS), Plan()
        with RunFile.create(self.path, facts, plan, version="0", null_version="0") as run:
            yield TableOpened(facts, plan, self.path, 0)
            for first in range(0, CHANNELS, BLOCK):
                self.gates.acquire()
                if cancelled():
                    self.was_cancelled = True
                    break
                span = Span(first, first + BLOCK)
                if first == self.failing:
                    sentence = f"Couldn't score channels {first} to {first + BLOCK - 1}."
                    run.store_failure(span, sentence)
                    yield BlockFailed(span, sentence)
                else:
                    scores = made_scores(first, first + BLOCK)
                    run.store(scores)
                    yield BlockScored(scores)
            if not self.was_cancelled:
                run.finish()
            yield RunFinished(self.was_cancelled, 1.5)


def screen_of(run: SteppedRun) -> ScreenerApp:
    """The screen on that run."""
    return ScreenerApp(Source("stepped.csv", run.start, None), can=Abilities(unicode=True))


def under_cursor(app: ScreenerApp) -> str:
    """The table's line with the pointer."""
    return next(line for line in screen_lines(app) if line.startswith(">"))


async def test_rows_stream_in_and_the_cursor_stays_on_its_channel(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path)
    app = screen_of(run)
    async with app.run_test(size=SIZE) as pilot:
        await shows(pilot, "100 channels")
        run.step()
        await shows(pilot, "of 10 channels")
        await pilot.press("down", "down", "down", "4")
        assert "flow_3 " in under_cursor(app)
        for blocks in range(2, 11):
            run.step()
            await shows(pilot, f"{blocks * BLOCK} of 100 channels: " if blocks < 10 else "\n100 channels: ")
            assert "flow_3 " in under_cursor(app)
        await shows(pilot, "Scored in 2 s.")


async def test_progress_is_shown_while_scoring_and_gone_afterwards(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path)
    async with screen_of(run).run_test(size=SIZE) as pilot:
        run.step(3)
        text = await shows(pilot, "30 of 100   ")
        assert "channels a second" in text
        assert "left" in text
        await shows(pilot, "30 of 100 channels: ")
        run.step(7)
        await shows(pilot, "Scored in")
        assert "channels a second" not in screen_text(pilot.app)


async def test_a_run_that_was_finished_before_is_shown_without_a_word_about_scoring(tmp_path: Path) -> None:
    made_run(tmp_path / "stepped.run", CHANNELS).close()

    def start(_cancelled: Callable[[], bool]) -> Iterator[Event]:
        yield TableOpened(made_facts(CHANNELS), Plan(), tmp_path / "stepped.run", CHANNELS)
        yield RunFinished(False, 0.0)

    app = ScreenerApp(Source("stepped.csv", start, None), can=Abilities(unicode=True))
    async with app.run_test(size=SIZE) as pilot:
        await shows(pilot, "1 of 100 channels, table order")
        assert not app.feed.is_scoring
        await pilot.pause()
        assert "Scored in" not in screen_text(app)


async def test_null_distributions_that_are_simulated_first_are_told_of(tmp_path: Path) -> None:
    run, ready = SteppedRun(tmp_path), threading.Event()

    def start(cancelled: Callable[[], bool]) -> Iterator[Event]:
        events = run.start(cancelled)
        yield next(events)
        yield NullsPrepared("blom", 0.25)
        ready.wait()
        yield from events

    app = ScreenerApp(Source("stepped.csv", start, None), can=Abilities(unicode=True))
    async with app.run_test(size=SIZE) as pilot:
        await shows(pilot, "25% of simulating the null distributions for blom positions")
        ready.set()
        run.step(10)
        await shows(pilot, "Scored in")
        assert "simulating" not in screen_text(app)


async def test_decisions_are_made_while_blocks_come_in(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path)
    app = screen_of(run)
    async with app.run_test(size=SIZE) as pilot:
        run.step(2)
        await shows(pilot, "of 20 channels")
        await pilot.press("down", "x")
        await shows(pilot, "leave out: 1 channel")
        run.step(8)
        await shows(pilot, "\n100 channels: ")
        assert under_cursor(app)[2] == "x"
    with RunFile.open(run.path, read_only=True) as stored:
        assert stored.results()["decision"].to_list()[:3] == [None, "leave out", None]


async def test_a_block_that_fails_is_named_and_the_rest_goes_on(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path, failing=20)
    async with screen_of(run).run_test(size=(140, 45)) as pilot:
        run.step(3)
        await shows(pilot, "Couldn't score channels 20 to 29.")
        run.step(7)
        await shows(pilot, "\n100 channels: ")
        await pilot.press("i")
        await shows(pilot, "Couldn't score channels 20 to 29.")
        await pilot.press("escape", *["down"] * 25)
        await shows(pilot, "No readings to plot.")


async def test_quitting_asks_the_run_to_stop_and_says_that_it_can_go_on(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path)
    app = screen_of(run)
    async with app.run_test(size=SIZE) as pilot:
        run.step()
        await shows(pilot, "of 10 channels")
        await pilot.press("q")
    assert app.return_value == 0
    assert "the same command goes on from there" in app.unfinished
    run.step()
    assert app.feed.stopped_within(30.0)
    assert run.was_cancelled


async def test_an_interrupted_run_ends_with_the_code_for_that(tmp_path: Path) -> None:
    run = SteppedRun(tmp_path)
    app = screen_of(run)
    async with app.run_test(size=SIZE) as pilot:
        run.step()
        await shows(pilot, "of 10 channels")
        await pilot.press("ctrl+c")
    assert app.return_value == 130
    run.step()
    assert app.feed.stopped_within(30.0)


@pytest.mark.parametrize("error", [TableError("Couldn't read 'x.csv': no numeric column."), ZeroDivisionError("ours")])
async def test_an_error_of_the_run_closes_the_screen_and_is_kept_for_the_caller(error: Exception) -> None:
    def start(cancelled: Callable[[], bool]) -> Iterator[Event]:
        raise error
        yield

    app = ScreenerApp(Source("x.csv", start, None), can=Abilities(unicode=True))
    async with app.run_test(size=SIZE) as pilot:
        for _ in range(200):
            if app.failure is not None:
                break
            await pilot.pause(0.01)
    assert app.failure is error


async def test_a_run_file_that_is_none_is_answered_with_its_sentence(tmp_path: Path) -> None:
    path = tmp_path / "none.run"
    path.write_text("not a run file")
    app = ScreenerApp(Source("none.run", None, path), can=Abilities(unicode=True))
    async with app.run_test(size=SIZE) as pilot:
        for _ in range(200):
            if app.failure is not None:
                break
            await pilot.pause(0.01)
    assert isinstance(app.failure, ScreenerError)
    assert app.failure.exit_code == 4
