"""The verb `evolve`: survival probability, mean and spread at given times."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

import numpy as np

from specterm.cli.answer import Answer, answered, enough, expression_of, glyphs_of, least_for, model_of, status_of
from specterm.cli.progress import Progress
from specterm.cli.source import Source
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis.evolution import Evolution
    from specterm.arrays import Array
    from specterm.spectrum import Spectrum

PLACES = 201


def evolve(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `evolve`."""
    from specterm.analysis.evolution import evolve as evolved  # noqa: PLC0415 - heavy
    from specterm.session.records.evolution import evolution_record  # noqa: PLC0415

    model = model_of(arguments, source)
    spectrum = _levels(arguments, source, model)
    found = evolved(model, spectrum, arguments.state, arguments.times, arguments.observable, source.folder)
    density = _density(arguments, source, model, spectrum) if arguments.density else None
    return answered(
        arguments, evolution_record(found, density), lambda: _text(arguments, model, found, density), status_of(spectrum),
        (*spectrum.notes, *found.notes),
    )  # fmt: skip


def _levels(arguments: argparse.Namespace, source: Source, model: Model) -> Spectrum:
    """Return the levels asked for, or as many as hold nearly all of the state."""
    from specterm.analysis.capture import captured_by  # noqa: PLC0415 - heavy
    from specterm.analysis.evolution import MOST_LEVELS, NEARLY_ALL  # noqa: PLC0415

    least = least_for(model, arguments.state)
    if arguments.count is not None or arguments.near is not None:
        return enough(arguments, model, least)
    with Progress() as progress:
        spectrum, _ = captured_by(
            model, arguments.state, NEARLY_ALL, source.folder, tolerance=arguments.tol, least=least or 1, most=MOST_LEVELS,
            progress=progress.tell,
        )  # fmt: skip
    return spectrum


def _density(arguments: argparse.Namespace, source: Source, model: Model, spectrum: Spectrum) -> tuple[Array, Array]:
    """Return places (n,) that hold the packet, and |psi|^2 at the times (times, n)."""
    from specterm.analysis import project  # noqa: PLC0415 - heavy
    from specterm.analysis.evolution import packet_of, places_of  # noqa: PLC0415

    packet = packet_of(model, spectrum, project(model, spectrum, arguments.state, source.folder))
    times = np.asarray(arguments.times, dtype=float)
    x = places_of(packet, times, (spectrum.left, spectrum.right), PLACES, finer=20, least=1e-6)
    return x, np.abs(packet.wave(x, times)) ** 2


def _text(arguments: argparse.Namespace, model: Model, found: Evolution, density: tuple[Array, Array] | None) -> str:
    """Return a table over the times, what repeats, and the curves."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.numbers import scale_of, short  # noqa: PLC0415
    from specterm.views.plain_table import bare, sure, text_columns  # noqa: PLC0415
    from specterm.views.time_curve import density_curve, mean_curve, survival_curve  # noqa: PLC0415
    from specterm.views.time_table import moment_texts, repeat_texts  # noqa: PLC0415

    scale, time_unit = scale_of(found.unit)
    unit = f" ({time_unit})" if time_unit else ""
    times, survival = (scale * found.times).tolist(), found.survival.tolist()
    mean, spread, name = moment_texts(found)
    own = f" ({name})" if name else ""
    columns = (bare(times, 8), sure(survival, found.survival_error.tolist()), mean, spread)
    headings = (f"time{unit}", "survival", f"<{found.observable}>{own}", f"spread{own}")
    size = (arguments.width, arguments.height)
    glyphs = glyphs_of(arguments.glyphs)
    figures = [
        survival_curve(scale * found.times, found.survival, *size, unit=time_unit, glyphs=glyphs),
        mean_curve(scale * found.times, found.mean, found.spread, found.observable, *size, unit=time_unit, glyphs=glyphs),
    ]
    if density is not None:
        figures.append(density_curve(density[0], density[1][-1], model.domain.coordinate, *size, glyphs=glyphs))
    return "\n".join(
        [
            f"{found.state} on {expression_of(model)}",
            text_columns(headings, list(zip(*columns, strict=True))),
            "   ".join([f"captured {short(found.captured, 10)}", *repeat_texts(found)]),
            *(plain(rows) for rows in figures if rows),
        ]
    )
