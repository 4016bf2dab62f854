"""Matrix elements of an observable between levels, with errors."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specterm.analysis.observables import Jet, Observable, observable, weak
from specterm.analysis.prepared import slips
from specterm.analysis.quadrature import POINTS, Rule, resolve
from specterm.analysis.unit_names import Scaled
from specterm.arrays import Array, Values
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.result import States

ROUNDING = 1e-12
"""Rounding of an eigenstate in norm."""
LOST = 0.1
"""A state that may be off by this much in norm has no error to speak of."""
BLOCK = 2_000
"""Points taken at once, so that many levels on large meshes fit into memory."""
MOST_PIECES = 6_000
MOST_VALUES = 4_000_000
"""Values of all levels at all points of a rule, at most about."""
UNRESOLVED = 1e-18
"""A rule that may have missed more than this share of a norm adds that to the errors."""


@dataclass(frozen=True)
class MatrixElements:
    """<a|A|b> for the levels `rows` (a) and `columns` (b): `values` and bounds on their `errors` (a, b), inf where unknown.

    They are in `unit`; divided by the number in `shown` they are in the unit there.
    """

    observable: str
    rows: tuple[int, ...]
    columns: tuple[int, ...]
    values: Values
    errors: Array
    unit: str
    shown: Scaled = (1.0, "")


def matrix_elements(model: Model, spectrum: Spectrum, text: str) -> MatrixElements:
    """Return the matrix of an observable, a name or an expression, between all the levels computed.

    It need not be Hermitian. Raises PhysicsError above order two. Tested against closed forms for wells and oscillators.
    """
    return elements(observable(model, text, hermitian=False), spectrum, spectrum)


def elements(asked: Observable, left: Spectrum, right: Spectrum) -> MatrixElements:
    """Return <a|A|b> with a among the levels of one spectrum and b among those of another, on domains that may differ."""
    rows, columns = (tuple(level.index for level in found.levels) for found in (left, right))
    if left.states is None or right.states is None:
        empty = np.zeros((len(rows), len(columns)))
        return MatrixElements(asked.text, rows, columns, empty.astype(complex), empty, asked.unit, asked.shown)
    rule = shared_rule(asked, left.states, right.states)
    values = np.zeros((len(rows), len(columns)), dtype=complex)
    sizes, reach = np.zeros(values.shape), [np.zeros(len(rows)), np.zeros(len(columns))]
    for start in range(0, len(rule.x), BLOCK):
        x, w = rule.x[start : start + BLOCK], rule.w[start : start + BLOCK]
        bra, ket = jets(left.states, x, asked.highest), jets(right.states, x, asked.highest)
        part, size = weak(asked.terms, bra, ket, x, w)
        values, sizes = values + part, sizes + size
        for side, jet in enumerate((bra, ket)):
            reach[side] = reach[side] + (w * np.abs(asked.apply(jet, x)) ** 2).sum(axis=1)
    norms = [np.sqrt(total) for total in reach]
    off = (slips(left) + ROUNDING, slips(right) + ROUNDING)
    rough = 1e4 * off[0][:, None] * off[1] * (norms[0][:, None] + norms[1])
    errors = off[0][:, None] * norms[1] + norms[0][:, None] * off[1] + rough + 1e-14 * sizes
    unseen = float(rule.missed.max(initial=0.0))
    if unseen > UNRESOLVED:
        errors = errors + np.sqrt(unseen) * (norms[0][:, None] + norms[1] + sizes)
    lost = (off[0][:, None] > LOST) | (off[1] > LOST)
    return MatrixElements(asked.text, rows, columns, values, np.where(lost, np.inf, errors), asked.unit, asked.shown)


def jets(states: States, x: Array, order: int) -> Jet:
    """Return the derivatives up to the order at the places x, each computed once."""
    known = [states.evaluate(x, k) for k in range(order + 1)]
    return lambda _x, k: known[k]


def shared_rule(asked: Observable, left: States, right: States) -> Rule:
    """Return points that resolve the products of all the states with the functions of the observable."""
    ends = (max(left.places[0], right.places[0]), min(left.places[-1], right.places[-1]))
    functions = [f for f in asked.functions() if f.constant is None]
    marks = [f.edges(*ends) for f in functions] + [f.centres(*ends)[:64] for f in functions]
    places = np.unique(np.concatenate([left.places, right.places, *marks, np.array(ends)]))
    places = places[(places >= ends[0]) & (places <= ends[1])]

    def envelope(x: Array) -> Values:
        waves = [*left.evaluate(x), *([] if right is left else right.evaluate(x))]
        with np.errstate(all="ignore"):
            return np.array([*waves, *(_finite(f(x) * wave) for f in functions for wave in waves[-1:])])

    count = left.evaluate(places[:1]).shape[0] + right.evaluate(places[:1]).shape[0]
    return resolve(envelope, places, 1e-12, max(2 * len(places), min(MOST_PIECES, MOST_VALUES // (POINTS * count))))


def _finite(values: Values) -> Values:
    """Return values with 0 for those that are not finite."""
    return np.nan_to_num(values, nan=0.0, posinf=0.0, neginf=0.0)
