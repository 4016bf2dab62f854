"""Levels and weights as data."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from specterm.language.printing import format_expression
from specterm.model import Model
from specterm.session.records.record import Record
from specterm.spectrum.result import Spectrum

if TYPE_CHECKING:
    from specterm.analysis.weights import Weights

_LEVEL = ("index", "value", "error", "kind", "nodes", "parity", "width")


def expression_of(model: Model) -> str:
    """Return the operator as the sheet writes it."""
    for definition in model.sheet.definitions:
        if definition.name == model.main:
            return f"{model.main} = {format_expression(definition.expression)}"
    return model.main


def unit_names(model: Model) -> dict[str, str]:
    """Return the names of the units, empty where the sheet is dimensionless."""
    units = model.units
    return {"energy": units.energy, "length": units.length, "mass": units.mass, "time": units.time}


def levels_record(model: Model, spectrum: Spectrum) -> Record:
    """Return a spectrum as data."""
    domain = model.domain
    data: dict[str, Any] = {
        "operator": expression_of(model),
        "units": unit_names(model),
        "levels": [{name: getattr(level, name) for name in _LEVEL} for level in spectrum.levels],
        "bound": spectrum.bound,
        "threshold": spectrum.threshold,
        "complete": spectrum.complete,
        "domain": {
            "coordinate": domain.coordinate,
            "left": domain.left,
            "right": domain.right,
            "ends": [domain.left_end, domain.right_end],
            "phase": domain.phase,
            "computed": [spectrum.left, spectrum.right],
        },
        "basis": spectrum.basis,
        "unknowns": spectrum.unknowns,
        "tolerance": spectrum.tolerance,
        "from_top": spectrum.from_top,
        "seconds": spectrum.seconds,
        "notes": list(spectrum.notes),
    }
    return Record(data, _LEVEL, [tuple(getattr(level, name) for name in _LEVEL) for level in spectrum.levels])


def weights_record(found: Weights) -> Record:
    """Return projection weights as data."""
    data = {
        "state": found.state,
        "weights": [
            {"index": w.index, "value": w.value, "weight": w.weight, "error": w.error, "amplitude": w.amplitude}
            for w in found.weights
        ],
        "captured": found.captured,
        "mean": found.mean,
        "spread": found.spread,
        "notes": list(found.notes),
    }
    rows = [(w.index, w.value, w.weight, w.error, w.amplitude.real, w.amplitude.imag) for w in found.weights]
    return Record(data, ("index", "value", "weight", "error", "amplitude_re", "amplitude_im"), rows)
