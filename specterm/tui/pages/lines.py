"""The page of lines: transitions from the chosen level or from all, or into another sheet, drawn and listed."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, table_rows
from specterm.views.numbers import short, with_unit

if TYPE_CHECKING:
    from specterm.analysis.transitions import Transitions


@dataclass(frozen=True)
class Lines:
    """Asks for the lines from a level (None: from all), for a dipole, at a temperature, or into another sheet."""

    start: int | None
    dipole: str | None
    temperature: float | None
    into: str | None

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> Transitions:
        """Return the lines."""
        from specterm.analysis.prepared import other_sheet  # noqa: PLC0415 - heavy
        from specterm.analysis.transitions import into_other, transitions  # noqa: PLC0415
        from specterm.spectrum import solve  # noqa: PLC0415

        model, spectrum = outcome.model, outcome.spectrum
        assert spectrum is not None
        starts = tuple(level.index for level in spectrum.levels) if self.start is None else (self.start,)
        if self.into is None:
            return transitions(model, spectrum, starts, self.dipole, temperature=self.temperature)
        other = other_sheet(model, self.into, outcome.request.folder)
        found = solve(other, count=outcome.request.count, tolerance=outcome.request.tolerance, should_stop=should_stop)
        return into_other(model, spectrum, found, starts, self.dipole)


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Lines | None:
    spectrum, choices = outcome.spectrum, look.choices
    if spectrum is None or not spectrum.levels:
        return None
    start = None if choices.every else spectrum.levels[look.chosen].index
    return Lines(start, choices.observable, choices.temperature if choices.into is None else None, choices.into)


def _rows(found: Transitions, room: Room) -> Rows:
    """Return what is shown, the spectrum drawn, and the table."""
    from specterm.views.line_spectrum import Stick, line_spectrum  # noqa: PLC0415 - it brings the engine
    from specterm.views.line_table import line_columns  # noqa: PLC0415

    choices, units = room.look.choices, room.units
    shown = found.between(found.lines)
    rows: list[Row] = [fit_row(((" " + _title(found, room), "title"),), room.width)]
    for note in found.notes[:2]:
        rows += [fit_row(((" " + line, "warn"),), room.width) for line in textwrap.wrap(note, max(10, room.width - 2))]
    headings, cells = line_columns(shown, units.energy, units.length, found.shown)
    high = max(0, min(16, room.height - 2 - min(len(cells) + 1, room.height // 2)))
    seen = [line for line in shown if choices.temperature is None or line.energy > 0]
    sticks = [Stick(line.energy, line.intensity, f"{line.start}-{line.to}") for line in seen]
    rows += line_spectrum(
        sticks, room.width, high if high >= 6 else 0, broadening=choices.broadening, unit=units.energy, glyphs=room.glyphs
    )
    height = room.height - len(rows)
    rows += table_rows(
        headings, cells, room.width, height, scroll=choices.scroll, fixed=2, aside=choices.aside, glyphs=room.glyphs
    )
    return padded(rows, room.width, room.height)


def _title(found: Transitions, room: Room) -> str:
    """Return dipole, start, other sheet, temperature and the sum of the strengths."""
    choices = room.look.choices
    parts = [f"dipole {found.dipole}"]
    if choices.into:
        parts.append(f"into {choices.into}")
    if choices.temperature is not None:
        parts.append(f"at {with_unit(short(choices.temperature), 'K' if room.units.energy else '')}")
    sums = [(start, total) for start, total in found.sums.items() if total is not None]
    if len(sums) == 1:
        parts.append(f"strengths from level {sums[0][0]} sum to {short(sums[0][1], 8)}")
    return "   ".join(parts)


def _record(found: Any, _: Room) -> Record:  # noqa: ANN401 - lines
    from specterm.session.records.lines import lines_record  # noqa: PLC0415 - heavy

    return lines_record(found, found.lines)


LINES = Page(
    "lines", _inquiry, _rows, _record, "no level: there are no lines",
    keys=("page.observable", "page.every", "page.amount", "page.breadth", "page.into"),
)
