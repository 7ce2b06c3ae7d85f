"""`python -m screener` is the same as `screener`."""

from screener.cli import main

main()
