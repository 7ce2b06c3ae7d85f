"""Filters by condition, marks, decisions, notes, undo, columns, views, and what comes back next time."""

from pathlib import Path

import pytest
from made_run import made_run
from screen_text import screen_lines, screen_text, shows

from screener.runs import RunFile
from screener.ui.abilities import Abilities
from screener.ui.app import ScreenerApp
from screener.ui.source import Source
from screener.ui.views import View

NARROW, WIDE = (80, 24), (140, 45)


def decisions_in(app: ScreenerApp) -> dict[str, tuple[str | None, str | None]]:
    """Decision and note by channel, as another program reads them."""
    assert app.run_path is not None
    with RunFile.open(app.run_path, read_only=True) as run:
        rows = run.results().select("channel", "decision", "note").iter_rows()
        return {channel: (decision, note) for channel, decision, note in rows if decision or note}


def screen_of(path: Path) -> ScreenerApp:
    return ScreenerApp(Source(path.name, None, path), can=Abilities(unicode=True))


async def test_a_decision_is_in_the_run_file_and_beside_the_row_at_once(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("down", "x")
        await shows(pilot, "leave out: 1 channel (z undoes)")
        assert next(line for line in screen_lines(reviewed) if line.startswith(">"))[2] == "x"
        assert decisions_in(reviewed) == {"flow_1": ("leave out", None)}
        await pilot.press("z")
        await shows(pilot, "Undone for 1 channel")
        assert decisions_in(reviewed) == {}
        await pilot.press("y")
        await shows(pilot, "Done again for 1 channel.")
        assert decisions_in(reviewed) == {"flow_1": ("leave out", None)}
        await pilot.press("d")
        await shows(pilot, "decision taken back: 1 channel")
        assert decisions_in(reviewed) == {}


async def test_marked_rows_are_decided_about_together(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("space", "down", "space", "space")
        await shows(pilot, "3 marked")
        assert [line[0] for line in screen_lines(reviewed)[3:8]] == ["+", " ", "+", "+", ">"]
        await pilot.press("t")
        await shows(pilot, "use transformed: 3 channels")
        assert set(decisions_in(reviewed)) == {"flow_0", "flow_2", "flow_3"}
        assert "marked" not in screen_text(reviewed)


async def test_all_rows_shown_are_marked_and_unmarked(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("f", "m", "f")
        flagged = [line for line in screen_lines(reviewed)[3:21] if line[1] == "!"]
        assert {line[0] for line in flagged} <= {"+", "#"}
        await pilot.press("l")
        await shows(pilot, "look again: ")
        assert reviewed.run_path is not None
        with RunFile.open(reviewed.run_path, read_only=True) as run:
            for verdict, decision in run.results().select("verdict", "decision").iter_rows():
                assert (verdict == "flagged") == (decision == "look again")


async def test_a_note_is_asked_for_and_kept(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("a", *"seal [b]", "enter")
        await shows(pilot, "noted: 1 channel")
        await pilot.press("down", "up")
        await shows(pilot, '"seal [b]"')
        assert decisions_in(reviewed) == {"flow_0": (None, "seal [b]")}


async def test_a_wrong_condition_is_explained_in_place_and_a_right_one_filters(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=(140, 24)) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("w", *"rr < 1", "enter")
        await shows(pilot, "There is no column 'rr' (a text stands in single quotes). Columns: channel, unit, n,")
        await pilot.press("home", "delete", "enter")
        await shows(pilot, "of 52 channels where r < 1")
        await pilot.press("w", *["backspace"] * 9, "enter")
        await shows(pilot, "of 60 channels, table order")


async def test_a_long_notice_is_shown_whole_on_a_narrow_screen_and_gone_with_the_next_key(
    reviewed: ScreenerApp,
) -> None:
    async with reviewed.run_test(size=(80, 24)) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("w", *"verdict = flagged", "enter")
        text = await shows(pilot, "There is no column 'flagged'")
        assert "closest_p, advice, decision, note" in " ".join(text.split())
        await pilot.press("escape", "down")
        await shows(pilot, "2 of 60 channels")
        assert screen_text(pilot.app).splitlines()[-2].startswith("2 of 60 channels")


async def test_rows_are_filtered_by_what_was_decided(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("u", "w", *"use as", "enter")
        await shows(pilot, "1 of 1 channels where use as")


async def test_columns_are_chosen_and_the_usual_ones_come_back(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=WIDE) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("c")
        await shows(pilot, "[ ] missing")
        await pilot.press("down", "space", "enter")
        assert "missing" in (await shows(pilot, "1 of 60 channels"))
        await pilot.press("c", "r")
        await shows(pilot, lambda text: "missing" not in text)


@pytest.mark.parametrize("size", [NARROW, WIDE])
async def test_views_are_turned_through_and_back(reviewed: ScreenerApp, size: tuple[int, int]) -> None:
    async with reviewed.run_test(size=size) as pilot:
        await shows(pilot, "1 of 60 channels")
        for label in ("actual minus expected", "low tail", "high tail", "No readings in row order", "lag", "readings"):
            await pilot.press("v")
            await shows(pilot, label)
        turned = 6
        while View(list(View)[turned]) is not View.FAMILIES:
            await pilot.press("v")
            turned += 1
        text = await shows(pilot, "critical r p")
        assert "> normal" in text or ">!normal" in text
        await pilot.press("v")
        await shows(pilot, "quantile")
        await pilot.press("V")
        await shows(pilot, "critical r p")


async def test_the_next_time_begins_where_this_one_ended(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    made_run(path, 60).close()
    async with screen_of(path).run_test(size=WIDE) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("f", "6", "right_square_bracket", "v", *["down"] * 3)
        await shows(pilot, "4 of ")
        name = next(line for line in screen_lines(pilot.app) if line.startswith(">"))
        await pilot.press("q")
    async with screen_of(path).run_test(size=WIDE) as pilot:
        text = await shows(pilot, "flagged, sorted by p, rising")
        assert name[3:20] in next(line for line in text.splitlines() if line.startswith(">"))
        await shows(pilot, "logistic 2/8   difference")


async def test_a_kept_condition_that_cannot_be_used_hides_nothing(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    with made_run(path, 60) as run:
        run.store_view({"condition": "evil <", "sort": "nonsense", "view": "?", "columns": "x y", "channel": "flow_9"})
    async with screen_of(path).run_test(size=NARROW) as pilot:
        await shows(pilot, "10 of 60 channels, table order")


async def test_a_run_file_that_may_not_be_written_to_says_so_when_something_is_decided(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    made_run(path, 20).close()
    path.chmod(0o444)
    app = screen_of(path)
    async with app.run_test(size=(140, 24)) as pilot:
        await shows(pilot, "1 of 20 channels")
        await pilot.press("x")
        # The superuser may write everywhere.
        await shows(pilot, lambda text: "may not write" in text or "leave out: 1 channel" in text)
        assert app.is_running
