"""Sweeps as data."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from specterm.analysis.sweep import Sweep
from specterm.session.records.record import Record


def sweep_record(found: Sweep) -> Record:
    """Return a sweep as data.

    CSV has a row for each point: for each level, columns for its value and its error, and behind all these one for its kind.
    With two parameters `parameter`, `unit` and each of `values` are pairs, the second one running fastest.
    """
    axes, quantity = found.request.axes, found.request.quantity
    one = len(axes) == 1
    data: dict[str, Any] = {
        "parameter": axes[0].name if one else [axis.name for axis in axes],
        "unit": found.units[0] if one else list(found.units),
        "values": found.places[:, 0].tolist() if one else found.places.tolist(),
        "energy_unit": found.energy_unit,
        "numbers": list(found.numbers),
        "levels": found.levels.tolist(),
        "errors": found.errors.tolist(),
        "kinds": [list(row) for row in found.kinds],
        "branches": [[None if place < 0 else int(place) for place in row] for row in found.branches],
        "gaps": [
            {
                "pair": list(gap.pair), "at": gap.at, "gap": gap.gap, "crossing": gap.crossing, "at_error": gap.at_error,
                "gap_error": gap.gap_error,
            }
            for gap in found.gaps
        ],
        "quantity": {
            "kind": quantity.kind,
            "detail": quantity.detail,
            "from": quantity.start if quantity.kind in ("transitions", "strengths") else None,
            "unit": found.quantity_unit,
            "values": found.quantity.tolist(),
            "errors": found.quantity_errors.tolist(),
        },
        "done": int(found.done.sum()),
        "complete": bool(found.complete and found.done.all()),
        "notes": list(found.notes),
    }  # fmt: skip
    return Record(data, _heading(found), _rows(found))


def _heading(found: Sweep) -> list[str]:
    """Return the names of the columns."""
    names = [axis.name for axis in found.request.axes]
    for number in found.numbers:
        names += [f"level_{number}", f"error_{number}"]
    if found.request.quantity.kind != "levels":
        for number in found.numbers:
            names += [f"{found.request.quantity.kind}_{number}", f"{found.request.quantity.kind}_error_{number}"]
    return names + [f"kind_{number}" for number in found.numbers]


def _rows(found: Sweep) -> Iterator[list[float | str | None]]:
    """Yield the cells of each point."""
    tables = [(found.levels, found.errors)]
    if found.request.quantity.kind != "levels":
        tables.append((found.quantity, found.quantity_errors))
    for index, place in enumerate(found.places.tolist()):
        row: list[float | str | None] = list(place)
        for values, errors in tables:
            for value, error in zip(values[index].tolist(), errors[index].tolist(), strict=True):
                row += [_cell(value), _cell(error)]
        yield row + list(found.kinds[index])


def _cell(value: float) -> float | None:
    return value if abs(value) < float("inf") else None
