"""Every key of the run's screen: what it does, what it is called, and where it is shown."""

from screener.ui.columns import COLUMNS

TABLE_KEYS: tuple[tuple[str, str, str], ...] = (
    ("Enter", "plot", "open_plot"),
    ("/", "find", "find"),
    ("f", "flagged", "flagged_only"),
    ("s S", "sort", "sort_next"),
    ("e", "export", "export"),
    ("i", "input", "reading"),
    ("?", "help", "help"),
    ("q", "quit", "quit"),
)
TURN_KEY = ("[ ]", "family", "turn_family(1)")
PLOT_KEYS = (("Esc", "table", "back"), TURN_KEY, *(key for key in TABLE_KEYS[1:] if key[0] != "e"))
WIDE_KEYS = (TABLE_KEYS[0], TURN_KEY, *TABLE_KEYS[1:])
"""What the last line shows: key, meaning, and the action that a click runs."""


NUMBERED = tuple(enumerate(COLUMNS, start=1))
ACTIONS = (
    ("enter", "open_plot", "Plot of this channel over the table"),
    ("escape", "back", "Back to the table"),
    ("right_square_bracket,right", "turn_family(1)", "Next family in the plot"),
    ("left_square_bracket,left", "turn_family(-1)", "Previous family in the plot"),
    ("slash", "find", "Find a channel by name"),
    ("n", "find_next", "Find the next one"),
    ("f", "flagged_only", "Only flagged channels, or all"),
    ("s", "sort_next", "Sort by the next column"),
    ("S,upper_s", "reverse", "Reverse the order"),
    ("0", "sort_by(0)", "Sort in table order"),
    *((str(number), f"sort_by({number})", f"Sort by {column.title or 'verdict'}") for number, column in NUMBERED),
    ("e", "export", "Export these rows to a file"),
    ("i", "reading", "What was read and set aside"),
    ("question_mark", "help", "Help"),
    ("q", "quit", "Quit"),
    ("down", "move(1)", "Down"),
    ("up", "move(-1)", "Up"),
    ("pagedown", "page(1)", "Page down"),
    ("pageup", "page(-1)", "Page up"),
    ("home", "move_to(0)", "First row"),
    ("end", "move_to(-1)", "Last row"),
)
"""Keys, action, and what it is called in the command palette."""
WHILE_ASKING = {"back", "move", "page"}
"""Actions whose keys mean nothing in the prompt's field."""
