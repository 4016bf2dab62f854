"""The error family: what is wrong, where, and how to mend it.

Every error a user can meet derives from `SpectermError`; its exit status is part of the command line's contract.
"""

from __future__ import annotations

from dataclasses import dataclass

LONGEST = 1000
"""So many characters of a message are shown, and of its mend."""


@dataclass(frozen=True, slots=True)
class Span:
    """A half-open range of character offsets into the text of a sheet."""

    start: int
    end: int


class SpectermError(Exception):
    """Something specterm refuses: `message` says what, `mend` how to go on, `span` where in the sheet (or None).

    `names_file` says that the message itself names the file that is wrong, which is not the sheet.
    """

    exit_status = 2

    def __init__(self, message: str, *, mend: str = "", span: Span | None = None) -> None:
        """Keep the facts as attributes; the text shown is made by `describe`."""
        super().__init__(message)
        self.message = message
        self.mend = mend
        self.span = span
        self.names_file = False


class SheetError(SpectermError, ValueError):
    """The sheet, a file it names or an argument cannot be understood (exit status 2)."""


class PhysicsError(SpectermError, ArithmeticError):
    """The sheet is understood, but the physics says no (exit status 1)."""

    exit_status = 1


class WorkStopped(SpectermError):
    """The user, or a newer request, asked a computation to stop."""

    exit_status = 1


def printable(text: str) -> str:
    """Return `text` with control characters replaced, so that nothing from a file can steer the terminal."""
    return "".join(c if c.isprintable() or c == "\n" else "\N{REPLACEMENT CHARACTER}" for c in text.replace("\t", " "))


def position(text: str, offset: int) -> tuple[int, int]:
    """Return line and column, both from 1, of a character offset in `text`."""
    before = text[:offset]
    return before.count("\n") + 1, offset - (before.rfind("\n") + 1) + 1


def describe(error: SpectermError, text: str = "", source: str = "sheet") -> str:
    """Return the message with file, line, column, the line itself, a caret under the place, and the mend."""
    lines, message, mend = [], _cut(error.message), _cut(error.mend)
    if error.span is None or not text:
        lines.append(f"{source}: {message}" if source and not error.names_file else message)
    else:
        row, column = position(text, error.span.start)
        lines.append(f"{source}:{row}:{column}: {message}")
        rows = text.split("\n")
        shown, offset = _window(rows[row - 1] if row <= len(rows) else "", column - 1)
        length = max(1, min(error.span.end - error.span.start, len(shown) - offset))
        lines += [f"    {shown}", f"    {' ' * offset}{'^' * length}"]
    if mend:
        lines.append(f"  {mend}")
    return printable("\n".join(lines))


def _cut(words: str) -> str:
    """Return words without an end cut short: what a user gave may be quoted in them."""
    return words if len(words) <= LONGEST else words[: LONGEST - 3] + "..."


def _window(line: str, offset: int, width: int = 100) -> tuple[str, int]:
    """Return the part of a long line around `offset`, and the offset within that part."""
    if len(line) <= width:
        return line, offset
    start = max(0, min(offset - width // 2, len(line) - width))
    return line[start : start + width], offset - start
