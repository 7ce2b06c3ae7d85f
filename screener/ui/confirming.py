"""What a confirmation says, in words."""

from __future__ import annotations

import textwrap

from screener.records import Confirmation
from screener.ui.numbers import p_text, r_text


def confirmation_lines(confirmation: Confirmation | None, width: int) -> list[str]:
    """Its sentence in lines of at most that width; none without a confirmation."""
    return textwrap.wrap(confirmation_words(confirmation), max(20, width)) if confirmation is not None else []


def confirmation_words(found: Confirmation) -> str:
    """What the samples say of r, in a sentence."""
    how = f"{found.samples:,} samples of {found.family} in the channel's own autocorrelation"
    if not found.samples:
        return f"By {how}: none has an r."
    verdict, relation = ("flagged", "below") if found.r < found.critical_r else ("clear", "not below")
    return (
        f"By {how}: {verdict}, r {r_text(found.r)} {relation} their critical {r_text(found.critical_r)}; "
        f"{found.as_small:,} as small, p {p_text(found.p)}."
    )
