"""The dialogs: a question with letter answers, a list to choose from by name, the help."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import Vertical
from textual.screen import ModalScreen
from textual.widgets import Input

from specterm.tui.cell_pane import CellPane
from specterm.views.cells import Row, Rows, fit_row, pad, width_of


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of a list: what comes back when it is chosen, its name, and a remark."""

    value: str
    name: str
    remark: str = ""


class Question(ModalScreen[str]):
    """A question; each answer is a letter. Comes back with the letter."""

    DEFAULT_CSS = (
        "Question { align: center middle; background: ansi_default; }"
        "Question Vertical { width: 60; max-width: 100%; height: auto; border: solid ansi_default; padding: 0 1; }"
    )

    def __init__(self, words: str, answers: Mapping[str, str]) -> None:
        """Keep the words and the answers, letter to meaning; the first letter of the last one also answers Enter and left."""
        super().__init__()
        self.words, self.answers = words, dict(answers)
        self.pane = CellPane()

    def compose(self) -> ComposeResult:
        """Show the question over its answers."""
        with Vertical():
            yield self.pane

    def on_mount(self) -> None:
        """Fill the box."""
        width = max(10, min(56, self.app.size.width - 4))
        rows: list[Row] = [((line, "title"),) for line in textwrap.wrap(self.words, width)] + [()]
        rows += [((f"  {letter}  ", "key"), (meaning, "plain")) for letter, meaning in self.answers.items()]
        self.pane.styles.height = len(rows)
        self.pane.show(tuple(rows))

    def on_key(self, event: events.Key) -> None:
        """Answer with a letter; Enter, left, Tab and q take the last answer, which changes nothing."""
        letter = event.character or event.key
        if letter in self.answers:
            event.stop()
            self.dismiss(letter)
        elif event.key in ("enter", "left", "escape", "q", "tab"):
            event.stop()
            self.dismiss(list(self.answers)[-1])


class Chooser(ModalScreen[str | None]):
    """A list to choose from: typing narrows it, up and down move, Enter takes, Tab goes back.

    With `free` the typed text itself is taken where no entry matches it, or where it is a path.
    """

    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding("tab,shift+tab,escape", "back", "Back", priority=True),
        Binding("enter", "take", "Take", priority=True),
        Binding("up", "move(-1)", "Up", priority=True),
        Binding("down", "move(1)", "Down", priority=True),
    ]
    DEFAULT_CSS = (
        "Chooser { align: center middle; background: ansi_default; }"
        "Chooser Vertical { width: 90%; max-width: 100; height: 80%; border: solid ansi_default; padding: 0 1; }"
        "Chooser Input { border: none; height: 1; padding: 0; background: ansi_default; }"
        "Chooser Input:focus { border: none; }"
        "Chooser #entries { height: 1fr; }"
        "Chooser.bare Vertical { height: 5; }"
        "Chooser.bare #entries { display: none; }"
    )

    def __init__(self, title: str, entries: Sequence[Entry], *, free: bool = False, text: str = "") -> None:
        """Keep the entries; `text` is what stands in the field at first."""
        super().__init__()
        self.words, self.entries, self.free = title, tuple(entries), free
        self.matching = self.entries
        self.place = 0
        self.field = Input(text, compact=True, select_on_focus=False)
        self.field.cursor_blink = False
        self.heading = CellPane()
        self.listed = CellPane("entries")
        self.foot = CellPane()

    def compose(self) -> ComposeResult:
        """Put heading, field, list and keys below each other."""
        with Vertical():
            yield self.heading
            yield self.field
            yield self.listed
            yield self.foot

    def on_mount(self) -> None:
        """Show the whole list."""
        self.set_class(not self.entries, "bare")
        self.heading.show((((self.words, "title"),),))
        keys = "type to narrow  up/down  Enter takes  Tab back" if self.entries else "Enter takes  Tab back"
        self.foot.show((((keys, "dim"),),))
        self.field.focus()
        self.call_after_refresh(self._draw)

    def on_resize(self) -> None:
        """Draw the list for the new size."""
        self.call_after_refresh(self._draw)

    def on_input_changed(self, event: Input.Changed) -> None:
        """Narrow the list to the entries that hold all words typed."""
        if self._narrow(event.value):
            self._draw()

    def _narrow(self, typed: str) -> bool:
        """Keep the entries that hold all words typed, the nearest first; return whether the list is another one."""
        words = typed.lower().split()
        holding = [e for e in self.entries if all(word in f"{e.name} {e.remark}".lower() for word in words)]
        found = tuple(sorted(holding, key=lambda e: _distance(e.name.lower(), typed.lower().strip())))
        if found == self.matching:
            return False
        self.matching, self.place = found, 0
        return True

    def action_take(self) -> None:
        """Take the entry marked, or the text typed."""
        typed = self.field.value.strip()
        self._narrow(typed)
        if (self.free and not self.entries) or (self.free and typed and ("/" in typed or not self.matching)):
            self.dismiss(typed)
        elif self.matching:
            self.dismiss(self.matching[self.place].value)
        else:
            self.dismiss(None)

    def action_back(self) -> None:
        """Leave without choosing."""
        self.dismiss(None)

    def action_move(self, steps: int) -> None:
        """Mark another entry."""
        if self.matching:
            self.place = (self.place + steps) % len(self.matching)
            self._draw()

    def _draw(self) -> None:
        """Show the part of the list around the marked entry."""
        width, height = self.listed.size
        self.listed.show(listing(self.matching, self.place, width, height))


def _distance(name: str, typed: str) -> int:
    """Return how far a name is from what is typed: 0 the same, 1 it starts like it, 2 anything else."""
    return 0 if name == typed else 1 if typed and name.startswith(typed) else 2


def listing(entries: Sequence[Entry], marked: int, width: int, height: int) -> Rows:
    """Return `height` rows of a list around the marked entry, names in one column and remarks beside them."""
    if not entries:
        return ((("nothing matches", "dim"),),)
    first = max(0, min(marked - height // 2, len(entries) - height))
    column = min(max(width_of(entry.name) for entry in entries) + 2, max(4, width // 2))
    rows: list[Row] = []
    for place in range(first, min(len(entries), first + height)):
        entry = entries[place]
        name = ("> " if place == marked else "  ") + pad(entry.name, column)
        style = "chosen" if place == marked else "plain"
        rows.append(fit_row(((name, style), (entry.remark, style if place == marked else "dim")), width))
    return tuple(rows)


class Help(ModalScreen[None]):
    """All keys, as they are bound now; up and down scroll, q, left or Enter goes back."""

    DEFAULT_CSS = (
        "Help { align: center middle; background: ansi_default; }"
        "Help Vertical { width: 100%; max-width: 92; height: 100%; padding: 0 1; }"
        "Help #lines { height: 1fr; }"
    )

    def __init__(self, lines: Callable[[int], Rows]) -> None:
        """Keep what makes the lines for a width."""
        super().__init__()
        self.lines, self.first = lines, 0
        self.pane = CellPane("lines")
        self.foot = CellPane()

    def compose(self) -> ComposeResult:
        """Show the lines over the keys that leave them."""
        with Vertical():
            yield self.pane
            yield self.foot

    def on_mount(self) -> None:
        """Draw once the size is known."""
        self.call_after_refresh(self._draw)

    def on_resize(self) -> None:
        """Draw for the new size."""
        self.call_after_refresh(self._draw)

    def on_key(self, event: events.Key) -> None:
        """Scroll or leave."""
        steps = {"up": -1, "k": -1, "down": 1, "j": 1, "pageup": -10, "pagedown": 10}
        event.stop()
        if event.key in steps:
            self.first += steps[event.key]
            self._draw()
        elif event.key in ("q", "left", "enter", "escape", "question_mark", "h", "tab"):
            self.dismiss(None)

    def _draw(self) -> None:
        """Show the part of the lines that fits."""
        width, height = self.pane.size
        rows = self.lines(width)
        self.first = max(0, min(self.first, len(rows) - height))
        self.pane.show(rows[self.first : self.first + height])
        more = "up/down scroll  " if len(rows) > height else ""
        self.foot.show((((f"{more}q, left or Enter goes back", "dim"),),))
