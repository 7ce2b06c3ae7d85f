"""Text that came out of a file, made safe to show."""

import unicodedata


def visible(text: str) -> str:
    r"""The text with control, bidirectional and other unprintable characters written as escapes such as `\x1b`.

    Raises: TypeError for anything but text, which a file from elsewhere may hold.
    """
    if str.isprintable(text):
        return text
    return "".join(c if c.isprintable() or unicodedata.category(c) == "Zs" else _escape(c) for c in text)


def _escape(character: str) -> str:
    return character.encode("unicode_escape").decode("ascii")
