"""Commutators written out, and whether they vanish: between the ends of the domain, and at them."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from specterm.analysis.matrix_elements import jets, shared_rule
from specterm.analysis.observables import Observable
from specterm.analysis.quadrature import Rule, points_between
from specterm.arrays import Array, Values
from specterm.model import Operator
from specterm.model.normal import Pairs, vanishes
from specterm.model.polynomial import coefficients
from specterm.model.scalar import Scalar
from specterm.model.term import COORDINATE, UNIT, Term, multiply, split
from specterm.model.word import gathered, word
from specterm.model.wordtext import show_word
from specterm.spectrum import Spectrum

LONGEST = 160
HIGHEST_POWER = 12
"""Polynomials up to this degree are multiplied out."""
TRIED = 8
"""Levels on which a commutator is tried at the ends of the domain."""
NOTHING = 1e-6
"""A commutator is zero on levels where its matrix is below this share of the largest that its two parts can be."""


def vanishing(operator: Operator) -> bool:
    """Say whether an operator is zero between the ends of the domain: every coefficient, after normal ordering."""
    return all(vanishes(pairs, operator.setting.domain) for pairs in operator.normal.values())


def vanishing_on_levels(spectrum: Spectrum, first: Observable, second: Observable) -> bool:
    """Say whether <A a, B b> = <B a, A b> and <A a, b> = <a, A b>, for B too, on the lowest levels a and b.

    What is 0 as written may fail this at the ends of the domain, where one observable leads out of what the other acts on.
    """
    if spectrum.states is None:
        return True
    x, w = joined(shared_rule(asked, spectrum.states, spectrum.states) for asked in (first, second))
    jet = jets(spectrum.states, x, max(first.order, second.order))
    psi = jet(x, 0)[:TRIED]
    a, b = (asked.apply(jet, x)[:TRIED] for asked in (first, second))
    return all(_symmetric(w, *pair) for pair in ((a, b), (a, psi), (b, psi)))


def _symmetric(w: Array, one: Values, other: Values) -> bool:
    """Say whether the matrix of the products of waves (levels, n) is Hermitian, beside the largest it could be."""
    matrix = (w * one.conj()) @ other.T
    sizes = [np.sqrt((w * np.abs(waves) ** 2).sum(axis=1)).max() for waves in (one, other)]
    return bool(np.abs(matrix - matrix.conj().T).max() <= NOTHING * sizes[0] * sizes[1])


def joined(rules: Iterable[Rule]) -> tuple[Array, Array]:
    """Return points and weights on all the pieces of several rules."""
    return points_between(np.unique(np.concatenate([rule.places for rule in rules])))


def written(operator: Operator) -> str:
    """Return an operator in normal order as text in terms of p, cut where it is long."""
    parts = []
    for power, pairs in sorted(operator.normal.items(), reverse=True):
        if not vanishes(pairs, operator.setting.domain):
            parts += [show_word(c, (term, *[UNIT] * power), operator.setting) for c, term in _multiplied_out(pairs)]
    text = " + ".join(parts).replace("+ -", "- ")
    return text if len(text) <= LONGEST else text[: LONGEST - 3] + "..."


def simplified(operator: Operator) -> Operator:
    """Return the operator with derivatives on the right and what cancels left out; unchanged where a jump is differentiated."""
    domain = operator.setting.domain
    kept = {power: pairs for power, pairs in operator.normal.items() if not vanishes(pairs, domain)}
    if any(term.broken for pairs in kept.values() for _, term in pairs):
        return operator
    words = (word(c, (term, *[UNIT] * power)) for power, pairs in kept.items() for c, term in _multiplied_out(pairs))
    return Operator(gathered(words), operator.setting)


def _multiplied_out(pairs: Pairs) -> Pairs:
    """Return a sum of terms with its polynomials collected by powers, constant factors in front."""
    powers: dict[int, Scalar] = {}
    others: Pairs = []
    for coefficient, term in pairs:
        inner, core = split(term)
        known = coefficients(core, HIGHEST_POWER)
        if known is None:
            others.append((coefficient * inner, core))
            continue
        for power, number in enumerate(known):
            powers[power] = powers.get(power, Scalar(0.0)) + coefficient * inner * number
    kept = [(c, _power(n)) for n, c in sorted(powers.items()) if abs(c.value) > c.slack]
    return [*kept, *others]


def _power(n: int) -> Term:
    return multiply(*[COORDINATE] * n) if n else UNIT
