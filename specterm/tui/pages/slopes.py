"""The page of slopes: derivatives of levels, or of lines from the chosen level, with respect to the numbers of the sheet."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, table_rows

if TYPE_CHECKING:
    from specterm.analysis.sensitivities import Sensitivities
    from specterm.spectrum.result import Spectrum


@dataclass(frozen=True)
class Slopes:
    """Asks for the derivatives of all levels with respect to parameters, all of them where none is named."""

    names: tuple[str, ...] | None = None

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> SlopesFound:
        """Return the derivatives."""
        from specterm.analysis.sensitivities import sensitivities  # noqa: PLC0415 - heavy

        assert outcome.spectrum is not None
        found = sensitivities(outcome.model, outcome.spectrum, outcome.request.folder, self.names, should_stop)
        return SlopesFound(outcome.spectrum, found)


@dataclass(frozen=True, eq=False)
class SlopesFound:
    """Derivatives and the spectrum they are those of."""

    spectrum: Spectrum
    slopes: Sensitivities


def _inquiry(_: Look, outcome: Outcome, __: Bench) -> Slopes | None:
    return Slopes() if outcome.spectrum is not None and outcome.spectrum.levels else None


def _rows(found: SlopesFound, room: Room) -> Rows:
    """Return the table, energies up, and notes below."""
    from specterm.analysis.sensitivities import line_sensitivities  # noqa: PLC0415 - it is loaded by now
    from specterm.views.derivative_table import cell_text, parameter_headings  # noqa: PLC0415

    slopes, levels = found.slopes, found.spectrum.levels
    if not slopes.parameters:
        words = " the sheet has no plain number to differentiate by"
        return padded([fit_row(((words, "warn"),), room.width)], room.width, room.height)
    chosen = levels[min(room.look.chosen, len(levels) - 1)].index
    headings = parameter_headings(slopes.parameters, slopes.units)
    title, marked = "dE/dparameter, to first order", slopes.levels.index(chosen)
    labels = [str(index) for index in slopes.levels]
    table, errors = slopes.derivatives, slopes.errors
    if room.look.choices.every:
        lines = line_sensitivities(slopes, [chosen])
        title, labels, marked = f"of the lines up from level {chosen}", [f"{a}-{b}" for a, b in lines.lines], -1
        table, errors = lines.derivatives, lines.errors
    cells = [
        [label, *(cell_text(float(value), float(error)) for value, error in zip(row, doubt, strict=True))]
        for label, row, doubt in zip(labels, table, errors, strict=True)
    ][::-1]
    notes = [fit_row(((" " + note, "dim"),), room.width) for note in slopes.notes[: max(0, room.height // 4)]]
    head: Row = fit_row(((f" {title}, per unit of the number as written", "title"),), room.width)
    rows = table_rows(
        ["level" if not room.look.choices.every else "line", *headings], cells, room.width, room.height - 1 - len(notes),
        marked=len(cells) - 1 - marked if marked >= 0 else None, scroll=room.look.choices.scroll,
        aside=room.look.choices.aside, glyphs=room.glyphs,
    )  # fmt: skip
    return padded([head, *rows, *notes], room.width, room.height)


def _record(found: SlopesFound, _: Room) -> Record:
    from specterm.session.records.derivatives import sensitivities_record  # noqa: PLC0415 - heavy

    return sensitivities_record(found.slopes, found.spectrum)


SLOPES = Page("slopes", _inquiry, _rows, _record, "no level: nothing has a slope", keys=("page.every", "tune.pick", "tune.up"))
