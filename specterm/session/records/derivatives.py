"""Derivatives of levels and lines as data."""

from __future__ import annotations

import math

import numpy as np

from specterm.analysis.sensitivities import LineSensitivities, Sensitivities
from specterm.session.records.record import Record
from specterm.spectrum import Spectrum


def sensitivities_record(found: Sensitivities, spectrum: Spectrum) -> Record:
    """Return derivatives of levels as data: by level in JSON, a line for each level and parameter in CSV; null for none."""
    levels = [
        {"index": level.index, "value": level.value, "derivatives": row, "errors": doubt}
        for level, row, doubt in zip(spectrum.levels, found.derivatives.tolist(), found.errors.tolist(), strict=True)
    ]
    data = {
        "parameters": list(found.parameters), "units": list(found.units), "levels": levels, "notes": list(found.notes)
    }  # fmt: skip
    rows = [
        (level["index"], name, _cell(level["derivatives"][k]), _cell(level["errors"][k]), found.units[k])
        for level in levels
        for k, name in enumerate(found.parameters)
    ]
    return Record(data, ("level", "parameter", "derivative", "error", "unit"), rows)


def lines_record(found: LineSensitivities, spectrum: Spectrum) -> Record:
    """Return derivatives of transition energies as data, in the same way."""
    values = {level.index: level.value for level in spectrum.levels}
    pairs = list(zip(found.lines, found.derivatives.tolist(), found.errors.tolist(), strict=True))
    data = {
        "parameters": list(found.parameters),
        "units": list(found.units),
        "transitions": [
            {"from": a, "to": b, "energy": values[b] - values[a], "derivatives": row, "errors": doubt}
            for (a, b), row, doubt in pairs
        ],
        "notes": list(found.notes),
    }
    rows = [
        (*line, name, _cell(row[k]), _cell(doubt[k]), found.units[k])
        for line, row, doubt in pairs
        for k, name in enumerate(found.parameters)
    ]
    return Record(data, ("from", "to", "parameter", "derivative", "error", "unit"), rows)


def _cell(value: float) -> float | None:
    return None if math.isnan(value) else float(np.float64(value))
