"""The screen on a finished run: what keys and mouse do."""

from pathlib import Path

import polars as pl
import pytest
from made_run import FAMILY_NAMES
from screen_text import screen_lines, screen_text, shows

from screener.records import RESULT_COLUMNS
from screener.runs import RunFile
from screener.ui.app import ScreenerApp

NARROW, WIDE = (80, 24), (140, 45)
FIRST_ROW = 3


def under_cursor(app: ScreenerApp) -> str:
    """The table's line with the pointer."""
    return next(line for line in screen_lines(app) if line.startswith(">"))


def results_of(app: ScreenerApp) -> pl.DataFrame:
    """What the run file holds."""
    assert app.run_path is not None
    with RunFile.open(app.run_path, read_only=True) as run:
        return run.results()


async def test_the_top_lines_say_what_was_run_and_what_was_found(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        text = await shows(pilot, "1 of 60 channels")
        assert "bench_run.csv   120 rows x 60 channels   normal   alpha 0.05 each" in text
        flagged = results_of(reviewed).filter(pl.col("verdict") == "flagged").height
        assert f"60 channels: {flagged} flagged" in text


async def test_rows_stand_in_table_order_with_a_symbol_before_flagged_and_unscored_ones(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        lines = screen_lines(reviewed)[FIRST_ROW : FIRST_ROW + 18]
        for line, row in zip(lines, results_of(reviewed).iter_rows(named=True), strict=False):
            assert line[2:].split()[0] == row["channel"]
            assert line[1] == {"flagged": "!", "not scored": "-", "clear": " "}[row["verdict"]]


async def test_the_cursor_stays_on_its_channel_while_rows_are_sorted(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press(*["down"] * 5)
        assert "flow_5 " in under_cursor(reviewed)
        for keys in ("6", "S", "4", "2", "0"):
            await pilot.press(keys)
            await pilot.pause()
            assert "flow_5 " in under_cursor(reviewed)


async def test_sorting_by_p_brings_the_smallest_to_the_top_and_unscored_rows_to_the_end(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("6", "home")
        await pilot.pause()
        smallest = results_of(reviewed).fill_nan(None).sort("p", nulls_last=True)["channel"][0]
        assert f"{smallest} " in under_cursor(reviewed)
        assert "sorted by p, rising" in screen_text(reviewed)
        await pilot.press("end")
        await pilot.pause()
        assert "not scored: fewer than 3 readings" in screen_text(reviewed)


async def test_a_click_on_a_title_sorts_by_it_and_another_reverses(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        title = screen_lines(reviewed)[2].index("critical r")
        await pilot.click("ChannelTable", offset=(title + 2, 0))
        await shows(pilot, "sorted by critical r, rising")
        await pilot.click("ChannelTable", offset=(title + 2, 0))
        await shows(pilot, "sorted by critical r, falling")


async def test_a_click_moves_the_cursor_and_a_second_opens_the_plot(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.click("ChannelTable", offset=(10, 4))
        await shows(pilot, "4 of 60 channels")
        await pilot.click("ChannelTable", offset=(10, 4))
        await shows(pilot, "expected if normal")


async def test_only_flagged_rows_are_shown_when_asked_for(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("f")
        flagged = results_of(reviewed).filter(pl.col("verdict") == "flagged").height
        await shows(pilot, f"of {flagged} flagged")
        assert {line[1] for line in screen_lines(reviewed)[FIRST_ROW : FIRST_ROW + min(flagged, 15)]} == {"!"}
        await pilot.press("f")
        await shows(pilot, "of 60 channels")


async def test_a_channel_is_found_while_its_name_is_typed_and_the_next_by_n(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("slash", *"W_1")
        assert "flow_1 " in under_cursor(reviewed)
        await pilot.press("enter", "n")
        await pilot.pause()
        assert "flow_10 " in under_cursor(reviewed)
        await pilot.press("slash", *"zz")
        await shows(pilot, "No channel here has 'zz' in its name.")
        await pilot.press("escape", "q")
    assert reviewed.return_value == 0


async def test_enter_opens_the_plot_over_the_table_and_escape_closes_it(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("enter")
        text = await shows(pilot, "expected if normal")
        assert "critical r" not in text
        assert "location 10   scale 2" in text
        await pilot.press("down")
        await shows(pilot, "flow_1   n 120")
        await pilot.press("escape")
        await shows(pilot, "critical r")


async def test_in_a_wide_window_the_plot_of_the_channel_under_the_cursor_stands_beside_the_table(
    reviewed: ScreenerApp,
) -> None:
    async with reviewed.run_test(size=WIDE) as pilot:
        text = await shows(pilot, "expected if normal")
        assert "critical r" in text
        assert "flow_0   n 120" in text
        await pilot.press("down", "down", "down")
        await shows(pilot, "flow_3   n 120")


async def test_the_family_is_turned_through_all_and_back(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=WIDE) as pilot:
        await shows(pilot, "expected if normal")
        for name in (*FAMILY_NAMES[1:], FAMILY_NAMES[0]):
            await pilot.press("right_square_bracket")
            await shows(pilot, f"expected if {name}")
        await pilot.press("left")
        await shows(pilot, f"expected if {FAMILY_NAMES[-1]}")


async def test_an_unscored_channel_has_a_sentence_in_place_of_a_plot(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=WIDE) as pilot:
        await shows(pilot, "expected if normal")
        await pilot.press(*["down"] * 7)
        await shows(pilot, "No readings to plot.")


async def test_the_rows_are_exported_as_filtered_and_sorted(reviewed: ScreenerApp, tmp_path: Path) -> None:
    target = tmp_path / "flagged rows.csv"
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("f", "6", "e")
        await shows(pilot, "Export these rows")
        pilot.app.query_one("#answer").value = str(target)  # type: ignore[attr-defined]
        await pilot.press("enter")
        await shows(pilot, "Wrote ")
    written = pl.read_csv(target)
    expected = results_of(reviewed).filter(pl.col("verdict") == "flagged").sort("p")
    assert written.columns == list(RESULT_COLUMNS)
    assert written["channel"].to_list() == expected["channel"].to_list()


async def test_an_existing_file_is_replaced_only_after_a_second_enter(reviewed: ScreenerApp, tmp_path: Path) -> None:
    target = tmp_path / "kept.csv"
    target.write_text("kept")
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("e")
        pilot.app.query_one("#answer").value = str(target)  # type: ignore[attr-defined]
        await pilot.press("enter")
        await shows(pilot, "exists: Enter again replaces it")
        assert target.read_text() == "kept"
        await pilot.press("enter")
        await shows(pilot, "Wrote 60 channels")
    assert pl.read_csv(target).height == 60


@pytest.mark.parametrize("name", ["out.xyz", "missing/out.csv"])
async def test_a_file_that_cannot_be_written_is_answered_with_a_sentence(
    reviewed: ScreenerApp, tmp_path: Path, name: str
) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("e")
        pilot.app.query_one("#answer").value = str(tmp_path / name)  # type: ignore[attr-defined]
        await pilot.press("enter")
        await shows(pilot, "Couldn't")
        assert not (tmp_path / name).exists()


async def test_the_page_on_the_table_says_what_was_set_aside_and_remarked(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("i")
        text = await shows(pilot, "Columns set aside: 1")
        assert "operator  text, not a measurement" in text
        assert "Decimal commas were read." in text
        await pilot.press("escape")
        await shows(pilot, "1 of 60 channels")


async def test_the_help_has_the_keys_the_method_and_the_cautions(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=(100, 100)) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("question_mark")
        text = " ".join((await shows(pilot, "Cautions")).split())
        assert "Not flagged is not proof of normality" in text
        assert "governing standard, local codes, and licensed or qualified practice" in text
        assert "Filliben 1975" in text
        assert "find a channel by a part of its name" in text


async def test_the_help_can_be_scrolled_to_its_end(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.press("question_mark")
        await shows(pilot, "Keys")
        assert "LANG=C.UTF-8 declares it" not in screen_text(reviewed)
        await pilot.press(*["pagedown"] * 6)
        await shows(pilot, "LANG=C.UTF-8 declares it")


async def test_every_action_of_the_keys_is_in_the_command_palette(reviewed: ScreenerApp) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        named = {command.title for command in reviewed.get_system_commands(pilot.app.screen)}
        assert named >= {
            "Plot of this channel over the table",
            "Next family in the plot",
            "Find a channel by name",
            "Only flagged channels, or all",
            "Sort by p",
            "Reverse the order",
            "Export these rows to a file",
            "What was read and set aside",
            "Help",
            "Quit",
        }
        await pilot.press("ctrl+p", *"only flagged")
        await shows(pilot, "Only flagged channels, or all")
        await pilot.press("enter")
        await shows(pilot, " flagged, table order")


@pytest.mark.parametrize("size", [(59, 24), (80, 14), (20, 5), (1, 1)])
async def test_a_window_that_is_too_small_is_told_so_and_comes_back(
    reviewed: ScreenerApp, size: tuple[int, int]
) -> None:
    async with reviewed.run_test(size=NARROW) as pilot:
        await shows(pilot, "1 of 60 channels")
        await pilot.resize_terminal(*size)
        await shows(pilot, f"This window has {size[0]} x {size[1]} cells."[: size[0] - 1])
        await pilot.resize_terminal(*WIDE)
        await shows(pilot, "expected if normal")


@pytest.mark.parametrize("size", [NARROW, WIDE])
async def test_names_are_shown_and_never_acted_upon(hostile: ScreenerApp, size: tuple[int, int]) -> None:
    async with hostile.run_test(size=size) as pilot:
        await shows(pilot, "1 of 60 channels")
        for key in ("enter", "down", "down", "down", "down", "down", "escape", "i", "escape"):
            await pilot.press(key)
            await pilot.pause()
            assert all(line.isprintable() for line in screen_lines(hostile))
        await pilot.click("ChannelTable", offset=(5, 1))
        await pilot.press("home")
        await shows(pilot, "[@click=app")
        assert hostile.is_running


async def test_a_terminal_of_ascii_only_gets_nothing_else_on_any_page(plain: ScreenerApp) -> None:
    async with plain.run_test(size=WIDE) as pilot:
        await shows(pilot, "expected if normal")
        assert "\\xd6ldruck_\\xb5m" in screen_text(plain)
        for key in ("right_square_bracket", "enter", "escape", "e", "escape", "i", "escape", "ctrl+p"):
            await pilot.press(key)
            await pilot.pause()
            assert screen_text(plain).isascii()
