"""Means of operators above order two, from the weak form, half of the derivatives on either side."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from specterm.analysis.expectation import Expectation, expected, own_level
from specterm.analysis.observables import HIGHEST, observable, weak
from specterm.analysis.prepared import Prepared, prepare
from specterm.analysis.quadrature import resolve
from specterm.analysis.unit_names import unit_of
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum import Spectrum

MOST = 2 * HIGHEST
"""The highest order whose weak form needs no derivative of a wave above the second."""
MOST_PIECES = 2_000
UNTOLD = "above order two no error is known, and no spread: it needs derivatives of the state above the second"


def mean_of(
    model: Model, spectrum: Spectrum, text: str, state: str = "level(0)", folder: Path | None = None
) -> Expectation:
    """Return what `expectation` does for an observable up to order two, and `high_mean` above.

    Raises SheetError and PhysicsError as they do.
    """
    return mean_in(model, spectrum, text, prepare(model, spectrum, state, folder))


def mean_in(model: Model, spectrum: Spectrum, text: str, wave: Prepared) -> Expectation:
    """Return what `mean_of` does, in a state made ready."""
    if model.observable(text).order <= HIGHEST:
        return expected(model, spectrum, observable(model, text), wave)
    return own_level(model, spectrum, text, wave.name) or high_mean(model, text, wave)


def high_mean(model: Model, text: str, wave: Prepared) -> Expectation:
    """Return the mean of an operator of order three or four, a name or an expression; its error and spread are not known.

    Raises PhysicsError where the operator is not Hermitian, of a higher order, differentiates a jump, or has no finite mean.
    """
    operator = model.observable(text)
    fault = operator.hermitian()
    if fault is not None:
        raise PhysicsError(f"`{text}` is not an observable: {fault.reason}", mend=fault.mend)
    terms = operator.form().terms
    if operator.order > MOST or any(c.has_edge or max(key) > HIGHEST for key, c in terms):
        raise PhysicsError(
            f"`{text}` is of order {operator.order} in the momentum, or differentiates a jump",
            mend=f"means are available up to order {MOST}; the level values themselves at any even order",
        )
    functions = [c for _, c in terms if c.constant is None]
    ends = (float(wave.places[0]), float(wave.places[-1]))
    marks = [f.edges(*ends) for f in functions]
    places = np.unique(np.concatenate([wave.places, *marks]))
    places = places[(places >= ends[0]) & (places <= ends[1])]

    def every(x: Array) -> Values:
        return np.nan_to_num(np.array([wave.jet(x, k) for k in range(HIGHEST + 1)]))

    rule = resolve(every, places, [1e-13, 1e-12, 1e-11], MOST_PIECES)
    norm = float((rule.w * np.abs(wave.jet(rule.x, 0)) ** 2).sum())
    total, _ = weak(terms, wave.jet, wave.jet, rule.x, rule.w)
    mean = float(np.real(total)) / norm
    if not math.isfinite(mean):
        raise PhysicsError(f"the mean of `{text}` in {wave.name} is not finite", mend="choose another observable")
    return Expectation(text, wave.name, mean, math.nan, None, None, unit_of(model, text), (UNTOLD,))
