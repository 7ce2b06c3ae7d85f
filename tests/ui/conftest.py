"""A screen on a run file made by hand."""

from pathlib import Path

import pytest
from made_run import made_run

from screener.ui.abilities import Abilities
from screener.ui.app import ScreenerApp
from screener.ui.source import Source

CHANNELS = 60


@pytest.fixture
def reviewed(tmp_path: Path) -> ScreenerApp:
    """The screen on a finished run of 60 channels."""
    return screen_on(tmp_path / "made.run")


@pytest.fixture
def hostile(tmp_path: Path) -> ScreenerApp:
    """The screen on a run whose channels have names that try to be more than names."""
    names = {
        0: "[@click=app.quit]free[/]",
        1: "[/]unbalanced",
        2: "esc\x1b]0;title\x07\x1b[2J",
        3: "\u202egnp.\u2066txt",
        4: "温度" * 30,
        5: "[red]µm",
    }
    return screen_on(tmp_path / "hostile.run", names=names)


def screen_on(path: Path, *, names: dict[int, str] | None = None, unicode: bool = True) -> ScreenerApp:
    """A screen on a run file made at that path."""
    made_run(path, CHANNELS, names=names).close()
    return ScreenerApp(Source(path.name, None, path), can=Abilities(unicode=unicode))


@pytest.fixture
def plain(tmp_path: Path) -> ScreenerApp:
    """The screen on a terminal that has ASCII only, on a run with other names."""
    return screen_on(tmp_path / "plain.run", names={0: "Öldruck_µm", 1: "温度"}, unicode=False)
