"""The command line: one module per command."""

from screener.cli.group import main

__all__ = ["main"]
