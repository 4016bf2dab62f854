"""The verb `weights`."""

from __future__ import annotations

import argparse
from dataclasses import replace
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, enough, expression_of, glyphs_of, least_for, model_of, status_of
from specterm.cli.progress import Progress
from specterm.cli.source import Source
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis import Weights
    from specterm.spectrum import Spectrum


def weights(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `weights`."""
    from specterm.analysis import project  # noqa: PLC0415 - heavy
    from specterm.session.records.levels import weights_record  # noqa: PLC0415

    model = model_of(arguments, source)
    least = least_for(model, arguments.state)
    if arguments.captured is not None:
        spectrum, found = _captured(arguments, source, model, least)
    else:
        spectrum = enough(arguments, model, least)
        found = project(model, spectrum, arguments.state, source.folder)
    notes = (*spectrum.notes, *found.notes)
    return answered(
        arguments, weights_record(found), lambda: _weights_text(model, spectrum, found), status_of(spectrum), notes
    )


def _captured(arguments: argparse.Namespace, source: Source, model: Model, least: int | None) -> tuple[Spectrum, Weights]:
    """Return as many levels as it takes to hold the share asked for, and the weights on them."""
    from specterm.analysis.capture import captured_by  # noqa: PLC0415 - heavy

    with Progress() as progress:
        spectrum, found = captured_by(
            model, arguments.state, arguments.captured, source.folder, near=arguments.near, tolerance=arguments.tol,
            least=max(least or 1, arguments.count or 1), progress=progress.tell,
        )  # fmt: skip
    if found.captured < arguments.captured:
        short = f"{len(spectrum.levels)} levels hold {found.captured:.10g}, less than the {arguments.captured:g} asked for"
        found = replace(found, notes=(*found.notes, short))
    return spectrum, found


def _weights_text(model: Model, spectrum: Spectrum, found: Weights) -> str:
    """Return weights as the level table with a bar in each row."""
    from specterm.analysis.weights import TOLD  # noqa: PLC0415 - heavy
    from specterm.views.level_table import Weighing, text_table  # noqa: PLC0415 - only text needs the views
    from specterm.views.numbers import short, with_unit  # noqa: PLC0415

    weighing = Weighing(
        found.state, {w.index: w.weight for w in found.weights}, {w.index: w.error for w in found.weights}, found.captured
    )
    energy = model.units.energy
    mean, spread = with_unit(short(found.mean), energy), with_unit(short(found.spread), energy)
    whose = "mean of the captured part" if 1 - found.captured > TOLD else "mean"
    lines = [
        f"{found.state} on {expression_of(model)}",
        text_table(spectrum.levels, energy, weighing, glyphs_of(None)),
        "   ".join([f"captured {found.captured:.10g}", *([f"{whose} {mean}", f"spread {spread}"] if found.weights else [])]),
    ]
    return "\n".join(lines)
