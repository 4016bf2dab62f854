"""The part of a prepared state that the levels computed do not hold, and what it can do to an observable at any time.

It evolves on its own, orthogonal to the part that is held, and keeps its norm, its energy and the norm of H applied to it. With
H = K |D f|^2 + V that bounds its kinetic energy, the norm of every function f with f^2 <= a V + b, and of what is of first
order. Elsewhere d/dt ||A chi|| <= ||[H, A] chi||/hbar bounds how fast it grows. (Cauchy-Schwarz throughout; derived here.)
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from specterm.analysis.expectation import expect
from specterm.analysis.observables import Jet, Observable, of_operator, weak
from specterm.analysis.prepared import Prepared
from specterm.analysis.quadrature import resolve
from specterm.arrays import Array, Values
from specterm.errors import SpectermError
from specterm.model import Function, Model
from specterm.model.operator import differentiation, multiplication
from specterm.spectrum import Spectrum, solve

MOST_PIECES = 6_000
FAR = 1e6
"""Functions are looked at out to so many extents of the levels on an open domain."""
SAMPLES = 4_001
STEPS = 97
RISING = 1e-9
"""A function that still rises by this share at the last place looked at is taken to rise for ever."""


@dataclass(frozen=True)
class Missing:
    """What is not held: its norm `size`, its `energy` <chi|H|chi>, a bound on its `kinetic` energy, ||H chi|| as `driven`.

    The last three are inf where they have no finite value. `x`, `w` and `jet` integrate products of it at time 0.
    """

    model: Model
    spectrum: Spectrum
    size: float
    energy: float
    kinetic: float
    driven: float
    x: Array
    w: Array
    jet: Jet

    def bound(self, asked: Observable, times: Array) -> Array:
        """Return bounds on ||A chi(t)|| at the times, inf where there is none."""
        if self.size == 0:
            return np.zeros(len(times))
        still = np.full(len(times), self._still(asked))
        if asked.order > 0:
            return still
        try:
            speed = self._still(of_operator(self.model.operator.commutator(asked.operator), asked.text))
        except SpectermError:
            return still
        start = math.sqrt(float((self.w * np.abs(asked.apply(self.jet, self.x)) ** 2).sum()))
        with np.errstate(invalid="ignore"):
            grown = start + np.where(times == 0, 0.0, np.abs(times) / self.model.hbar * speed)
        return np.minimum(still, grown)

    def share(self, asked: Observable, beyond: Array) -> Array:
        """Return bounds on |<chi|A|chi>| from those on ||A chi||, or from the kinetic energy where that does better."""
        bound = self.size * beyond
        sturm = _sturm(self.model)
        terms = dict(asked.terms)
        if sturm is None or asked.order != 2 or not set(terms) <= {(0, 0), (1, 1)} or not math.isfinite(self.kinetic):
            return bound
        x = _places(self.model, self.spectrum, asked.functions())
        with np.errstate(all="ignore"):
            steep = _highest(np.abs(_values(terms[1, 1], x) / _values(sturm[0], x)), self.model)
        rest = self._function(np.abs(_values(terms[0, 0], x)), x) if (0, 0) in terms else 0.0
        return np.minimum(bound, self._leaning(steep) + self.size * rest)

    def _leaning(self, steep: float) -> float:
        """Return the share of the kinetic energy that a coefficient `steep` times that of the operator can have."""
        return steep * self.kinetic if steep > 0 else 0.0

    def _still(self, asked: Observable) -> float:
        """Return a bound that holds at all times."""
        x = _places(self.model, self.spectrum, asked.functions())
        parts = [np.abs(_values(part, x)) for part in asked.parts]
        if asked.order == 0:
            return self._function(parts[0], x)
        sturm = _sturm(self.model)
        if sturm is None:
            return math.inf
        k, b, _ = sturm
        if asked.order > 1:
            return self._second(asked, x) if asked.order == 2 else math.inf
        with np.errstate(all="ignore"):
            steep = _highest(parts[1] ** 2 / np.abs(_values(k, x)), self.model)
            rest = parts[0] + (0.0 if b is None else parts[1] * np.abs(_values(b, x) / (2 * _values(k, x))))
        return math.sqrt(self._leaning(steep)) + self._function(rest, x)

    def _second(self, asked: Observable, x: Array) -> float:
        """Return the bound of r H + B with r a number and B of lower order; inf for other observables of order two."""
        own = of_operator(self.model.operator, self.model.main)
        with np.errstate(all="ignore"):
            ratio = _values(asked.parts[2], x) / _values(own.parts[2], x) if own.order == 2 else np.array([np.nan])
        number = complex(np.median(np.real(ratio)), np.median(np.imag(ratio)))
        if not np.abs(ratio - number).max() <= 1e-9 * abs(number):
            return math.inf
        rest = of_operator(asked.operator - self.model.operator * number, asked.text)
        if rest.order > 1 and np.abs(_values(rest.parts[2], x)).max() > 1e-9 * np.abs(_values(asked.parts[2], x)).max():
            return math.inf
        return abs(number) * self.driven + self._still(replace(rest, parts=rest.parts[:2]))

    def _function(self, f: Array, x: Array) -> float:
        """Return the least bound sqrt(a energy + b size^2) of a function by its values f, over a and b with f^2 <= a V + b."""
        found = _highest(f**2, self.model) * self.size**2
        sturm = _sturm(self.model)
        if sturm is None or not math.isfinite(self.energy):
            return math.sqrt(found)
        v = _lowered(sturm, x)
        depth = -_highest(-v, self.model)
        middle = float(np.median(f[np.isfinite(f)] ** 2)) if np.isfinite(f).any() else 0.0
        scale = middle / max(self.energy / self.size**2 - depth, 1e-300) if math.isfinite(depth) else 0.0
        for a in scale * np.geomspace(1e-8, 1e8, STEPS) if scale > 0 else ():
            with np.errstate(all="ignore"):
                found = min(found, a * self.energy + _highest(f**2 - a * v, self.model) * self.size**2)
        return math.sqrt(max(found, 0.0))


def missing_of(model: Model, spectrum: Spectrum, prepared: Prepared, amplitudes: Values) -> Missing:
    """Return what the levels with these amplitudes (levels,) do not hold of a prepared state."""
    states = spectrum.states
    assert states is not None

    def jet(x: Array, k: int) -> Values:
        return np.asarray(prepared.jet(x, k) - amplitudes @ states.evaluate(x, k))

    places = np.unique(np.concatenate([prepared.places, states.places]))
    rule = resolve(lambda x: np.array([prepared.wave(x), amplitudes @ states.evaluate(x)]), places, 1e-13, MOST_PIECES)
    x, w = rule.x, rule.w
    known = [np.nan_to_num(jet(x, k)) for k in range(3)]
    size = math.sqrt(float((w * np.abs(known[0]) ** 2).sum()) + prepared.missed)
    energy = driven = math.inf
    try:
        own = of_operator(model.operator, model.main)
        mean = expect(model, own, prepared)
        energy = float(np.real(weak(own.terms, lambda _, k: known[k], lambda _, k: known[k], x, w)[0]))
        if math.isfinite(mean.spread):
            driven = math.sqrt(float((w * np.abs(own.apply(lambda _, k: known[k], x)) ** 2).sum()))
    except SpectermError:
        energy = math.inf
    return Missing(model, spectrum, size, energy, _kinetic(model, spectrum, energy, size), driven, x, w, jet)


def _kinetic(model: Model, spectrum: Spectrum, energy: float, size: float) -> float:
    """Return a bound on the kinetic energy, from the depth of the potential or, without one, the lowest level at half of it."""
    sturm = _sturm(model)
    if sturm is None or not math.isfinite(energy):
        return math.inf
    x = _places(model, spectrum, (sturm[2],))
    depth = -_highest(-_lowered(sturm, x), model)
    if math.isfinite(depth):
        return max(energy - depth * size**2, 0.0)
    setting = model.operator.setting
    slope = differentiation(setting)
    half = model.operator + slope * multiplication(sturm[0], setting) * slope * 0.5
    try:
        levels = solve(replace(model, operators={**model.operators, model.main: half}), count=1).levels
    except SpectermError:
        return math.inf
    return max(2 * (energy - (levels[0].value - (levels[0].error or 0.0)) * size**2), 0.0) if levels else math.inf


def _sturm(model: Model) -> tuple[Function, Function | None, Function] | None:
    """Return K, B and V of the operator, None above order two, at order below, and where K is not positive."""
    try:
        found = model.operator.sturm() if model.operator.order == 2 else None
    except SpectermError:
        return None
    if found is None or (found.K.constant is not None and complex(found.K.constant).real <= 0):
        return None
    return found.K, found.B, found.V


def _lowered(sturm: tuple[Function, Function | None, Function], x: Array) -> Array:
    """Return V - B^2/(4 K) at places: what is left when the square of the kinetic part is completed."""
    k, b, v = sturm
    values = np.real(_values(v, x))
    with np.errstate(all="ignore"):
        return values if b is None else values - np.real(_values(b, x)) ** 2 / (4 * np.real(_values(k, x)))


def _values(function: Function, x: Array) -> Values:
    with np.errstate(all="ignore"):
        return np.asarray(function(x))


def _places(model: Model, spectrum: Spectrum, functions: tuple[Function, ...]) -> Array:
    """Return places all over the domain, far out on open ends, ascending."""
    domain = model.domain
    inner = (max(spectrum.left, domain.left), min(spectrum.right, domain.right))
    extent = inner[1] - inner[0]
    steps = extent * np.geomspace(1e-12, 1.0, 200)
    ends = [end for end in (domain.left, domain.right) if math.isfinite(end)]
    near = [mark for f in functions if f.constant is None for mark in (f.edges(*inner), f.centres(*inner)[:64])]
    marks = np.concatenate([np.array(ends), *near])
    far = extent * np.geomspace(1e-3, FAR, 400)
    around = (marks[:, None] + np.concatenate([-steps, steps])).ravel()
    every = np.concatenate([np.linspace(*inner, SAMPLES), marks, around, inner[0] - far, inner[1] + far])
    return np.unique(every[(every >= domain.left) & (every <= domain.right)])


def _highest(values: Array, model: Model) -> float:
    """Return the largest of values at ascending places, inf where they rise to the last on an open end or are not numbers."""
    if np.isnan(values).any():
        return math.inf
    top = float(values.max())
    for end, last, before in ((model.domain.left, 0, 1), (model.domain.right, -1, -2)):
        if not math.isfinite(end) and values[last] == top and values[last] - values[before] > RISING * abs(top):
            return math.inf
    return top
