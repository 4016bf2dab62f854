"""Evolution in time as data."""

from __future__ import annotations

import math
from typing import Any

from specterm.analysis.evolution import Evolution
from specterm.arrays import Array
from specterm.session.records.record import Record


def evolution_record(found: Evolution, density: tuple[Array, Array] | None = None) -> Record:
    """Return an evolution as data; `density` is places (n,) and values (times, n), and is then what CSV holds."""
    data: dict[str, Any] = {
        "state": found.state,
        "observable": found.observable,
        "unit_of_time": found.unit,
        "times": found.times.tolist(),
        "survival": found.survival.tolist(),
        "errors": found.survival_error.tolist(),
        "mean": found.mean.tolist(),
        "spread": found.spread.tolist(),
        "mean_error": found.mean_error.tolist(),
        "spread_error": found.spread_error.tolist(),
        "observable_unit": found.observable_unit,
        "captured": found.captured,
        "classical_period": found.classical,
        "revival_time": found.revival,
        "notes": list(found.notes),
    }
    if density is None:
        errors = (found.mean_error, found.spread_error)
        columns = zip(found.times, found.survival, found.survival_error, found.mean, found.spread, *errors, strict=True)
        rows = [[_cell(float(c)) for c in row] for row in columns]
        return Record(data, ("time", "survival", "error", "mean", "spread", "mean_error", "spread_error"), rows)
    data["density"] = {"places": density[0].tolist(), "values": density[1].tolist()}
    cells = [
        (time, place, value)
        for time, values in zip(found.times.tolist(), density[1].tolist(), strict=True)
        for place, value in zip(density[0].tolist(), values, strict=True)
    ]
    return Record(data, ("time", "place", "density"), cells)


def _cell(value: float) -> float | None:
    return None if math.isnan(value) else value
