"""Expectations and matrix elements as data."""

from __future__ import annotations

from typing import Any

from specterm.analysis.expectation import Expectation
from specterm.analysis.matrix_elements import MatrixElements
from specterm.analysis.uncertainty import Pair
from specterm.session.records.record import Record

_HEADING = ("observable", "state", "mean", "error", "spread", "spread_error", "unit")


def expectation_record(found: Expectation, pair: Pair | None = None) -> Record:
    """Return an expectation as data, with a second one beside it; an infinite spread is null, which its notes explain."""
    data = {**{name: getattr(found, name) for name in _HEADING}, "notes": list(found.notes)}
    both = (found, pair.second) if pair else (found,)
    return Record({**data, **({"pair": _pair(pair)} if pair else {})}, _HEADING, [_row(one) for one in both])


def expectations_record(found: tuple[Expectation, ...]) -> Record:
    """Return several expectations as data."""
    means = [{**{name: getattr(one, name) for name in _HEADING}, "notes": list(one.notes)} for one in found]
    return Record({"expectations": means}, _HEADING, [_row(one) for one in found])


def _row(found: Expectation) -> tuple[Any, ...]:
    return tuple(getattr(found, name) for name in _HEADING)


def _pair(pair: Pair) -> dict[str, Any]:
    return {
        "observable": pair.second.observable,
        "mean": pair.second.mean,
        "spread": pair.second.spread,
        "error": pair.second.error,
        "product": pair.product,
        "bound": pair.bound,
        "bound_error": pair.bound_error,
        "commutator": pair.commutator,
        "commutes": pair.commutes,
    }


def matrix_record(found: MatrixElements) -> Record:
    """Return the matrix between levels as data."""
    data = {
        "observable": found.observable,
        "unit": found.unit,
        "levels": list(found.rows),
        "matrix": [[complex(value) for value in row] for row in found.values],
        "errors": [[float(value) for value in row] for row in found.errors],
    }
    rows = [
        (a, b, float(value.real), float(value.imag), float(error))
        for a, line, errors in zip(found.rows, found.values, found.errors, strict=True)
        for b, value, error in zip(found.columns, line, errors, strict=True)
    ]
    return Record(data, ("bra", "ket", "re", "im", "error"), rows)
