"""Numbers of a sheet fitted to observed lines: weighted least squares with exact derivatives."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from specterm.analysis.fit_assign import Match, assign
from specterm.analysis.fit_levels import Levels, Solver, levels_for
from specterm.analysis.fit_statistics import Statistics, statistics
from specterm.analysis.fit_steps import Bounds, Minimum, minimum
from specterm.analysis.observed import Observation, Observed
from specterm.arrays import Array
from specterm.errors import SheetError
from specterm.language import parse
from specterm.language.edits import with_number

FELT = 0.1
"""Errors of computed lines above this share of their uncertainty are told."""
LOOSE = 3.0
"""A reduced chi-square above this is told."""
DIGITS = 1e-3
"""Fitted numbers are written to this share of what each alone, the others held, is known to."""


@dataclass(frozen=True)
class Fitted:
    """One fitted number: its value as the sheet writes it, its standard error (None where none is known), where it started.

    `alone` is what its error would be if the others were known.
    """

    name: str
    unit: str
    value: float
    error: float | None
    start: float
    alone: float


@dataclass(frozen=True)
class Fit:
    """The result of a fit.

    `computed` and `residuals` (lines,) are in the sheet's unit of energy, residuals observed - computed; `chi2` is the sum of
    their squares over the uncertainties (over 1 where `weighted` is False), `dof` lines less numbers; `correlations` (numbers,
    numbers) are nan where not known. `converged` is False where the steps ran out.
    """

    parameters: tuple[Fitted, ...]
    lines: tuple[Observation, ...]
    computed: Array
    residuals: Array
    chi2: float
    dof: int
    correlations: Array
    weighted: bool
    converged: bool
    steps: int
    matches: tuple[Match, ...]
    notes: tuple[str, ...]

    @property
    def reduced(self) -> float:
        """Chi-square over the degrees of freedom, nan where there are none."""
        return self.chi2 / self.dof if self.dof > 0 else math.nan


def propose(text: str, observed: Observed, vary: Bounds, solver: Solver) -> list[Match]:
    """Return the transitions nearest to the lines without quantum numbers, at the numbers the sheet has now."""
    levels, _ = _ready(text, observed, vary, solver)
    return assign(levels, observed.lines)[1]


def fit(text: str, observed: Observed, vary: Bounds, solver: Solver) -> Fit:
    """Return the numbers of the sheet `text` that fit the observed lines best.

    Lines without quantum numbers are matched first (`propose` shows how). Uses scipy.optimize.least_squares (trust region
    reflective; M. A. Branch, T. F. Coleman and Y. Li, SIAM J. Sci. Comput. 21 (1999) 1) with derivatives by `sensitivities`.
    Standard errors are those of the uncertainties given, or, without any, of the scatter of the lines. Raises SheetError for
    names, bounds and numbers of lines that make no fit; PhysicsError where a level of a line is not bound at the start.
    """
    levels, starts = _ready(text, observed, vary, solver)
    if len(observed.lines) < len(vary):
        raise SheetError(
            f"{len(observed.lines)} lines cannot determine {len(vary)} numbers", mend="vary fewer, or observe more lines"
        )
    lines, matches = assign(levels, observed.lines)
    weights = np.array([1.0 / line.uncertainty if line.uncertainty else 1.0 for line in lines])
    found = minimum(levels, lines, weights, vary, starts)
    levels.move(found.values.tolist())
    computed, doubts = levels.computed(lines)
    jacobian = levels.jacobian(lines) * weights[:, None]
    residuals = np.array([line.value for line in lines]) - computed
    chi2, dof = float(((residuals * weights) ** 2).sum()), len(lines) - len(vary)
    known = statistics(jacobian, list(vary), found.held)
    scale = 1.0 if observed.weighted else math.sqrt(chi2 / dof) if dof else math.nan
    notes = (*known.notes, *_remarks(found, observed, (chi2, dof), doubts * weights))
    parameters = _fitted(levels, list(vary), (starts, found.values), known, (jacobian, scale))
    return Fit(
        parameters, tuple(lines), computed, residuals, chi2, dof, known.correlations, observed.weighted, found.converged,
        found.steps, tuple(matches), notes,
    )  # fmt: skip


def _ready(text: str, observed: Observed, vary: Bounds, solver: Solver) -> tuple[Levels, Array]:
    """Return the levels at the numbers the sheet has, and these."""
    if not vary:
        raise SheetError("no number is named to be varied", mend="name plain numbers of the sheet with --vary A,B")
    levels = levels_for(parse(text), tuple(vary), observed.lines, solver)
    for name, (low, high) in vary.items():
        start = levels.written[name].value
        if not low <= start <= high or not low < high:
            raise SheetError(
                f"the bounds {low:g}:{high:g} do not hold `{name}`, which is {start:g}",
                mend="give bounds around the number in the sheet, or change it",
            )
    starts = np.array([levels.written[name].value for name in vary])
    levels.move(starts.tolist())
    return levels, starts


def _fitted(
    levels: Levels, names: Sequence[str], values: tuple[Array, Array], known: Statistics, jacobian: tuple[Array, float]
) -> tuple[Fitted, ...]:
    """Return the fitted numbers with their errors."""
    written = levels.written
    weighted, scale = jacobian
    with np.errstate(divide="ignore", invalid="ignore"):
        alone = scale / np.sqrt((weighted**2).sum(axis=0))
    found = []
    for k, name in enumerate(names):
        error = float(known.errors[k]) * scale
        told = error if math.isfinite(error) else None
        found.append(Fitted(name, written[name].unit, float(values[1][k]), told, float(values[0][k]), float(alone[k])))
    return tuple(found)


def _remarks(found: Minimum, observed: Observed, sums: tuple[float, int], doubts: Array) -> list[str]:
    """Return what else is to be said about a fit."""
    notes = list(found.notes) if not found.converged else []
    if not observed.weighted:
        notes.append("no uncertainties are given: all lines count alike, errors are those of the scatter")
    if not found.converged:
        notes.append(f"not converged: the fit has not settled after {found.steps} steps")
    chi2, dof = sums
    if observed.weighted and dof > 0 and chi2 / dof > LOOSE:
        notes.append(f"the lines scatter {math.sqrt(chi2 / dof):.3g} times more than their uncertainties allow")
    if observed.weighted and doubts.max(initial=0.0) > FELT:
        notes.append("the levels computed are not far surer than the lines: ask for more with --tol")
    if dof == 0 and not observed.weighted:
        notes.append("as many numbers as lines: nothing is left to tell the errors from")
    return notes


def fitted_text(text: str, found: Fit) -> str:
    """Return the sheet with the fitted numbers in place of the old ones, comments and layout kept."""
    for one in found.parameters:
        text = with_number(text, one.name, _digits(one))
    return text


def _digits(one: Fitted) -> Decimal | float:
    """Return a fitted number with the digits that mean something."""
    if not math.isfinite(one.alone) or one.alone <= 0 or one.value == 0:
        return one.value
    place = Decimal(one.alone * DIGITS).adjusted()
    return round(Decimal(one.value), max(-place, -Decimal(one.value).adjusted()))
