"""Evolution in time as data."""

from __future__ import annotations

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
        "captured": found.captured,
        "classical_period": found.classical,
        "revival_time": found.revival,
        "notes": list(found.notes),
    }
    if density is None:
        columns = zip(found.times, found.survival, found.survival_error, found.mean, found.spread, strict=True)
        return Record(data, ("time", "survival", "error", "mean", "spread"), [[float(c) for c in row] for row in columns])
    data["density"] = {"places": density[0].tolist(), "values": density[1].tolist()}
    rows = [
        (time, place, value)
        for time, values in zip(found.times.tolist(), density[1].tolist(), strict=True)
        for place, value in zip(density[0].tolist(), values, strict=True)
    ]
    return Record(data, ("time", "place", "density"), rows)
