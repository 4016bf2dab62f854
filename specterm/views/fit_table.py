"""A fit as text: the fitted numbers with their errors, the lines with what is left of them, proposed matches."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specterm.analysis.fit_assign import Match
from specterm.analysis.fitting import Fit
from specterm.analysis.observed import Observation
from specterm.views.numbers import bracket, short
from specterm.views.plain_table import text_columns

MOST_LINES = 60
"""So many lines are printed; JSON has them all."""


def parameter_table(found: Fit) -> str:
    """Return the fitted numbers, their standard errors in the last digits, where they started, and their correlations."""
    names = [one.name for one in found.parameters]
    rows = []
    for k, one in enumerate(found.parameters):
        shown = [_correlation(float(found.correlations[k, j])) for j in range(k)]
        rows.append([one.name, bracket(one.value, one.error), one.unit, short(one.start), *shown, *[""] * (len(names) - 1 - k)])
    return text_columns(["parameter", "value", "unit", "start", *names[:-1]], rows, left=frozenset({0, 2}))


def _correlation(value: float) -> str:
    return "-" if np.isnan(value) else f"{value:.4f}"


def fit_lines(found: Fit, energy: str) -> str:
    """Return the lines: quantum numbers, observed, computed, the residual, and in uncertainties; the first `MOST_LINES`."""
    with_unit = f" ({energy})" if energy else ""
    rows = [
        [*_ends(line), short(line.value, 12), short(float(computed), 12), short(float(residual), 3), _share(line, residual)]
        for line, computed, residual in list(zip(found.lines, found.computed, found.residuals, strict=True))[:MOST_LINES]
    ]
    headings = [*_names(found.lines[0]), f"observed{with_unit}", "computed", "residual", "in uncertainties"]
    hidden = len(found.lines) - len(rows)
    return text_columns(headings, rows) + (f"\n{hidden} more lines: --json has them all" if hidden else "")


def _share(line: Observation, residual: float) -> str:
    return "-" if line.uncertainty is None else f"{residual / line.uncertainty:.2f}"


def match_table(matches: Sequence[Match], energy: str) -> str:
    """Return proposed matches: row in the file, quantum numbers, observed, computed, how far off this and the next is."""
    with_unit = f" ({energy})" if energy else ""
    rows = [
        [
            str(match.line.row), *_ends(match.line), short(match.line.value, 10), short(match.computed, 10),
            short(match.line.value - match.computed, 3), short(match.next_off, 3),
        ]
        for match in matches
    ]  # fmt: skip
    headings = ["row", *_names(matches[0].line), f"observed{with_unit}", "computed", "off", "next off"]
    return text_columns(headings, rows)


def _names(line: Observation) -> list[str]:
    return ["level"] if line.lower is None else ["from", "to"]


def _ends(line: Observation) -> list[str]:
    return [line.upper.label] if line.lower is None else [line.lower.label, line.upper.label]
