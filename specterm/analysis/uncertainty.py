"""Two observables beside each other: their commutator, and the product of their spreads beside its lower bound."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.commutator import joined, simplified, vanishing, vanishing_on_levels, written
from specterm.analysis.expectation import Expectation, expect, expected
from specterm.analysis.observables import Observable, observable, of_operator
from specterm.analysis.prepared import Prepared, prepare
from specterm.analysis.regularity import rule_for
from specterm.errors import PhysicsError
from specterm.model import Model, Operator
from specterm.spectrum import Spectrum


@dataclass(frozen=True)
class Pair:
    """Two expectations, the `product` of their spreads, its lower `bound` |<[A, B]>|/2 and what is known of the commutator.

    `commutes`: [A, B] vanishes on the domain; `commutator` is it written out, "0" where it vanishes between the ends of the
    domain. `bound` may be nan.
    """

    first: Expectation
    second: Expectation
    product: float
    bound: float
    bound_error: float | None
    commutator: str
    commutes: bool
    notes: tuple[str, ...]


def pair_of(model: Model, spectrum: Spectrum, texts: tuple[str, str], state: str, folder: Path | None = None) -> Pair:
    """Return two observables in a state, by name or expression (Robertson, Phys. Rev. 34 (1929) 163, from memory)."""
    wave = prepare(model, spectrum, state, folder)
    asked = (observable(model, texts[0]), observable(model, texts[1]))
    means = (expected(model, spectrum, asked[0], wave), expected(model, spectrum, asked[1], wave))
    double = asked[0].operator.commutator(asked[1].operator)
    gone = vanishing(double)
    commutes = gone and vanishing_on_levels(spectrum, *asked)
    notes = list(means[1].notes)
    bound, error = 0.0, 0.0
    if not commutes:
        bound, error, why = _bound(model, asked, means, wave, None if gone else of_written(double, texts))
        notes += why
    if gone and not commutes:
        notes.append(f"[{texts[0]},{texts[1]}] is 0 as written, but the ends of the domain keep the two from commuting")
    product = means[0].spread * means[1].spread
    shown = "0" if gone else written(double)
    return Pair(*means, product, bound, None if math.isnan(error) else error, shown, commutes, tuple(notes))


def of_written(double: Operator, texts: tuple[str, str]) -> Observable | None:
    """Return i [A, B] as an observable, None where its weak form is out of reach."""
    try:
        return of_operator(simplified(double * (-1j)), f"i[{texts[0]},{texts[1]}]")
    except PhysicsError:
        return None


def _bound(
    model: Model,
    asked: tuple[Observable, Observable],
    means: tuple[Expectation, Expectation],
    wave: Prepared,
    double: Observable | None,
) -> tuple[float, float, list[str]]:
    """Return |<[A, B]>|/2, a bound on its error (nan for none), and notes: from the commutator, else as |Im <A psi, B psi>|."""
    if double is not None:
        try:
            mean = expect(model, double, wave)
            return abs(mean.mean) / 2, math.nan if mean.error is None else mean.error / 2, []
        except PhysicsError as refusal:
            why = refusal.message
    else:
        why = "the commutator cannot be applied to the state"
    if not all(math.isfinite(one.spread) for one in means):
        return math.nan, math.nan, [f"no lower bound: {why}"]
    x, w = joined(rule_for(one, wave) for one in asked)
    psi = wave.jet(x, 0)
    a, b = (one.apply(wave.jet, x) - mean.mean * psi for one, mean in zip(asked, means, strict=True))
    off = [math.nan if mean.spread_error is None else mean.spread_error for mean in means]
    error = off[0] * (means[1].spread + off[1]) + off[1] * means[0].spread
    return abs(float(np.imag((w * a.conj() * b).sum()))), error, []
