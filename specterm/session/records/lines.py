"""Lines between levels as data."""

from __future__ import annotations

from collections.abc import Sequence

from specterm.analysis.lines import Line
from specterm.analysis.transitions import Transitions
from specterm.session.records.record import Record

_KEYS = (
    "energy", "energy_error", "dipole", "dipole_error", "strength", "strength_error", "wavelength", "frequency", "wavenumber",
    "einstein", "population",
)  # fmt: skip


def lines_record(found: Transitions, lines: Sequence[Line]) -> Record:
    """Return the `lines` chosen as data; the table for CSV leaves out those from a level to itself.

    `sum_rule` is that of the only starting level, null where there are several.
    """
    sums = list(found.sums.values())
    data = {
        "dipole": found.dipole,
        "dipole_unit": found.shown[1] if found.shown[0] == 1 else "",
        "transitions": [
            {"from": line.start, "to": line.to, **{key: getattr(line, key) for key in _KEYS}, "weight": abs(line.dipole) ** 2}
            for line in lines
        ],
        "sum_rule": sums[0] if len(sums) == 1 else None,
        "sum_rules": [{"from": start, "sum": total} for start, total in found.sums.items()],
        "notes": list(found.notes),
    }
    return Record(data, ("from", "to", *_flat_keys()), [(line.start, line.to, *_flat(line)) for line in found.between(lines)])


def _flat_keys() -> tuple[str, ...]:
    return tuple(name for key in _KEYS for name in (("dipole_re", "dipole_im") if key == "dipole" else (key,)))


def _flat(line: Line) -> list[float | None]:
    cells: list[float | None] = []
    for key in _KEYS:
        value = getattr(line, key)
        cells += [value.real, value.imag] if key == "dipole" else [value]
    return cells
