"""Levels and their derivatives for every setting that observed lines need, at any values of the varied numbers."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from specterm.analysis.displaced import Written, written_numbers
from specterm.analysis.observed import End, Observation, Settings
from specterm.analysis.sensitivities import Sensitivities, sensitivities
from specterm.arrays import Array
from specterm.errors import PhysicsError, SheetError
from specterm.language.nodes import Sheet
from specterm.language.suggest import nearest
from specterm.model import Model, build
from specterm.spectrum import Spectrum, solve

FEWEST = 3
"""So many levels of each setting are computed at least."""


@dataclass(frozen=True)
class Solver:
    """How levels are computed: relative paths start at `folder`, `near` and `tolerance` as for `solve`.

    `progress` is told how far a fit is.
    """

    folder: Path | None = None
    overrides: Mapping[str, str] = field(default_factory=dict)
    count: int | None = None
    near: float | None = None
    tolerance: float = 1e-8
    should_stop: Callable[[], bool] | None = None
    progress: Callable[[str], None] | None = None


@dataclass
class Levels:
    """A sheet with varied numbers `names`: levels of each of its settings at the values last asked for.

    `needed` is how many levels of each setting the lines ask for, `written` are the plain numbers the sheet starts with.
    """

    sheet: Sheet
    names: tuple[str, ...]
    solver: Solver
    needed: dict[Settings, int]
    written: Mapping[str, Written]
    at: tuple[float, ...] = ()
    spectra: dict[Settings, tuple[Model, Spectrum]] = field(default_factory=dict)
    slopes: dict[Settings, Sensitivities] = field(default_factory=dict)

    def move(self, values: Sequence[float]) -> None:
        """Take other values of the varied numbers; what is known of the old ones is forgotten."""
        if tuple(values) != self.at:
            self.at, self.spectra, self.slopes = tuple(values), {}, {}

    def spectrum(self, settings: Settings) -> tuple[Model, Spectrum]:
        """Return model and levels of a setting."""
        if settings not in self.spectra:
            chosen = {**dict(zip(self.names, self.at, strict=True)), **dict(settings)}
            changed = {name: _text(value, self.written[name].unit) for name, value in chosen.items()}
            model = build(self.sheet, folder=self.solver.folder, overrides={**self.solver.overrides, **changed})
            solver = self.solver
            count = max(self.needed.get(settings, 0), FEWEST if solver.count is None else solver.count)
            found = solve(
                model, count=count, near=solver.near, tolerance=solver.tolerance, should_stop=solver.should_stop
            )
            self.spectra[settings] = model, found
        return self.spectra[settings]

    def _slopes(self, settings: Settings) -> Sensitivities:
        if settings not in self.slopes:
            model, spectrum = self.spectrum(settings)
            names = [name for name in self.names if name not in dict(settings)]
            self.slopes[settings] = sensitivities(model, spectrum, self.solver.folder, names, self.solver.should_stop)
        return self.slopes[settings]

    def value(self, end: End | None) -> tuple[float, float]:
        """Return a level and its error, zeros for none; PhysicsError where it is not bound."""
        if end is None:
            return 0.0, 0.0
        _, spectrum = self.spectrum(end.settings)
        level = next((one for one in spectrum.levels if one.index == end.level), None)
        if level is None or level.kind == "box" or level.error is None:
            raise PhysicsError(f"level {end.label} is not bound", mend="start from other values, or leave its lines out")
        return level.value, level.error

    def slope(self, end: End | None) -> Array:
        """Return the derivatives of a level by the varied numbers and their errors, shape (2, numbers), zeros for no level.

        Raises PhysicsError where a derivative is not known.
        """
        total = np.zeros((2, len(self.names)))
        if end is None:
            return total
        found = self._slopes(end.settings)
        row = found.levels.index(end.level) if end.level is not None else 0
        columns = [self.names.index(name) for name in found.parameters]
        total[:, columns] = found.derivatives[row], found.errors[row]
        if not np.isfinite(total).all():
            why = next(iter(found.notes), "a derivative is not known")
            raise PhysicsError(f"level {end.label} cannot be fitted: {why}", mend="vary other numbers")
        return total

    def computed(self, lines: Sequence[Observation]) -> tuple[Array, Array]:
        """Return E(upper) - E(lower) for each line, and its error, both (lines,)."""
        ends = [(self.value(line.upper), self.value(line.lower)) for line in lines]
        values = np.array([upper[0] - lower[0] for upper, lower in ends])
        return values, np.array([upper[1] + lower[1] for upper, lower in ends])

    def jacobian(self, lines: Sequence[Observation]) -> Array:
        """Return the derivatives of each line by the varied numbers, (lines, numbers); those below their error are 0."""
        both = [(self.slope(line.upper), self.slope(line.lower)) for line in lines]
        slopes = np.array([upper[0] - lower[0] for upper, lower in both])
        doubts = np.array([upper[1] + lower[1] for upper, lower in both])
        return np.where(np.abs(slopes) <= doubts, 0.0, slopes)


def _text(value: float, unit: str) -> str:
    return f"{float(value)!r} [{unit}]" if unit else repr(float(value))


def levels_for(sheet: Sheet, names: tuple[str, ...], lines: Sequence[Observation], solver: Solver) -> Levels:
    """Return the levels that lines need; SheetError where a line sets a varied number, or a name is no plain number."""
    written = written_numbers(build(sheet, folder=solver.folder, overrides=solver.overrides))
    for name in names:
        if name not in written:
            near = nearest(name, written)
            mend = (f"did you mean `{near}`? " if near else "") + f"plain numbers: {', '.join(written) or 'none'}"
            raise SheetError(f"`{name[:60]}` is not a plain number of the sheet", mend=mend)
    needed: dict[Settings, int] = {}
    for line in lines:
        for end in (line.lower, line.upper):
            if end is not None:
                varied = set(names) & set(dict(end.settings))
                if varied:
                    raise SheetError(
                        f"the lines set `{min(varied)}`, which is to be varied", mend="vary another number, or drop its column"
                    )
                needed[end.settings] = max(needed.get(end.settings, 0), (end.level or 0) + 1)
    return Levels(sheet, names, solver, needed, written)
