"""The verb `expectation`: mean and spread, two observables beside each other, and the matrix between levels."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, enough, expression_of, glyphs_of, least_for, model_of, status_of
from specterm.cli.source import Source
from specterm.errors import SheetError
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis.expectation import Expectation
    from specterm.analysis.matrix_elements import MatrixElements
    from specterm.analysis.uncertainty import Pair


def expectation(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `expectation`."""
    from specterm.analysis.high_order import mean_of  # noqa: PLC0415 - heavy
    from specterm.analysis.matrix_elements import matrix_elements  # noqa: PLC0415
    from specterm.analysis.uncertainty import pair_of  # noqa: PLC0415
    from specterm.session.records.means import expectation_record, matrix_record  # noqa: PLC0415

    if arguments.level is not None and arguments.state is not None:
        raise SheetError("both --level and --state are given", mend="give one of them")
    model = model_of(arguments, source)
    state = arguments.state if arguments.state is not None else f"level({arguments.level or 0})"
    spectrum = enough(arguments, model, least_for(model, state))
    text = arguments.observable
    if arguments.matrix:
        matrix = matrix_elements(model, spectrum, text)
        return answered(
            arguments, matrix_record(matrix), lambda: _matrix_text(arguments, matrix), status_of(spectrum), spectrum.notes
        )
    found = mean_of(model, spectrum, text, state, source.folder)
    pair = pair_of(model, spectrum, (text, arguments.other), state, source.folder) if arguments.other else None
    notes = (*spectrum.notes, *found.notes, *(pair.notes if pair else ()))
    record = expectation_record(found, pair)
    return answered(arguments, record, lambda: _text(model, found, pair), status_of(spectrum), notes)


def _text(model: Model, found: Expectation, pair: Pair | None) -> str:
    """Return one expectation, or two with the product of their spreads and its lower bound."""
    from specterm.views.mean_table import mean_line, pair_lines  # noqa: PLC0415 - only text needs the views

    lines = [f"{found.state} on {expression_of(model)}", mean_line(model, found)]
    if pair:
        lines += [mean_line(model, pair.second), *pair_lines(model, pair)]
    return "\n".join(lines)


def _matrix_text(arguments: argparse.Namespace, found: MatrixElements) -> str:
    """Return the matrix between levels as table and map."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.element_table import element_table  # noqa: PLC0415
    from specterm.views.heat_map import heat_map  # noqa: PLC0415

    scale, unit = found.shown
    glyphs = glyphs_of(arguments.glyphs)
    return "\n".join(
        [
            f"<a|{found.observable}|b>" + (f" ({unit})" if unit else ""),
            element_table(found.values / scale, found.errors / scale, found.rows, found.columns),
            "",
            plain(heat_map(abs(found.values), found.rows, found.columns, arguments.width, glyphs=glyphs)),
        ]
    )
