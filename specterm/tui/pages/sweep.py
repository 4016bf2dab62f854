"""The page of a sweep: followed levels against a parameter, the smallest gaps, and the state at the cursor."""

from __future__ import annotations

import os
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from specterm.errors import SpectermError
from specterm.session.records import Record
from specterm.session.sweeps import journal_of
from specterm.tui.look import Look
from specterm.tui.numbers_of import numbers_of
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import BuiltIn, Outcome, Request, compute
from specterm.tui.terminal import start_tracker
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, text_rows
from specterm.views.level_figure import draw
from specterm.views.numbers import bracket, short, with_unit
from specterm.views.scene import scene

if TYPE_CHECKING:
    from specterm.analysis.sweep import Axis, Point, Sweep, SweepRequest


HERE = 1.5
"""Seconds of expected work above which a sweep goes to other processes, of which there are as many as:"""
WORKERS = 2


@dataclass(frozen=True)
class Swept:
    """Asks for a sweep; what is done is told on the way and kept in a journal."""

    request: SweepRequest

    def answer(self, outcome: Outcome, should_stop: Stop, tell: Tell) -> Sweep:
        """Return the whole sweep; one that lasts is left to processes of its own."""
        from specterm.analysis.sweep import assemble, sweep  # noqa: PLC0415 - heavy
        from specterm.analysis.sweep_crews import processes  # noqa: PLC0415

        seconds = outcome.spectrum.seconds * self.request.size if outcome.spectrum is not None else 0.0
        crew = None
        if seconds > HERE:
            start_tracker()
            crew = processes(min(WORKERS, len(os.sched_getaffinity(0))))
        points: list[Point] = []

        def taken(point: Point) -> None:
            points.append(point)
            tell(lambda: assemble(self.request, list(points)))

        return sweep(self.request, crew=crew, journal=journal_of(self.request), should_stop=should_stop, on_point=taken)


@dataclass(frozen=True)
class There:
    """Asks for the whole spectrum at one place of a sweep."""

    request: Request
    name: str
    value: float

    def answer(self, _: Outcome, should_stop: Stop, __: Tell) -> Outcome:
        """Return the outcome there."""
        from specterm.language.edits import with_number  # noqa: PLC0415 - heavy

        text = with_number(self.request.text, self.name, self.value)
        return compute(BuiltIn(), replace(self.request, text=text), should_stop, lambda _: None)

    def __hash__(self) -> int:
        """Return a hash; the overrides of a request have none."""
        return hash((self.request.text, self.name, self.value))


def request_of(look: Look, outcome: Outcome) -> SweepRequest | None:
    """Return the sweep chosen, None where none is; the present value of what is swept does not count."""
    from specterm.analysis.sweep_request import SweepRequest, axis_of, quantity_of  # noqa: PLC0415 - heavy

    ranges, asked = look.choices.sweep, outcome.request
    if not ranges:
        return None
    axes = tuple(axis_of(text) for text in ranges)
    start = outcome.spectrum.levels[look.chosen].index if outcome.spectrum and outcome.spectrum.levels else 0
    quantity = quantity_of(look.choices.quantity, start if look.choices.quantity != "levels" else 0)
    return SweepRequest(
        _without_present(asked.text, axes), axes, str(asked.folder.absolute()), tuple(sorted(asked.overrides.items())),
        asked.count, asked.near, asked.tolerance, quantity,
    )  # fmt: skip


@lru_cache(maxsize=8)
def _without_present(text: str, axes: tuple[Axis, ...]) -> str:
    """Return the text with the first values of a sweep for the present ones; kept, as every redraw asks."""
    from specterm.language.edits import with_number  # noqa: PLC0415 - heavy

    for axis in axes:
        text = with_number(text, axis.name, axis.values[0]) if axis.name in numbers_of(text) else text
    return text


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Swept | None:
    try:
        request = request_of(look, outcome)
    except SpectermError:
        return None
    return None if request is None else Swept(request)


def _also(found: Sweep | None, look: Look, outcome: Outcome) -> There | None:
    """Return the question for the spectrum at the cursor of a sweep over a plain number."""
    if found is None or len(found.request.axes) != 1 or found.request.axes[0].name not in numbers_of(outcome.request.text):
        return None
    place = min(look.choices.cursor, len(found.places) - 1)
    return There(outcome.request, found.request.axes[0].name, float(found.places[place, 0]))


def _rows(found: Sweep, room: Room) -> Rows:
    """Return the figure, what is at the cursor, the gaps, and the level figure there where there is room."""
    from specterm.views.sweep_figure import gap_table, map_rows, sweep_rows  # noqa: PLC0415 - it brings the engine

    if len(found.request.axes) == 2:
        return padded(map_rows(found, room.width, _level(found, room), room.glyphs), room.width, room.height)
    place = min(room.look.choices.cursor, len(found.places) - 1)
    head: list[Row] = [fit_row(((" " + _here(found, place, room), "title"),), room.width)]
    gaps = text_rows(gap_table(found), room.width, glyphs=room.glyphs)[: max(0, room.height // 4)] if found.gaps else ()
    figure = room.height // 3 if room.height >= 21 and isinstance(room.also, Outcome) and room.also.origin is not None else 0
    height = room.height - len(head) - len(gaps) - figure
    rows = [*head, *sweep_rows(found, room.width, height, _level(found, room), place, room.glyphs), *gaps]
    if figure and isinstance(room.also, Outcome) and room.also.origin is not None:
        levels = room.also.origin.spectrum.levels if room.also.origin.spectrum else ()
        chosen = min(_column(found, place, room), len(levels) - 1) if levels else None
        view = scene(room.also.origin, chosen, samples=max(100, 8 * room.width))
        rows += draw(view, room.width, figure, mode="psi", glyphs=room.glyphs)
    return padded(rows, room.width, room.height)


def _level(found: Sweep, room: Room) -> int | None:
    """Return the number of the level drawn strong."""
    return found.numbers[min(room.look.chosen, len(found.numbers) - 1)] if found.numbers else None


def _column(found: Sweep, place: int, room: Room) -> int:
    """Return which level the strong branch is at a point."""
    from specterm.views.sweep_figure import branch_of  # noqa: PLC0415 - it is loaded by now

    branch = branch_of(found, _level(found, room))
    return room.look.chosen if branch is None else max(0, int(found.branches[place, branch]))


def _here(found: Sweep, place: int, room: Room) -> str:
    """Return the place of the cursor and the strong branch's level there."""
    axis, done = found.request.axes[0], int(found.done.sum())
    parts = [f"{axis.name} = {with_unit(short(float(found.places[place, 0]), 8), found.units[0])}"]
    column = _column(found, place, room)
    if found.numbers and column < len(found.numbers) and found.done[place]:
        error = float(found.quantity_errors[place, column])
        value = bracket(float(found.quantity[place, column]), error)
        parts.append(f"level {found.numbers[column]}: {with_unit(value, found.quantity_unit)}")
    if done < len(found.done):
        parts.append(f"{done} of {len(found.done)} points")
    return "   ".join([*parts, *found.notes[:1]])


def _record(found: Any, _: Room) -> Record:  # noqa: ANN401 - a sweep
    from specterm.session.records.sweeps import sweep_record  # noqa: PLC0415 - heavy

    return sweep_record(found)


SWEEP = Page(
    "sweep", _inquiry, _rows, _record, "no sweep yet: l asks for a range NAME=first:last:how many",
    keys=("page.along", "page.amount", ("page.observable", "d quantity"), "tune.take"), also=_also,
)
