"""Help on a comparison: keys, words, and how a change is judged."""

from __future__ import annotations

from screener.ui.palette import STRONG
from screener.ui.screens.page import Page
from screener.ui.widgets.lines import Line, plain

KEYS = """\
  Up Down       move; PgUp and PgDn: a page on; Home and End: the first and the last row
  1 to 6        sort by channel, change, r before, r now, size of the change in errors, q; again reverses
  S             reverse the order
  f             only what is newly flagged, or all
  a             also the channels that are the same, or only changes
  e             export the rows as filtered and sorted here
  Ctrl+P        all actions by name
  Ctrl+Z        put in the background (fg brings it back)
  q  Ctrl+C     quit"""

WORDS = """\
  ! newly flagged     flagged now and not before
  + cleared           flagged before and clear now
  ~ changed           same verdict, but r differs by more than chance explains
  - no longer scored  judged before and not now; both runs know why
  < missing           only in the old run
  > new               only in the new run
  in errors           the difference of the two r in standard errors of that difference; below 0 r has fallen
  q                   the probability of so large a difference by chance, adjusted for the number of channels"""

JUDGED = (
    "Channels are matched by name. The difference of a channel's two r is held against its standard error, from both "
    "runs. Away from the family, r scatters as its readings do: that part comes from the readings kept, by the "
    "influence of a reading on r (Serfling 1980). On the family it scatters as its null distribution, whose spread "
    "comes from the critical value; both parts add up in squares. A channel that follows itself in time is worth fewer "
    "readings, and its error is that much larger. The p of all channels are adjusted by "
    "Benjamini and Hochberg; changed means q below the alpha of the new run.",
    "Newly flagged and cleared say that the verdict is another one; r may have moved by little. The column in errors "
    "tells how much.",
    "Channels held against another family than before, or not scored in one of the runs, have no difference.",
    "The two runs are taken to be independent of each other: tables that share rows differ by less than that.",
    "Same is not proof that nothing changed: r tells of the shape of a channel, not of its level or spread.",
)


def comparison_help() -> Page:
    """The page of help."""
    paragraphs: list[Line] = [
        plain("Keys", STRONG),
        *map(plain, KEYS.splitlines()),
        plain(""),
        plain("Words", STRONG),
        *map(plain, WORDS.splitlines()),
        plain(""),
        plain("How a change is judged", STRONG),
        *(plain(f"* {sentence}") for sentence in JUDGED),
    ]
    return Page(paragraphs, id="help")
