"""Derivatives of levels with respect to the plain numbers of a sheet, without a new solve.

The Rayleigh quotient is stationary at an eigenstate, so dE/da is the derivative of the quotient with the wave carried along by
any map that depends on a: jumps to jumps, ends to ends (Hellmann and Feynman's theorem for moving boundaries, from memory).
Within a group of levels that cannot be told apart the derivatives are those of the branches: the perturbation is diagonalised.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.displaced import Written, written_numbers
from specterm.analysis.level_groups import Group, Groups, doubts_of, groups_of
from specterm.analysis.running_slopes import running_slopes
from specterm.analysis.slopes import Slope, slopes_of
from specterm.arrays import Array
from specterm.errors import SheetError
from specterm.language.dimensions import check_dimensions
from specterm.language.suggest import nearest
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.firstorder import RunningStates
from specterm.units import ENERGY, LENGTH, MASS, TIME


@dataclass(frozen=True)
class Sensitivities:
    """Derivatives of levels with respect to plain numbers of the sheet, each in the unit it is written in.

    `derivatives` and `errors` have shape (levels, parameters): `nan` where there is none, with the reason in `notes`; an
    error is a bound on |derivative - true one|. `levels` are the indices of the levels, `units` the units of the derivatives
    (energy over the unit written behind the number, or per the number itself; empty in sheets without units).
    """

    parameters: tuple[str, ...]
    units: tuple[str, ...]
    levels: tuple[int, ...]
    derivatives: Array
    errors: Array
    notes: tuple[str, ...]

    def column(self, name: str) -> Array:
        """Return the derivatives of every level with respect to one parameter, shape (levels,)."""
        found: Array = self.derivatives[:, self.parameters.index(name)]
        return found


def sensitivities(
    model: Model,
    spectrum: Spectrum,
    folder: Path | None = None,
    names: Sequence[str] | None = None,
    should_stop: Callable[[], bool] | None = None,
) -> Sensitivities:
    """Return the derivatives of the levels of `spectrum` with respect to plain numbers of the sheet.

    Parameters
    ----------
    model, spectrum
        A sheet made ready and its levels.
    folder
        Where relative paths in the sheet start.
    names
        Which of `model.plain`; all of them where none are given. The number is the one written in the sheet, its unit aside.
    should_stop
        Asked now and then whether to give up (WorkStopped).

    Raises
    ------
    SheetError
        Where a name is no plain number of the sheet.

    Notes
    -----
    Tested against central differences of the solver for every preset, relative agreement 1e-6 or better, and closed forms.
    """
    places = written_numbers(model)
    wanted = tuple(dict.fromkeys(model.plain if names is None else names))
    for name in wanted:
        if name not in places:
            raise SheetError(
                f"`{name[:60]}` is not a plain number of the sheet", mend=_plain_names(name, model.plain)
            )
    stop = should_stop or (lambda: False)
    groups = groups_of(model, spectrum)
    found = _found(model, spectrum, folder, {name: places[name] for name in wanted}, groups, stop)
    shape = (len(spectrum.levels), len(wanted))
    derivatives, errors, notes = np.full(shape, np.nan), np.full(shape, np.nan), []
    for column, (name, slope) in enumerate(zip(wanted, found, strict=True)):
        if isinstance(slope, str):
            notes.append(f"no derivative with respect to `{name}`: {slope}")
        else:
            derivatives[:, column], errors[:, column] = slope.value, slope.error
    for row, reason in groups.without.items():
        derivatives[row], errors[row] = np.nan, np.nan
        notes.append(f"no derivatives of level {spectrum.levels[row].index}: {reason}")
    notes += [_grouped(spectrum, group) for group in groups.groups]
    units = derivative_units(model, {name: places[name].unit for name in wanted})
    return Sensitivities(wanted, units, tuple(level.index for level in spectrum.levels), derivatives, errors, tuple(notes))


@dataclass(frozen=True)
class LineSensitivities:
    """Derivatives of transition energies E_to - E_from: as `Sensitivities`, with a row for each of the `lines` (from, to)."""

    parameters: tuple[str, ...]
    units: tuple[str, ...]
    lines: tuple[tuple[int, int], ...]
    derivatives: Array
    errors: Array
    notes: tuple[str, ...]


def line_sensitivities(found: Sensitivities, starts: Sequence[int]) -> LineSensitivities:
    """Return the derivatives of the lines from levels number `starts` to all higher ones; an error is the sum of both."""
    rows = {index: row for row, index in enumerate(found.levels)}
    lines = tuple((a, b) for a in starts if a in rows for b in found.levels if b > a)
    low, high = [rows[a] for a, _ in lines], [rows[b] for _, b in lines]
    slopes, errors = found.derivatives[high] - found.derivatives[low], found.errors[high] + found.errors[low]
    return LineSensitivities(found.parameters, found.units, lines, slopes, errors, found.notes)


def first_order(values: Array, found: Sensitivities, name: str, change: float) -> Array:
    """Return the levels after `change` of one parameter, to first order, shape (levels,); nan where no derivative is known."""
    estimate: Array = np.asarray(values, dtype=float) + found.column(name) * change
    return estimate


def derivative_units(model: Model, written: Mapping[str, str]) -> tuple[str, ...]:
    """Return the units of a level's derivatives with respect to numbers; `written` has the unit behind each, or ""."""
    energy = model.units.energy
    if not energy:
        return ("",) * len(written)
    known = {ENERGY: energy, LENGTH: model.units.length, MASS: model.units.mass, TIME: model.units.time}
    dimensions = check_dimensions(model.sheet, model.units)
    units = []
    for name, unit in written.items():
        dimension = None if unit else dimensions.named(name)
        over = unit or (known.get(dimension, "") if dimension is not None else "")
        simple = over.replace("_", "").isalnum()
        units.append(f"{energy} per {name}" if not over else f"{energy}/{over}" if simple else f"{energy}/({over})")
    return tuple(units)


def _plain_names(name: str, plain: Sequence[str]) -> str:
    near = nearest(name, plain)
    known = ", ".join(plain) or "none"
    return (f"did you mean `{near}`? " if near else "") + f"plain numbers of the sheet: {known}"


def _grouped(spectrum: Spectrum, group: Group) -> str:
    first, last = spectrum.levels[group.rows[0]].index, spectrum.levels[group.rows[-1]].index
    return f"levels {first} to {last} cannot be told apart: their derivatives are those of the branches, the smallest first"


def _found(
    model: Model,
    spectrum: Spectrum,
    folder: Path | None,
    places: dict[str, Written],
    groups: Groups,
    stop: Callable[[], bool],
) -> Sequence[Slope | str]:
    """Return the slope with respect to each number, or why there is none."""
    if spectrum.states is None or not places:
        return ["there is no level"] * len(places)
    if isinstance(spectrum.states, RunningStates):
        return running_slopes(model, spectrum, folder, places, stop)
    return slopes_of(model, spectrum, folder, places, groups, doubts_of(spectrum, groups), stop)
