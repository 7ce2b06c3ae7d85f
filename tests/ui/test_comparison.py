"""The screen of a comparison."""

from pathlib import Path

import polars as pl
import pytest
from made_run import made_facts, made_run, made_scores
from screen_text import screen_lines, screen_text, shows
from textual.binding import Binding

from screener.records import Plan
from screener.runs import RunFile, compared
from screener.ui.abilities import Abilities
from screener.ui.comparison import ComparisonApp
from screener.ui.screens.comparison import ComparisonScreen


@pytest.fixture
def rows(tmp_path: Path) -> pl.DataFrame:
    """Fifty channels of which the scores have moved by three places."""
    with made_run(tmp_path / "a.run", 50, names={9: "[@click=app.quit]x\x1b[2J"}) as old:
        new = RunFile.create(tmp_path / "b.run", made_facts(52), Plan(), version="0", null_version="0")
        with new:
            new.store(made_scores(0, 52))
            return compared(old, new)


def app_on(rows: pl.DataFrame, *, unicode: bool = True) -> ComparisonApp:
    return ComparisonApp(rows, "a.run -> b.run", can=Abilities(unicode=unicode))


async def test_changes_are_shown_first_and_all_when_asked_for(rows: pl.DataFrame) -> None:
    async with app_on(rows).run_test(size=(80, 24)) as pilot:
        text = await shows(pilot, "heaviest changes first")
        assert "53 channels: 1 missing, 3 new, 49 same" in text
        assert "of 4 changes" in text
        await pilot.press("a")
        await shows(pilot, "1 of 53 channels")
        await pilot.press("end")
        await shows(pilot, "53 of 53 channels")


async def test_what_is_to_be_known_first_is_shown_until_a_key_is_pressed(rows: pl.DataFrame) -> None:
    app = ComparisonApp(rows, "a.run -> b.run", "Not judged alike: alpha 0.05 and 0.01.", can=Abilities(unicode=True))
    async with app.run_test(size=(80, 24)) as pilot:
        await shows(pilot, "Not judged alike: alpha 0.05 and 0.01.")
        await pilot.press("3")
        await shows(pilot, lambda text: "sorted by r before" in text and "Not judged" not in text)


async def test_rows_are_sorted_by_number_both_ways(rows: pl.DataFrame) -> None:
    async with app_on(rows).run_test(size=(80, 24)) as pilot:
        await shows(pilot, "heaviest")
        await pilot.press("a", "3")
        await shows(pilot, "sorted by r before")
        smallest = rows.sort("r_before", nulls_last=True)["channel"][0]
        assert f" {smallest} " in screen_lines(pilot.app)[3]
        await pilot.press("3")
        await pilot.pause()
        largest = rows.sort("r_before", descending=True, nulls_last=True)["channel"][0]
        assert f" {largest} " in screen_lines(pilot.app)[3]


async def test_the_rows_are_exported_and_an_existing_file_is_kept(rows: pl.DataFrame, tmp_path: Path) -> None:
    target = tmp_path / "x.csv"
    async with app_on(rows).run_test(size=(80, 24)) as pilot:
        await shows(pilot, "heaviest")
        for _ in range(2):
            await pilot.press("e")
            pilot.app.query_one("#answer").value = str(target)  # type: ignore[attr-defined]
            await pilot.press("enter")
            await shows(pilot, lambda text: "Wrote 4 channels" in text or "That file exists: give" in text)
    assert pl.read_csv(target).height == 4


@pytest.mark.parametrize("unicode", [True, False])
async def test_names_are_shown_and_never_acted_upon(rows: pl.DataFrame, *, unicode: bool) -> None:
    async with app_on(rows, unicode=unicode).run_test(size=(80, 24)) as pilot:
        await shows(pilot, "[@click=")
        assert screen_text(pilot.app).isascii()
        assert all(line.isprintable() for line in screen_lines(pilot.app))
        await pilot.press("q")
    assert pilot.app.return_value == 0


async def test_every_action_is_in_the_palette_and_runs_from_there(rows: pl.DataFrame) -> None:
    app = app_on(rows)
    async with app.run_test(size=(80, 24)) as pilot:
        await shows(pilot, "heaviest")
        offered = {command.title for command in app.get_system_commands(app.screen)}
        bound = {binding.description for binding in ComparisonScreen.BINDINGS if isinstance(binding, Binding)}
        assert bound <= offered
        await pilot.press("ctrl+p")
        # Letters that are keys of the screen are typed here.
        await pilot.press(*"all channels")
        await shows(pilot, "All channels, or only changes")
        await pilot.press("enter", "enter")
        await shows(pilot, "1 of 53 channels")


async def test_help_names_every_key_and_says_how_a_change_is_judged(rows: pl.DataFrame) -> None:
    async with app_on(rows).run_test(size=(80, 40)) as pilot:
        await shows(pilot, "heaviest")
        await pilot.press("question_mark")
        text = await shows(pilot, "How a change is judged")
        assert "standard error" in " ".join(text.split())
        for keys in ("1 to 6", "S  ", "f  ", "a  ", "e  ", "Ctrl+P", "Ctrl+Z", "q  Ctrl+C"):
            assert f"\n   {keys}" in text
        await pilot.press("escape")
        await shows(pilot, "heaviest changes first")
