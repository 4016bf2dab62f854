"""The verb `sensitivities`: derivatives of levels, or of lines, with respect to the numbers of a sheet."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, expression_of, model_of, solved, status_of
from specterm.cli.source import Source

if TYPE_CHECKING:
    from specterm.analysis.sensitivities import LineSensitivities, Sensitivities
    from specterm.model import Model
    from specterm.spectrum import Spectrum


def sensitivities(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `sensitivities`."""
    from specterm.analysis.sensitivities import line_sensitivities  # noqa: PLC0415 - heavy
    from specterm.analysis.sensitivities import sensitivities as slopes_of  # noqa: PLC0415
    from specterm.session.records.derivatives import lines_record, sensitivities_record  # noqa: PLC0415

    model = model_of(arguments, source)
    spectrum = solved(arguments, model)
    found = slopes_of(model, spectrum, source.folder, arguments.parameters or None)
    notes = (*spectrum.notes, *found.notes)
    if not arguments.transitions:
        record = sensitivities_record(found, spectrum)
        return answered(arguments, record, lambda: _levels_text(model, spectrum, found), status_of(spectrum), notes)
    lines = line_sensitivities(found, [level.index for level in spectrum.levels])
    return answered(
        arguments, lines_record(lines, spectrum), lambda: _lines_text(model, spectrum, lines), status_of(spectrum), notes
    )


def _levels_text(model: Model, spectrum: Spectrum, found: Sensitivities) -> str:
    """Return the derivatives of levels as a table."""
    from specterm.views.derivative_table import derivative_table, parameter_headings  # noqa: PLC0415 - only text

    levels = spectrum.levels
    headings = ("level", _with_unit("value", model.units.energy), *parameter_headings(found.parameters, found.units))
    table = derivative_table(
        [str(level.index) for level in levels], [level.value for level in levels], [level.error for level in levels],
        found.derivatives, found.errors, headings,
    )  # fmt: skip
    return f"{expression_of(model)}\n{table}"


def _lines_text(model: Model, spectrum: Spectrum, found: LineSensitivities) -> str:
    """Return the derivatives of lines as a table."""
    from specterm.views.derivative_table import derivative_table, parameter_headings  # noqa: PLC0415

    known = {level.index: level for level in spectrum.levels}
    energies = [known[b].value - known[a].value for a, b in found.lines]
    doubts = [_sum(known[a].error, known[b].error) for a, b in found.lines]
    headings = ("line", _with_unit("energy", model.units.energy), *parameter_headings(found.parameters, found.units))
    labels = [f"{a}-{b}" for a, b in found.lines]
    return f"{expression_of(model)}\n{derivative_table(labels, energies, doubts, found.derivatives, found.errors, headings)}"


def _with_unit(name: str, unit: str) -> str:
    return f"{name} ({unit})" if unit else name


def _sum(a: float | None, b: float | None) -> float | None:
    return None if a is None or b is None else a + b
