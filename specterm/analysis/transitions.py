"""Lines between levels: energy, dipole, oscillator strength, sum rule, thermal populations."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from specterm.analysis.commutator import simplified
from specterm.analysis.expectation import expect
from specterm.analysis.lines import Line, made_line
from specterm.analysis.matrix_elements import MatrixElements, elements
from specterm.analysis.observables import Observable, observable, of_operator
from specterm.analysis.prepared import prepare
from specterm.analysis.unit_names import Scaled
from specterm.arrays import Array
from specterm.errors import PhysicsError, SheetError
from specterm.model import Model
from specterm.spectrum import Spectrum

UNFILLED = 1e-4
"""Thermal share of the highest level computed from which on levels are missing."""


@dataclass(frozen=True)
class Transitions:
    """Lines by starting level and end; `sums` has the sum of the strengths found for each starting level, None without them.

    Dipoles divided by the number in `shown` are in the unit there; `into` says that the lines end on levels of another sheet.
    """

    dipole: str
    lines: tuple[Line, ...]
    sums: dict[int, float | None]
    notes: tuple[str, ...]
    shown: Scaled = (1.0, "")
    into: bool = False

    def between(self, lines: Sequence[Line]) -> list[Line]:
        """Return those of the lines that lead from one level to another."""
        return [line for line in lines if self.into or line.start != line.to]


def transitions(
    model: Model,
    spectrum: Spectrum,
    starts: tuple[int, ...] = (0,),
    dipole: str | None = None,
    *,
    temperature: float | None = None,
) -> Transitions:
    """Return the lines from the levels `starts` to all the levels computed, for a dipole observable (default: the coordinate).

    The strength is that of the operator as it stands: for p^2/(2 m) all strengths from a level sum to 1, and with a mass that
    varies the commutator brings in the mean of 1/m (the sum rule of Thomas, Reiche and Kuhn).
    `temperature` is in kelvin, or in units of energy where the sheet has none; it gives each start its thermal share among the
    levels computed. Raises SheetError for levels not computed, PhysicsError for a dipole that is not Hermitian.
    """
    text = dipole or model.domain.coordinate
    asked = observable(model, text)
    _refuse_missing(spectrum, starts)
    shares = populations(model, spectrum, temperature) if temperature is not None else np.ones(len(spectrum.levels))
    matrix = elements(asked, spectrum, spectrum)
    lines, sums, notes = _lines(model, (spectrum, spectrum), asked, matrix, starts, shares)
    if temperature is not None and shares[-1] > UNFILLED:
        notes = (*notes, f"{shares[-1]:.2g} of the population would sit in the highest level computed: ask for more with -n")
    return Transitions(text, lines, sums, notes, asked.shown)


def _lines(
    model: Model,
    spectra: tuple[Spectrum, Spectrum],
    asked: Observable,
    matrix: MatrixElements,
    starts: tuple[int, ...],
    shares: Array,
) -> tuple[tuple[Line, ...], dict[int, float | None], tuple[str, ...]]:
    """Return lines, sums and notes; `matrix` has the ends of the lines as rows and their starts as columns."""
    lower, upper = spectra
    lines: list[Line] = []
    sums: dict[int, float | None] = {}
    notes: list[str] = []
    for start in starts:
        column = matrix.columns.index(start)
        scale, blur, why = sum_rule_scale(model, lower, asked, start)
        some = [
            made_line(
                model, lower.levels[column], level, (complex(matrix.values[row, column]), float(matrix.errors[row, column])),
                (scale, blur), asked.text, float(shares[column]),
            )
            for row, level in enumerate(upper.levels)
        ]  # fmt: skip
        lines += some
        sums[start] = None if scale is None else float(sum(line.strength or 0.0 for line in some))
        notes += why
    if any(level.kind == "box" for level in upper.levels):
        notes.append("lines to box levels stand for parts of a continuum: only their sum over a range means something")
    if _jumps_at_seam(model, asked):
        notes.append(f"`{asked.text}` jumps where the ring closes: its strengths obey no sum rule; take a periodic dipole")
    return tuple(lines), sums, tuple(dict.fromkeys(notes))


def _jumps_at_seam(model: Model, asked: Observable) -> bool:
    """Say whether a function taken for the dipole on a ring has another value at one end than at the other."""
    domain = model.domain
    if not domain.is_ring or asked.order > 0:
        return False
    values = np.abs(asked.parts[0](np.linspace(domain.left, domain.right, 101)))
    ends = asked.parts[0](np.array([domain.left, domain.right]))
    return bool(abs(ends[1] - ends[0]) > 1e-9 * np.nanmax(values))


def _refuse_missing(spectrum: Spectrum, starts: tuple[int, ...]) -> None:
    """Raise SheetError where a line starts from a level that was not computed."""
    known = {level.index for level in spectrum.levels}
    missing = [start for start in starts if start not in known]
    if missing:
        raise SheetError(f"level {missing[0]} is not among the {len(known)} levels computed", mend="ask for more with -n")


def sum_rule_scale(model: Model, spectrum: Spectrum, asked: Observable, start: int) -> tuple[float | None, float, list[str]]:
    """Return <a|[d,[H,d]]|a> for a level, a bound on its error, and notes; None where it vanishes or has no value."""
    d, H = asked.operator, model.operator
    double = simplified(d.commutator(H.commutator(d)))
    if not double.words:
        return None, 0.0, [f"no strengths: [d,[{model.main},d]], which scales them, is 0 for the dipole d = `{asked.text}`"]
    try:
        found = expect(
            model,
            of_operator(double, f"[{asked.text},[{model.main},{asked.text}]]"),
            prepare(model, spectrum, f"level({start})"),
        )
    except PhysicsError as error:
        return None, 0.0, [f"no strengths: {error.message}"]
    size = abs(found.mean)
    if not size > 1e3 * (found.error or 0.0):
        return None, 0.0, [f"no strengths: `{asked.text}` commutes with `{model.main}`, or nearly so"]
    return found.mean, math.inf if found.error is None else found.error, []


def populations(model: Model, spectrum: Spectrum, temperature: float) -> Array:
    """Return the thermal shares of the levels computed, shape (levels,); temperature in kelvin, or in energy without units."""
    if not temperature > 0:
        raise SheetError(f"a temperature of {temperature:g} makes no sense", mend="give one above 0")
    if not spectrum.levels:
        raise PhysicsError("there is no level to be populated", mend="the operator binds nothing")
    boltzmann = model.units.constant("k_B")
    values = np.array([level.value for level in spectrum.levels])
    powers = (values - values.min()) / (temperature * (boltzmann[0] if boltzmann else 1.0))
    shares: Array = np.exp(-powers)
    return shares / shares.sum()


def into_other(
    model: Model, spectrum: Spectrum, found: Spectrum, starts: tuple[int, ...] = (0,), dipole: str | None = None
) -> Transitions:
    """Return the lines from levels of one sheet to levels `found` of another: Franck-Condon factors.

    The dipole is 1 unless given: it commutes, so that strengths are None and the factors are |dipole|^2; those of another
    dipole are scaled by its commutator on the first sheet. Both sheets must have the same coordinate and units.
    """
    text = dipole or "1"
    asked = observable(model, text)
    _refuse_missing(spectrum, starts)
    matrix = elements(asked, found, spectrum)
    made = _lines(model, (spectrum, found), asked, matrix, starts, np.ones(len(spectrum.levels)))
    return Transitions(text, *made, asked.shown, into=True)
