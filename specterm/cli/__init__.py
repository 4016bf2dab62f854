"""The command line: one function, `main`, that returns an exit status."""

from specterm.cli.main import main

__all__ = ["main"]
