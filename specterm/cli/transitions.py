"""The verb `transitions`: lines between levels of a sheet, or into those of another."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, enough, expression_of, glyphs_of, model_of, solved, status_of
from specterm.cli.source import Source
from specterm.errors import SheetError
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis.lines import Line
    from specterm.analysis.transitions import Transitions
    from specterm.spectrum import Spectrum

def transitions(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `transitions`."""
    from specterm.session.records.lines import lines_record  # noqa: PLC0415 - heavy

    model = model_of(arguments, source)
    if arguments.into is not None and arguments.temperature is not None:
        raise SheetError("--temperature and --into do not go together", mend="give --from for the level the lines start at")
    least = None if arguments.start in (None, "all") else int(arguments.start) + 1
    spectrum = enough(arguments, model, least)
    found = _into(arguments, source, model, spectrum) if arguments.into is not None else _within(arguments, model, spectrum)
    lines = [line for line in found.lines if arguments.least is None or line.intensity >= arguments.least]
    return answered(
        arguments, lines_record(found, lines), lambda: _text(arguments, model, found, lines), status_of(spectrum),
        (*spectrum.notes, *found.notes),
    )  # fmt: skip


def _starts(arguments: argparse.Namespace, spectrum: Spectrum) -> tuple[int, ...]:
    """Return the levels lines start from: the lowest unless asked otherwise, all of them at a temperature."""
    every = tuple(level.index for level in spectrum.levels)
    if arguments.start == "all" or (arguments.start is None and arguments.temperature is not None):
        return every
    return every[:1] if arguments.start is None else (int(arguments.start),)


def _within(arguments: argparse.Namespace, model: Model, spectrum: Spectrum) -> Transitions:
    from specterm.analysis.transitions import transitions as lines_of  # noqa: PLC0415 - heavy

    starts = _starts(arguments, spectrum)
    return lines_of(model, spectrum, starts, arguments.dipole, temperature=arguments.temperature)


def _into(arguments: argparse.Namespace, source: Source, model: Model, spectrum: Spectrum) -> Transitions:
    """Return the lines from levels of the sheet to those of another."""
    from specterm.analysis.prepared import other_sheet  # noqa: PLC0415 - heavy
    from specterm.analysis.transitions import into_other  # noqa: PLC0415

    found = solved(arguments, other_sheet(model, arguments.into, source.folder))
    return into_other(model, spectrum, found, _starts(arguments, spectrum), arguments.dipole)


def _text(arguments: argparse.Namespace, model: Model, found: Transitions, lines: list[Line]) -> str:
    """Return lines as a table, the sums of strengths, and the spectrum drawn."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.line_spectrum import Stick, line_spectrum  # noqa: PLC0415
    from specterm.views.line_table import line_table  # noqa: PLC0415
    from specterm.views.numbers import short  # noqa: PLC0415

    shown = found.between(lines)
    units = model.units
    parts = [f"dipole {found.dipole} on {expression_of(model)}", line_table(shown, units.energy, units.length, found.shown)]
    for start, total in found.sums.items():
        if total is not None:
            parts.append(f"sum of the strengths from level {start}, over the levels found: {short(total, 10)}")
    absorbed = [line for line in shown if arguments.temperature is None or line.energy > 0]
    sticks = [Stick(line.energy, line.intensity, f"{line.start}-{line.to}") for line in absorbed]
    drawn = line_spectrum(
        sticks, arguments.width, arguments.height, broadening=arguments.broadening, shape=arguments.shape, unit=units.energy,
        glyphs=glyphs_of(arguments.glyphs),
    )  # fmt: skip
    return "\n".join([*parts, *([plain(drawn)] if drawn else [])])
