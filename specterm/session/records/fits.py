"""Fits and proposed matches as data."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from specterm.analysis.fit_assign import Match
from specterm.analysis.fitting import Fit
from specterm.analysis.observed import End, Observation
from specterm.session.records.record import Record


def fit_record(found: Fit) -> Record:
    """Return a fit as data; CSV holds the fitted numbers."""
    parameters = [
        {"name": one.name, "value": one.value, "error": one.error, "unit": one.unit, "start": one.start, "alone": one.alone}
        for one in found.parameters
    ]
    data = {
        "parameters": parameters,
        "residuals": found.residuals.tolist(),
        "chi2": found.chi2,
        "dof": found.dof,
        "reduced_chi2": found.reduced,
        "correlations": found.correlations.tolist(),
        "weights": "given" if found.weighted else "unit",
        "converged": found.converged,
        "steps": found.steps,
        "lines": [
            {**_line(line), "computed": float(computed), "residual": float(residual)}
            for line, computed, residual in zip(found.lines, found.computed, found.residuals, strict=True)
        ],
        "assigned": [_match(match) for match in found.matches],
        "notes": list(found.notes),
    }
    return Record(data, ("name", "value", "error", "unit", "start"), [tuple(one.values())[:5] for one in parameters])


def matches_record(matches: Sequence[Match]) -> Record:
    """Return proposed matches as data."""
    rows = [
        (match.line.row, *(_label(end) for end in (match.line.lower, match.line.upper)), match.line.value, match.computed)
        for match in matches
    ]
    return Record({"proposed": [_match(match) for match in matches]}, ("row", "from", "to", "value", "computed"), rows)


def _match(match: Match) -> dict[str, Any]:
    return {**_line(match.line), "computed": match.computed, "next_off": match.next_off}


def _label(end: End | None) -> str | None:
    return None if end is None else end.label


def _line(line: Observation) -> dict[str, Any]:
    """Return a line as data: its row in the file, quantum numbers, settings, value and uncertainty."""
    upper = {"level": line.upper.level} if line.lower is None else {"from": line.lower.level, "to": line.upper.level}
    settings = {} if line.lower is None else {"from_settings": dict(line.lower.settings)}
    name = "settings" if line.lower is None else "to_settings"
    return {
        "row": line.row, **upper, **settings, name: dict(line.upper.settings), "value": line.value,
        "uncertainty": line.uncertainty,
    }  # fmt: skip
