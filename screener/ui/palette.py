"""The few styles of the screen, in the terminal's own 16 colours, so that they suit dark and light backgrounds.

Colour is never the only carrier: wherever one of these is used, a symbol or a word says the same.
"""

from rich.style import Style
from textual.theme import Theme

PLAIN = Style()
STRONG = Style(bold=True)
QUIET = Style(dim=True)
CURSOR = Style(reverse=True)
HEADER = Style(bold=True, underline=True)
FLAGGED = Style(color="red", bold=True)
DONE = Style(color="cyan")
NOTICE = Style(color="magenta", bold=True)

THEME = Theme(
    name="terminal",
    ansi=True,
    primary="ansi_cyan",
    secondary="ansi_cyan",
    warning="ansi_magenta",
    error="ansi_red",
    success="ansi_cyan",
    accent="ansi_magenta",
    foreground="ansi_default",
    background="ansi_default",
    surface="ansi_default",
    panel="ansi_default",
    boost="ansi_default",
    variables={
        "ansi-background": "ansi_default",
        "ansi-foreground": "ansi_default",
        "block-cursor-foreground": "ansi_black",
        "block-cursor-background": "ansi_cyan",
        "input-cursor-foreground": "ansi_black",
        "input-cursor-background": "ansi_cyan",
        "input-selection-foreground": "ansi_black",
        "input-selection-background": "ansi_cyan",
    },
)
