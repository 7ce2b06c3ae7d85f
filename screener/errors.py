"""Every error raised on purpose, with its exit code.

ScreenerError            1
├─ TableError            3   a measurement table cannot be used as given
├─ RunFileError          4   a run file cannot be used
└─ PlanError             5   a plan asks for something impossible

A message says what could not be done, to which thing, why, and the way out.
"""


class ScreenerError(Exception):
    """A failure that the user can mend; its text is shown as it stands, without a traceback."""

    exit_code = 1


class TableError(ScreenerError):
    """A measurement table cannot be used as given."""

    exit_code = 3


class RunFileError(ScreenerError):
    """A run file cannot be used."""

    exit_code = 4


class PlanError(ScreenerError):
    """A plan asks for something impossible."""

    exit_code = 5


class Cancelled(Exception):  # noqa: N818 -- not an error: the user asked for it
    """Work was given up because the user asked to stop."""
