"""Running commands in this process, for the tests of the command line."""

import io
import sys
from dataclasses import dataclass

from specterm.cli import main

QUARTIC = "H = p^2 + x^4; x in (-inf, inf)"
COHERENT = "H = p^2/2 + x^2/2; x in (-inf, inf); state s = exp(-(x-1)^2/2)"


@dataclass(frozen=True)
class Ran:
    """Exit status, standard output, standard error."""

    status: int
    out: str
    err: str


def steering(text):
    """Return the control characters in a text, line ends left out."""
    return {c for c in text if c != "\n" and not c.isprintable()}


class Runner:
    """Runs commands with what pytest captures."""

    def __init__(self, capsys, monkeypatch):
        self.capsys, self.monkeypatch = capsys, monkeypatch

    def __call__(self, *words, stdin=None):
        """Return what a command did; it may leave by SystemExit as a process does."""
        if stdin is not None:
            self.monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(stdin)))
        self.capsys.readouterr()
        try:
            status = main([str(word) for word in words])
        except SystemExit as leaving:
            status = leaving.code if isinstance(leaving.code, int) else 1 if leaving.code else 0
        told = self.capsys.readouterr()
        assert "Traceback" not in told.err + told.out
        assert "defect" not in told.err
        return Ran(status, told.out, told.err)
