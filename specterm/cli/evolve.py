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

WANTED = 1 - 1e-9
"""The share of the state that is held when nobody says how many levels to take."""
MOST_LEVELS = 300
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

    least = least_for(model, arguments.state)
    if arguments.count is not None or arguments.near is not None:
        return enough(arguments, model, least)
    with Progress() as progress:
        spectrum, _ = captured_by(
            model, arguments.state, WANTED, source.folder, tolerance=arguments.tol, least=least or 1, most=MOST_LEVELS,
            progress=progress.tell,
        )  # fmt: skip
    return spectrum


def _density(arguments: argparse.Namespace, source: Source, model: Model, spectrum: Spectrum) -> tuple[Array, Array]:
    """Return places (n,) that hold the packet, and |psi|^2 at the times (times, n)."""
    from specterm.analysis import project  # noqa: PLC0415 - heavy
    from specterm.analysis.evolution import packet_of  # noqa: PLC0415

    packet = packet_of(model, spectrum, project(model, spectrum, arguments.state, source.folder))
    wide = np.linspace(spectrum.left, spectrum.right, 20 * PLACES)
    times = np.asarray(arguments.times, dtype=float)
    size = (np.abs(packet.wave(wide, times)) ** 2).max(axis=0)
    alive = wide[size > 1e-6 * size.max()]
    x = np.linspace(alive[0], alive[-1], PLACES)
    return x, np.abs(packet.wave(x, times)) ** 2


def _text(arguments: argparse.Namespace, model: Model, found: Evolution, density: tuple[Array, Array] | None) -> str:
    """Return a table over the times, what repeats, and the curves."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.numbers import scale_of, short, with_unit  # noqa: PLC0415
    from specterm.views.plain_table import bare, known, sure, text_columns  # noqa: PLC0415
    from specterm.views.time_curve import density_curve, mean_curve, survival_curve  # noqa: PLC0415

    scale, time_unit = scale_of(found.unit)
    unit = f" ({time_unit})" if time_unit else ""
    times, survival = (scale * found.times).tolist(), found.survival.tolist()
    own = f" ({found.shown[1]})" if found.shown[1] else ""
    sizes = np.abs(found.mean) + np.where(np.isfinite(found.spread), found.spread, 0.0)
    pairs = ((found.mean, found.mean_error), (found.spread, found.spread_error))
    by = found.shown[0]
    moments = [known((values / by).tolist(), (errors / by).tolist(), float(sizes.max()) / by) for values, errors in pairs]
    columns = (bare(times, 8), sure(survival, found.survival_error.tolist()), *moments)
    headings = (f"time{unit}", "survival", f"<{found.observable}>{own}", f"spread{own}")
    repeats = [
        f"{name} {with_unit(short(scale * value), time_unit)}"
        for name, value in (("period", found.classical), ("revival", found.revival))
        if value is not None
    ]
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
            "   ".join([f"captured {short(found.captured, 10)}", *repeats]),
            *(plain(rows) for rows in figures if rows),
        ]
    )
