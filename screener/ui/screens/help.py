"""Help: keys, columns, the method in short, and the cautions."""

from __future__ import annotations

from screener.ui.palette import STRONG
from screener.ui.screens.page import Page
from screener.ui.widgets.lines import Line, plain

KEYS = """\
  Up Down       move; the cursor stays on its channel while rows come in or are sorted
  PgUp PgDn     a page on; Home and End: the first and the last row
  Enter  Esc    the plot over the table, and back
  [ ]           the plot against the previous or next family; also Left and Right
  /  n          find a channel by a part of its name; the next one
  f             only the flagged channels, or all
  w             only channels where a word is found (not scored, leave out, ...) or a condition holds, in SQL over the \
export columns: r < 0.98 AND n > 100; an empty one shows all
  s  S          sort by the next column; reverse the order
  0 to 9        sort in table order, or by verdict, channel, n, r, critical r, p, off, closest, decision; again reverses
  c             choose the columns
  v  V          the next or previous view of the channel: quantile plot, actual minus expected, low tail, high tail, \
run order, lag, histogram, all families
  Space  m      mark the channel; mark all rows shown, or none. What is decided or noted then is so for all marked
  u t x l       decide: use as it is, use transformed, leave out, look again; the letter stands beside the verdict
  d  a          take the decision back; add a note
  z  y          undo, and do again; every act is in the run file at once, with its time and user
  C             confirm the verdict: 2,000 samples in the channel's own autocorrelation, step, clipping and gaps, from \
its table; again stops; the result stands under the plot and in the run file
  e             export the rows as filtered and sorted here; .md and .html are reports with plots
  i             how the table was read: columns set aside, remarks
  Ctrl+P        all actions by name
  Ctrl+Z        put in the background (fg brings it back)
  q  Ctrl+C     quit; what was scored is in the run file, and the same command goes on from there"""

COLUMNS = """\
  !             flagged: r is below its critical value (with false discovery rate control: q is below alpha)
  -             not scored; the reason stands in the last column and under the table
  n             finite readings
  r             correlation of the sorted readings with the values that the family expects; 1 is a straight plot
  critical r    a channel truly of that family has a smaller r with probability alpha
  p             probability of so small an r, or a smaller one, for a channel truly of that family
  low-high      actual minus expected, from the low to the high tail: half height is on the line, up is above it
  conditions    what lowers r by itself: rounded, serial, clipped, stuck, drifting; also in the line under the table
  off (sd)      rms distance of the readings from the line in standard deviations: how much, where p says how sure
  closest       the family closest to the channel, where that was looked for"""

METHOD = (
    "Readings are sorted, x(1) to x(n), and held against G(u), the quantiles of the family at the plotting positions "
    "u (Filliben 1975 unless the plan says otherwise). r is the correlation of the two; it does not depend on location "
    "or scale. Its distribution for channels truly of the family was simulated, and gives the critical value and p. "
    "The plot shows actual readings against expected ones, location + scale x G(u), with the line on which they are "
    "equal; lognormal, Weibull and log-logistic are plotted in ln x. Bends at both ends mean heavy or light tails, a "
    "bow means skew. Under it stand the outermost readings: value, row, and in brackets actual minus expected (in ln x "
    "for families plotted so)."
)

BAND = (
    "The band around the line is the 95 % simultaneous band with equal local levels (Aldor-Noiman et al. 2013), "
    "simulated for fitted location and scale: of channels truly of the family, 95 in 100 lie wholly within it. It is "
    "drawn for normal, lognormal, logistic, log-logistic, double exponential, both extreme value families and "
    "Weibull; the others' fits scatter too much for one. Run order and lag show all rows up to 512; of longer records "
    "the lowest and highest reading of each of 256 stretches, and 128 readings with their followers."
)

CAUTIONS = (
    "Not flagged is not proof of normality: with few readings large departures pass, and r is weak against light tails "
    "and clusters.",
    "With very many readings small departures are flagged; look at the distance off the line before acting.",
    "Coarse steps, clipping, drift and readings that follow each other in time lower r by themselves. Critical values "
    "allow for that, as far as it could be found; the textbook ones (--plain) do not.",
    "Among many channels some are flagged by chance; the line under the title says how many to expect.",
    "Figures for safety, health or regulated characteristics need the governing standard, local codes, and licensed or "
    "qualified practice; this screen does not replace them.",
)

TERMINAL = "Plain ASCII is used when the locale does not declare UTF-8, or NO_COLOR is set; LANG=C.UTF-8 declares it."


def cautions() -> tuple[str, ...]:
    """What must be known before anything is concluded from a screen."""
    return CAUTIONS


def help_page() -> Page:
    """The page of help."""
    paragraphs: list[Line] = [
        plain("Keys", STRONG),
        *map(plain, KEYS.splitlines()),
        plain(""),
        plain("Columns", STRONG),
        *map(plain, COLUMNS.splitlines()),
        plain(""),
        plain("Cautions", STRONG),
        *(plain(f"* {caution}") for caution in CAUTIONS),
        plain(""),
        plain("Method", STRONG),
        plain(METHOD),
        plain(""),
        plain("Plots", STRONG),
        plain(BAND),
        plain(""),
        plain("Terminal", STRONG),
        plain(TERMINAL),
    ]
    return Page(paragraphs, id="help")
