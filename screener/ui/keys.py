"""Every key of the run's screen: what it does, what it is called, and where it is shown."""

from screener.ui.columns import NUMBERED, column_named

TABLE_KEYS: tuple[tuple[str, str, str], ...] = (
    ("Enter", "plot", "open_plot"),
    ("/", "find", "find"),
    ("f", "flagged", "flagged_only"),
    ("w", "where", "where"),
    ("s S", "sort", "sort_next"),
    ("?", "help", "help"),
    ("q", "quit", "quit"),
    ("utxl", "decide", "help"),
    ("z", "undo", "undo"),
    ("e", "export", "export"),
    ("Space", "mark", "mark"),
    ("c", "columns", "columns"),
    ("i", "input", "reading"),
)
PLOT_KEYS = (
    ("Esc", "table", "back"),
    ("v", "view", "turn_view(1)"),
    ("[ ]", "family", "turn_family(1)"),
    ("utxl", "decide", "help"),
    ("a", "note", "annotate"),
    ("C", "confirm", "confirm"),
    ("?", "help", "help"),
    ("q", "quit", "quit"),
)
WIDE_KEYS = (TABLE_KEYS[0], *PLOT_KEYS[1:3], *TABLE_KEYS[1:])
"""What the last line shows: key, meaning, and the action that a click runs."""

SORTS = tuple((str(number), f"sort_by({number})", column_named(key)) for number, key in enumerate(NUMBERED, start=1))
ACTIONS = (
    ("enter", "open_plot", "Plot of this channel over the table"),
    ("escape", "back", "Back to the table"),
    ("right_square_bracket,right", "turn_family(1)", "Next family in the plot"),
    ("left_square_bracket,left", "turn_family(-1)", "Previous family in the plot"),
    ("v", "turn_view(1)", "Next view: difference, tails, run order, lag, histogram, families"),
    ("V,upper_v", "turn_view(-1)", "Previous view"),
    ("slash", "find", "Find a channel by name"),
    ("n", "find_next", "Find the next one"),
    ("f", "flagged_only", "Only flagged channels, or all"),
    ("w", "where", "Only channels where a condition holds"),
    ("s", "sort_next", "Sort by the next column"),
    ("S,upper_s", "reverse", "Reverse the order"),
    ("0", "sort_by(0)", "Sort in table order"),
    *((key, action, f"Sort by {column.title or 'verdict'}") for key, action, column in SORTS),
    ("c", "columns", "Choose the columns"),
    ("space", "mark", "Mark this channel, or unmark it"),
    ("m", "mark_all", "Mark all channels shown, or none"),
    ("u", "decide('use as it is')", "Decide: use as it is"),
    ("t", "decide('use transformed')", "Decide: use transformed"),
    ("x", "decide('leave out')", "Decide: leave out"),
    ("l", "decide('look again')", "Decide: look again"),
    ("d", "decide('')", "Take the decision back"),
    ("a", "annotate", "Add a note"),
    ("z", "undo", "Undo the last decision or note"),
    ("y", "redo", "Do again what was undone"),
    ("C,upper_c", "confirm", "Confirm the verdict by samples in the channel's own autocorrelation, or stop that"),
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
