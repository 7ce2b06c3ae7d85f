"""What an application under test shows, and waiting for it."""

import asyncio
import time
from collections.abc import Callable

from textual.app import App
from textual.pilot import Pilot

PATIENCE = 30.0


def screen_lines(app: App[int]) -> list[str]:
    """The lines of text on the screen, as the compositor puts them together, filters included."""
    strips = app.screen._compositor.render_strips()
    background = app.screen.styles.background
    lines = []
    for strip in strips:
        for line_filter in app.get_line_filters():
            strip = strip.apply_filter(line_filter, background)  # noqa: PLW2901 - one filter after the other
        lines.append(strip.text)
    return lines


def screen_text(app: App[int]) -> str:
    """The text on the screen."""
    return "\n".join(screen_lines(app))


async def shows(pilot: Pilot[int], wanted: str | Callable[[str], bool]) -> str:
    """The text on the screen once it contains, or fulfils, what is wanted."""
    end = time.monotonic() + PATIENCE
    while time.monotonic() < end:
        await pilot.pause()
        text = screen_text(pilot.app)
        if wanted in text if isinstance(wanted, str) else wanted(text):
            return text
        await asyncio.sleep(0.02)
    raise AssertionError(f"Waited in vain for {wanted!r}; the screen shows:\n{screen_text(pilot.app)}")
