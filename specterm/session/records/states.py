"""Eigenstates as arrays and as a table."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.session.records.levels import expression_of, unit_names
from specterm.session.records.record import Record
from specterm.spectrum.result import Spectrum

PLACES = 2001


@dataclass(frozen=True)
class StatesRecord:
    """Eigenstates at equally spaced places `x` (n,): `psi` (levels, n), their `indices`, `values` and `errors` (levels,)."""

    operator: str
    units: dict[str, str]
    coordinate: str
    x: Array
    psi: Values
    indices: Array
    values: Array
    errors: Array

    def arrays(self) -> dict[str, Any]:
        """Return everything as arrays, NaN for an error that is not known."""
        words = {"operator": np.array(self.operator), "units": np.array([f"{key} {unit}" for key, unit in self.units.items()])}
        numbers = {"index": self.indices, "value": self.values, "error": self.errors}
        return {**words, self.coordinate: self.x, "psi": self.psi, **numbers}

    def table(self) -> Record:
        """Return places and states as columns, real and imaginary parts where a state is complex."""
        whole = np.iscomplexobj(self.psi)
        heading = [self.coordinate]
        columns = [self.x]
        for index, psi in zip(self.indices.tolist(), self.psi, strict=True):
            heading += [f"psi_{index}_re", f"psi_{index}_im"] if whole else [f"psi_{index}"]
            columns += [psi.real, psi.imag] if whole else [psi]
        rows = [[float(cell) for cell in row] for row in np.column_stack(columns)]
        named = dict(zip(heading, [column.tolist() for column in columns], strict=True))
        data = {"operator": self.operator, "units": self.units, **named}
        return Record(data, heading, rows)


def states_record(model: Model, spectrum: Spectrum, places: int = PLACES) -> StatesRecord:
    """Return the eigenstates where they live, at `places` places; PhysicsError without levels."""
    if spectrum.states is None or not spectrum.levels:
        raise PhysicsError("there is no eigenstate", mend="the operator binds nothing")
    x = np.linspace(*_hull(spectrum), places)
    psi = spectrum.states.evaluate(x)
    if np.iscomplexobj(psi) and not np.abs(psi.imag).max(initial=0.0) > 0:
        psi = psi.real
    levels = spectrum.levels
    errors = np.array([np.nan if level.error is None else level.error for level in levels])
    values = np.array([level.value for level in levels])
    indices = np.array([level.index for level in levels])
    return StatesRecord(expression_of(model), unit_names(model), model.domain.coordinate, x, psi, indices, values, errors)


def _hull(spectrum: Spectrum) -> tuple[float, float]:
    """Return the ends of the part of the computed domain where some state is alive: |psi|^2 above 1e-16 of its largest."""
    assert spectrum.states is not None
    x = np.unique(np.concatenate([np.linspace(spectrum.left, spectrum.right, 4001), spectrum.states.places]))
    size = np.abs(spectrum.states.evaluate(x)) ** 2
    alive = np.flatnonzero((size > 1e-16 * size.max(axis=1, keepdims=True)).any(axis=0))
    return float(x[max(0, alive[0] - 1)]), float(x[min(len(x) - 1, alive[-1] + 1)])
