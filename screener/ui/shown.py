"""Untrusted text made fit for a terminal line: nothing in it is interpreted, and it takes the cells it is given."""

from __future__ import annotations

import re

from rich.cells import cell_len, set_cell_size

UNSAFE = re.compile(
    "[\x00-\x1f\x7f-\x9f\u00ad\u061c\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb\ud800-\udfff\U000e0000-\U000e007f]"
)
"""Control, bidirectional, invisible and unpaired characters."""

CUT = "~"


def shown(text: str) -> str:
    """The text with every character that a terminal might act on written as its escape."""
    return UNSAFE.sub(lambda found: found.group().encode("unicode_escape").decode("ascii"), text)


def ascii_only(text: str) -> str:
    """The text with every other character written as its escape."""
    return text.encode("ascii", "backslashreplace").decode("ascii")


def fitted(text: str, width: int, *, right: bool = False) -> str:
    """The text cut or padded to exactly `width` cells; a cut one ends in a tilde."""
    length = cell_len(text)
    if length > width:
        return set_cell_size(text, width - 1) + CUT if width > 0 else ""
    blank = " " * (width - length)
    return blank + text if right else text + blank


def fitted_name(text: str, width: int) -> str:
    """The text cut in its middle or padded to exactly `width` cells: names often differ at their ends."""
    if cell_len(text) <= width or width < 5:
        return fitted(text, width)
    tail = (width - 1) // 2
    head = set_cell_size(text, width - 1 - tail)
    return head + CUT + set_cell_size(text[::-1], tail)[::-1]
