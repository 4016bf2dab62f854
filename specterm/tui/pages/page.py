"""What a page is: a question about the spectrum, the rows that answer it, and the answer as data."""

from __future__ import annotations

from collections.abc import Callable, Hashable
from dataclasses import dataclass, field
from typing import Any, Protocol

from specterm.errors import SpectermError, WorkStopped
from specterm.session.notebook import Entry, Notebook
from specterm.session.records import Record
from specterm.stopping import stopping
from specterm.tui.look import Look
from specterm.tui.solving import Outcome, defect, digest_of
from specterm.views.cells import Rows
from specterm.views.status import Units

Stop = Callable[[], bool]
Tell = Callable[[Callable[[], Any]], None]


class Inquiry(Hashable, Protocol):
    """A question about one outcome, compared by value; answered off the event loop."""

    def answer(self, outcome: Outcome, should_stop: Stop, tell: Tell) -> Any:  # noqa: ANN401 - every page has its own result
        """Return the result; raises SpectermError. `tell` takes what makes a result of what is there already."""


@dataclass(frozen=True, eq=False)
class Answered:
    """The result of an inquiry, or the error in its place; `whole` says that no more is to come."""

    inquiry: Inquiry
    result: Any = None
    error: SpectermError | None = None
    whole: bool = True


def answered(inquiry: Inquiry, outcome: Outcome, should_stop: Stop, tell: Tell) -> Answered | None:
    """Return what came of an inquiry, None when it was stopped; nothing is raised."""
    try:
        with stopping(should_stop):
            return Answered(inquiry, inquiry.answer(outcome, should_stop, tell))
    except WorkStopped:
        return None
    except SpectermError as error:
        return Answered(inquiry, error=error)
    except Exception as error:  # the edge of the screen: a defect below must not end the session
        return Answered(inquiry, error=defect(error))


@dataclass(frozen=True)
class Bench:
    """What a page may ask about besides the outcome: the notebook, and waves already computed from it."""

    notebook: Notebook = field(default_factory=Notebook)
    waves: dict[Any, Any] = field(default_factory=dict, compare=False)

    def chain(self, outcome: Outcome) -> tuple[Entry, ...]:
        """Return the notebook's entries since the last preparation, () where that was one of another sheet."""
        chain = self.notebook.chain
        return chain if chain and chain[0].digest == digest_of(outcome.request) else ()


@dataclass(frozen=True)
class Room:
    """What the rows of a page are drawn for: its size, the look, the names of the units, the notebook, the second answer."""

    width: int
    height: int
    look: Look
    units: Units
    bench: Bench
    also: Any = None

    @property
    def glyphs(self) -> str:
        """What curves are made of."""
        return self.look.glyphs


@dataclass(frozen=True)
class Page:
    """One page: its name, what it asks (None where there is nothing to ask), its rows, its data, what to do about None.

    `alone` says that the rows make sense without a result; `keys` are the ids of the keys that act on it, with what the bottom
    line says of one where it differs; `also` is a second question that follows from the first answer.
    """

    name: str
    inquiry: Callable[[Look, Outcome, Bench], Inquiry | None]
    rows: Callable[[Any, Room], Rows]
    record: Callable[[Any, Room], Record | None]
    missing: str = ""
    alone: bool = False
    keys: tuple[str | tuple[str, str], ...] = ()
    also: Callable[[Any, Look, Outcome], Inquiry | None] | None = None


def prepared_in(look: Look, outcome: Outcome) -> str | None:
    """Return the state weighed, else the first one of the sheet, None where it has none."""
    return look.state or next(iter(outcome.states), None)


def subject_of(look: Look, outcome: Outcome) -> str | None:
    """Return the state a page is about: the one weighed, else the chosen level, None without levels."""
    spectrum = outcome.spectrum
    if spectrum is None or not spectrum.levels:
        return None
    return look.state or f"level({spectrum.levels[look.chosen].index})"
