"""`figure --view momentum`: the density of a level or a state over momentum, drawn or as data."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, enough, glyphs_of, least_for, model_of, status_of
from specterm.cli.source import Source
from specterm.errors import SheetError

if TYPE_CHECKING:
    from specterm.analysis.momentum import MomentumDensity
    from specterm.session.records import Record


def momentum(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `figure --view momentum` for the first of the levels named (the lowest found), or for the state."""
    from specterm.analysis.momentum import momentum_density  # noqa: PLC0415 - heavy
    from specterm.analysis.prepared import prepare  # noqa: PLC0415

    model = model_of(arguments, source)
    if arguments.levels and (arguments.state is not None or len(arguments.levels) > 1):
        raise SheetError("--view momentum draws one level or one state", mend="give --levels I or --state S")
    name = f"level({arguments.levels[0]})" if arguments.levels else arguments.state
    spectrum = enough(arguments, model, least_for(model, name) if name is not None else None)
    if name is None:
        name = f"level({spectrum.levels[0].index})" if spectrum.levels else "level(0)"
    found = momentum_density(model, prepare(model, spectrum, name, source.folder))
    return answered(
        arguments, _record(name, found), lambda: _text(arguments, name, found), status_of(spectrum), spectrum.notes
    )


def _record(name: str, found: MomentumDensity) -> Record:
    """Return a momentum density as data; momenta are in hbar over the unit of length."""
    from specterm.session.records import Record  # noqa: PLC0415 - heavy

    k, density = found.k.tolist(), found.density.tolist()
    data = {
        "state": name,
        "unit": found.unit,
        "discrete": found.discrete,
        "held": found.held,
        "momenta": k,
        "density": density,
    }
    return Record(data, ("momentum", "probability" if found.discrete else "density"), list(zip(k, density, strict=True)))


def _text(arguments: argparse.Namespace, name: str, found: MomentumDensity) -> str:
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.momentum_figure import momentum_rows  # noqa: PLC0415

    what = "probabilities" if found.discrete else "density"
    title = f"{name}: {what} over momentum"
    return plain(momentum_rows(found, arguments.width, arguments.height, glyphs_of(arguments.glyphs), title))
