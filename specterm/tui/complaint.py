"""What is wrong with a sheet, in the words of its error: as rows of a pane, or in one line."""

from __future__ import annotations

import textwrap

from specterm.errors import SpectermError, position, printable
from specterm.views.cells import Row, fit_row


def sentence(error: SpectermError, text: str) -> str:
    """Return an error with its place in `text` and how to mend it, in one line."""
    return printable(f"{_where(error, text)}{error.message}" + (f"; {_mend(error)}" if error.mend else "")).replace("\n", " ")


def _mend(error: SpectermError) -> str:
    """Return how to mend it, with the keys that do here what options do on the command line."""
    words = error.mend.replace("--near E", "f asks for an energy (--near E)").replace("with -n", "with + (-n)")
    return printable(words)


def _where(error: SpectermError, text: str) -> str:
    """Return the place of an error in words, "" where it has none."""
    if error.span is None:
        return ""
    row, column = position(text, error.span.start)
    return f"line {row}, column {column}: "


def complaint(error: SpectermError, text: str, width: int, most: int = 6) -> tuple[Row, ...]:
    """Return what is wrong and how to mend it in at most `most` rows; what is cut leaves a mark."""
    where = _where(error, text)
    said = textwrap.wrap(printable(where + error.message), width, max_lines=max(1, most - 1), placeholder=" …") or [where]
    room = most - len(said)
    mend = textwrap.wrap(_mend(error), width, max_lines=room, placeholder=" …") if room and error.mend else []
    rows: list[Row] = [((line, "warn"),) for line in said]
    rows += [((line, "plain"),) for line in mend]
    return tuple(fit_row(row, width) for row in rows)
