"""The run file: what a run was asked, what it read, what it found; and what is made of it for people and programs."""

from screener.runs.comparing import Change, compared
from screener.runs.exports import REPORTS, export, export_comparison, write_whole
from screener.runs.names import default_run_path
from screener.runs.run_file import RunFile, is_run_file
from screener.runs.summary import Summary, summarise

__all__ = [
    "REPORTS",
    "Change",
    "RunFile",
    "Summary",
    "compared",
    "default_run_path",
    "export",
    "export_comparison",
    "is_run_file",
    "summarise",
    "write_whole",
]
