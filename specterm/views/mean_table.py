"""Means and spreads as text: one observable, and two beside each other."""

from __future__ import annotations

from math import isnan

from specterm.analysis.expectation import Expectation
from specterm.analysis.uncertainty import Pair
from specterm.analysis.unit_names import dimension_of, named, shown_unit
from specterm.model import Model
from specterm.views.numbers import bracket, short, with_unit


def shown_in(model: Model, found: Expectation) -> tuple[float, str]:
    """Return what a number is divided by to be shown, and the unit: a momentum is shown in hbar over the unit of length."""
    return shown_unit(model, found.observable)


def mean_texts(model: Model, found: Expectation) -> tuple[str, str, str]:
    """Return mean and spread with the digits that are sure, and their unit."""
    scale, unit = shown_in(model, found)
    mean = bracket(found.mean / scale, None if found.error is None else found.error / scale)
    known = None if found.spread_error is None else found.spread_error / scale
    spread = "-" if isnan(found.spread) else bracket(found.spread / scale, known)
    return mean, spread, unit


def mean_line(model: Model, found: Expectation) -> str:
    """Return mean and spread of one observable in one line."""
    mean, spread, unit = mean_texts(model, found)
    wide = spread if spread == "-" else with_unit(spread, unit)
    return f"<{found.observable}> = {with_unit(mean, unit)}   spread {wide}"


def pair_lines(model: Model, pair: Pair) -> list[str]:
    """Return the product of two spreads beside its lower bound, in the units the spreads are shown in, and the commutator."""
    (first, left), (second, right) = shown_in(model, pair.first), shown_in(model, pair.second)
    kinds = [dimension_of(model, one.observable) for one in (pair.first, pair.second)]
    scale, unit = first * second, " ".join(name for name in (left, right) if name)
    if kinds[0] is not None and kinds[1] is not None:
        scale, unit = named(model, kinds[0] * kinds[1])
    bound = bracket(pair.bound / scale, None if pair.bound_error is None else pair.bound_error / scale)
    verdict = "vanishes: they commute" if pair.commutes else f"= {pair.commutator}"
    return [
        f"product of the spreads {with_unit(short(pair.product / scale, 10), unit)}   not below |<[A,B]>|/2 = {bound}",
        f"[{pair.first.observable},{pair.second.observable}] {verdict}",
    ]
