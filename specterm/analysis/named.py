"""The observables a sheet has to offer, and their means in a state, all at once."""

from __future__ import annotations

from pathlib import Path

from specterm.analysis.expectation import Expectation
from specterm.analysis.high_order import MOST, mean_in
from specterm.analysis.observables import HIGHEST, observable
from specterm.analysis.prepared import prepare
from specterm.errors import SpectermError
from specterm.model import Model
from specterm.spectrum import Spectrum


def named_observables(model: Model) -> tuple[str, ...]:
    """Return the coordinate, the momentum and the names of the sheet that are Hermitian and of an order within reach."""
    own = [name for name in (*model.operators, *model.functions) if name not in (model.domain.coordinate, "p")]
    return tuple(name for name in (model.domain.coordinate, "p", *own) if _usable(model, name))


def _usable(model: Model, name: str) -> bool:
    """Say whether a name can be measured; a function that is the same everywhere cannot tell anything."""
    try:
        operator = model.observable(name)
        if HIGHEST < operator.order <= MOST:
            return operator.hermitian() is None
        asked = observable(model, name)
    except SpectermError:
        return False
    return asked.order > 0 or asked.parts[0].constant is None


def expectations(
    model: Model, spectrum: Spectrum, names: tuple[str, ...], state: str, folder: Path | None = None
) -> tuple[Expectation | SpectermError, ...]:
    """Return means and spreads of observables in one state; where one has no value the reason stands in its place.

    Raises SheetError for a state that is not known.
    """
    wave = prepare(model, spectrum, state, folder)
    found: list[Expectation | SpectermError] = []
    for name in names:
        try:
            found.append(mean_in(model, spectrum, name, wave))
        except SpectermError as error:
            found.append(error)
    return tuple(found)
