"""Two observables beside each other: their commutator, and the product of their spreads beside its lower bound."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

from specterm.analysis.expectation import Expectation, expect
from specterm.analysis.observables import observable, of_operator
from specterm.analysis.prepared import prepare
from specterm.errors import PhysicsError
from specterm.model import Model, Operator
from specterm.model.normal import vanishes
from specterm.model.term import UNIT
from specterm.model.wordtext import show_word
from specterm.spectrum import Spectrum

LONGEST = 160


@dataclass(frozen=True)
class Pair:
    """Two expectations, the `product` of their spreads, its lower `bound` |<[A, B]>|/2 and what is known of the commutator.

    `commutes`: [A, B] vanishes on the domain, formally; `commutator` is it written out. `bound` may be nan.
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
    first, second = (observable(model, text) for text in texts)
    a, b = (expect(model, one, wave) for one in (first, second))
    double = first.operator.commutator(second.operator)
    gone = vanishing(double)
    shown = "0" if gone else written(double)
    notes = list(b.notes)
    bound, error = 0.0, 0.0
    if not gone:
        try:
            mean = expect(model, of_operator(double * (-1j), f"i[{texts[0]},{texts[1]}]"), wave)
            bound, error = abs(mean.mean) / 2, math.nan if mean.error is None else mean.error / 2
        except PhysicsError as refusal:
            bound, error = math.nan, math.nan
            notes.append(f"no lower bound: {refusal.message}")
    product = a.spread * b.spread
    return Pair(a, b, product, bound, None if math.isnan(error) else error, shown, gone, tuple(notes))


def vanishing(operator: Operator) -> bool:
    """Say whether an operator is zero on the domain: every coefficient, after normal ordering."""
    return all(vanishes(pairs, operator.setting.domain) for pairs in operator.normal.values())


def written(operator: Operator) -> str:
    """Return an operator in normal order as text in terms of p, cut where it is long."""
    parts = []
    for power, pairs in sorted(operator.normal.items(), reverse=True):
        if vanishes(pairs, operator.setting.domain):
            continue
        for coefficient, term in pairs:
            parts.append(show_word(coefficient, (term, *[UNIT] * power), operator.setting))
    text = " + ".join(parts).replace("+ -", "- ")
    return text if len(text) <= LONGEST else text[: LONGEST - 3] + "..."
