"""What a measurement of an observable can give: levels of the operator, or bins of a value that varies along an axis."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Protocol, TypeVar

import numpy as np

from specterm.analysis.capture import ENOUGH, out_of_reach
from specterm.analysis.commutator import vanishing
from specterm.analysis.level_waves import KnownLevels, Sample, amplitudes, fineness, level_wave, sampled
from specterm.analysis.measured_wave import Wave, turned
from specterm.analysis.unit_names import unit_of
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.model import Function, Model, Operator
from specterm.model.regular import regular_part, regular_slope
from specterm.model.term import linear
from specterm.spectrum import Spectrum, solve

LARGEST = 1e140
"""Values above this cannot be told apart by bins."""
SMALLEST = 1e-10
"""Outcomes less probable than this are left out."""
MOST_BINS = 4_000
MOST_VALUES = 64
"""A function of the coordinate with no more values than this, constant between its jumps, has those as outcomes."""
WANTED = 1 - 1e-7
"""The share of the state that levels are computed for."""
MOST_LEVELS = 256


@dataclass(frozen=True)
class Outcome:
    """One result: its `value` (a level, or the middle of a bin from `low` to `high`), its `probability`, the levels in it."""

    value: float
    probability: float
    low: float
    high: float
    levels: tuple[int, ...] = ()


class Meter(Protocol):
    """A measurement of one observable; `unit` names its unit, "" where it is not known."""

    @property
    def text(self) -> str:
        """The observable as the user wrote it."""

    @property
    def unit(self) -> str:
        """The name of its unit."""

    def outcomes(self, wave: Wave) -> list[Outcome]:
        """Return the results a state can give, ascending in value, with their probabilities."""

    def collapsed(self, wave: Wave, outcome: Outcome) -> Wave:
        """Return the state afterwards, projected and normalised."""


@dataclass(frozen=True)
class LevelMeter:
    """A measurement whose results are levels; levels equal within their errors are one result (Lueders' rule)."""

    text: str
    unit: str
    spectrum: Spectrum
    samples: dict[int, Sample] = field(default_factory=dict, init=False, repr=False, compare=False)
    recent: dict[int, tuple[Wave, Values]] = field(default_factory=dict, init=False, repr=False, compare=False)

    def amplitudes(self, wave: Wave) -> Values:
        """Return <n|psi> for every level, shape (levels,); those of the wave asked for last are kept."""
        return remembered(self.recent, wave, self._projected)

    def _projected(self, wave: Wave) -> Values:
        if wave.axis == "x" or self.spectrum.states is None:
            return amplitudes(self.spectrum, wave)
        parts = fineness(self.spectrum, wave)
        if parts not in self.samples:
            self.samples[parts] = sampled(self.spectrum, wave)
        return amplitudes(self.spectrum, wave, self.samples[parts])

    def outcomes(self, wave: Wave) -> list[Outcome]:
        """Return one outcome for each group of equal levels."""
        shares = np.abs(self.amplitudes(wave)) ** 2
        found = []
        for group in self.groups:
            levels = [self.spectrum.levels[row] for row in group]
            values = [level.value for level in levels]
            share = float(shares[list(group)].sum())
            if share > SMALLEST:
                error = max(level.error or 0.0 for level in levels)
                middle = float(np.mean(values)) if max(map(abs, values)) > error else 0.0
                found.append(Outcome(middle, share, min(values), max(values), tuple(level.index for level in levels)))
        return found

    @cached_property
    def groups(self) -> list[tuple[int, ...]]:
        """The rows of the spectrum, those of equal levels together."""
        levels = self.spectrum.levels
        groups: list[list[int]] = []
        for row in sorted(range(len(levels)), key=lambda k: levels[k].value):
            last = levels[groups[-1][-1]] if groups else None
            reach = (levels[row].error or 0.0) + ((last.error or 0.0) if last else 0.0)
            if last is not None and levels[row].value - last.value <= reach:
                groups[-1].append(row)
            else:
                groups.append([row])
        return [tuple(group) for group in groups]

    def collapsed(self, wave: Wave, outcome: Outcome) -> Wave:
        """Return the part of the wave in the levels of the outcome, normalised."""
        rows = [row for row, level in enumerate(self.spectrum.levels) if level.index in outcome.levels]
        kept = np.zeros(len(self.spectrum.levels), dtype=complex)
        kept[rows] = self.amplitudes(wave)[rows]
        return level_wave(self.spectrum, kept, self._known)

    @cached_property
    def _known(self) -> KnownLevels | None:
        return None if self.spectrum.states is None else KnownLevels(self.spectrum.states)


Found = TypeVar("Found")


def remembered(recent: dict[int, tuple[Wave, Found]], wave: Wave, compute: Callable[[Wave], Found]) -> Found:
    """Return what was computed for this very wave last, else compute it; `recent` holds one wave."""
    if id(wave) not in recent:
        found = compute(wave)
        recent.clear()
        recent[id(wave)] = (wave, found)
    return recent[id(wave)][1]


Sorted = tuple[list[Outcome], Wave, Array]
"""Outcomes, a wave with its pieces cut at the edges of bins, and the bin of each piece."""


@dataclass(frozen=True)
class AxisMeter:
    """A measurement of a function of the coordinate ("x") or of the wave number ("k").

    Results are the bins from j * width to (j + 1) * width, or, without a width, the few values the function has. `marks`
    are places on the axis where the function jumps or turns; `outermost` are the first and the last bin, by their number,
    which hold all that lies beyond; `span` is the part of the axis looked at when a state comes from the other one.
    """

    text: str
    unit: str
    axis: str
    function: Callable[[Array], Array]
    marks: Array
    width: float | None
    outermost: tuple[float, float] = (-math.inf, math.inf)
    span: tuple[float, float] | None = None
    recent: dict[int, tuple[Wave, Sorted]] = field(default_factory=dict, init=False, repr=False, compare=False)

    def outcomes(self, wave: Wave) -> list[Outcome]:
        """Return the bins that hold something."""
        return remembered(self.recent, wave, self._sorted)[0]

    def collapsed(self, wave: Wave, outcome: Outcome) -> Wave:
        """Return the part of the wave whose values lie in the bin, normalised."""
        found, cut, bins = remembered(self.recent, wave, self._sorted)
        place = min(range(len(found)), key=lambda k: abs(found[k].value - outcome.value))
        return cut.only(bins == _bin_of(self, found[place].value))

    def _sorted(self, wave: Wave) -> Sorted:
        """Return the outcomes, the wave with its pieces cut at the edges of bins, and the bin of each piece."""
        here = wave if wave.axis == self.axis else turned(wave, self.span)
        cut = here.cut(self._crossings(here))
        values = self.function((cut.lows + cut.highs) / 2)
        bins = values if self.width is None else np.floor(values / self.width)
        found = []
        for one in np.unique(bins):
            share = float(cut.shares[bins == one].sum())
            if share > SMALLEST:
                found.append(self._outcome(float(one), share))
        return found, cut, bins

    def _outcome(self, number: float, share: float) -> Outcome:
        """Return the result of a bin, or of a value."""
        if self.width is None:
            return Outcome(number, share, number, number)
        low = -math.inf if number == self.outermost[0] else number * self.width
        high = math.inf if number == self.outermost[1] else (number + 1) * self.width
        return Outcome((number + 0.5) * self.width, share, low, high)

    def _crossings(self, wave: Wave) -> Array:
        """Return the places where the function passes the edge of a bin, to full precision by bisection."""
        if self.width is None:
            return self.marks
        x = np.unique(np.concatenate([wave.lows, wave.highs, wave.rule[0], self.marks]))
        numbers = self.function(x) / self.width
        first, last = np.floor(numbers[:-1]), np.floor(numbers[1:])
        if np.abs(last - first).sum() > MOST_BINS:
            raise PhysicsError(
                f"`{self.text}` would fall into more than {MOST_BINS} bins", mend="ask for fewer with --bins, or wider ones"
            )
        passed = [
            (k, edge)
            for k in np.flatnonzero(first != last)
            for edge in np.arange(min(first[k], last[k]) + 1, max(first[k], last[k]) + 1)
        ]
        if not passed:
            return self.marks
        rows = np.array([k for k, _ in passed])
        edges = np.array([edge for _, edge in passed]) * self.width
        return np.unique(np.concatenate([_crossings(self.function, x[rows], x[rows + 1], edges), self.marks]))


def _bin_of(meter: AxisMeter, value: float) -> float:
    return value if meter.width is None else math.floor(value / meter.width)


def _crossings(function: Callable[[Array], Array], low: Array, high: Array, edges: Array) -> Array:
    """Return where a function passes each of the `edges` between `low` and `high` (n,), to full precision."""
    rising = function(high) > function(low)
    for _ in range(80):
        middle = (low + high) / 2
        down = (function(middle) >= edges) == rising
        low, high = np.where(down, low, middle), np.where(down, middle, high)
        if np.all(high - low <= 2 * np.spacing(np.maximum(np.abs(low), np.abs(high)))):
            break
    return high


def meter_for(
    model: Model, spectrum: Spectrum, text: str, wave: Wave, *, bins: int = 24, width: float | None = None, least: int = 16
) -> Meter:
    """Return the measurement of an observable, made for a state: as many levels as hold it, or about `bins` bins.

    `width` fixes the width of the bins, in the observable's unit. Raises PhysicsError where the observable is not Hermitian,
    not self-adjoint on the domain, or has a continuous spectrum that is not known here.
    """
    operator = model.observable(text)
    fault = operator.hermitian()
    if fault is not None:
        raise PhysicsError(f"`{text}` is not an observable: {fault.reason}", mend=fault.mend)
    unit = unit_of(model, text)
    along = _along(model, operator)
    if along is not None:
        axis, function, marks = along
        meter = AxisMeter(text, unit, axis, function, marks, None)
        if width is None and _few_values(operator, wave):
            return replace(meter, span=_span(wave))
        return _binned(meter, wave, bins, width)
    if vanishing(operator - model.operator):
        return LevelMeter(text, unit, holding(model, spectrum, wave, None, least))
    other = replace(model, main=text, operators={**model.operators, text: operator})
    return LevelMeter(text, unit, holding(other, None, wave, _near(operator, wave), least))


def cuts_sharply(model: Model, text: str) -> bool:
    """Say whether an observable is told apart by bins of a place or a momentum, whose edges cut a state."""
    return _along(model, model.observable(text)) is not None


def _along(model: Model, operator: Operator) -> tuple[str, Callable[[Array], Array], Array] | None:
    """Return axis, function and marks of an observable that is a function of the coordinate, or of p on an open line."""
    domain = model.domain
    if operator.order == 0:
        function = operator.function
        if function is None:
            return None
        edges = function.edges(domain.left, domain.right)
        return "x", lambda x: np.real(function(x)).astype(np.float64), edges
    if domain.left_end != "open" or domain.right_end != "open":
        return None
    parts = {k: Function(linear(pairs)).constant for k, pairs in operator.normal.items()}
    if any(value is None for value in parts.values()):
        return None
    powers = [(k, complex(value)) for k, value in parts.items() if value is not None]
    return "k", lambda k: np.real(sum(c * (1j * k) ** n for n, c in powers)).astype(np.float64), np.zeros(1)


def _few_values(operator: Operator, wave: Wave) -> bool:
    """Say whether an observable is a function of the coordinate with few values, constant between its jumps."""
    function = operator.function
    if function is None or wave.axis != "x":
        return False
    x = wave.rule[0]
    slope = regular_slope(function)
    flat = slope.constant == 0 or not np.any(slope(x))
    return bool(flat) and len(np.unique(function(x))) <= MOST_VALUES


def _binned(meter: AxisMeter, wave: Wave, bins: int, width: float | None) -> AxisMeter:
    """Return the meter with bins of a width of 1, 2 or 5 times a power of ten, about `bins` over all but 1e-4 of the state.

    Values far outside, beyond three times that range, fall into the outermost bins.
    """
    here = wave if wave.axis == meter.axis else turned(wave)
    values = meter.function(here.rule[0])
    share = here.rule[1] * np.abs(here.values) ** 2
    if (share[~(np.abs(values) < LARGEST)]).sum() > SMALLEST * share.sum():
        why = f"`{meter.text}` is not finite, or above {LARGEST:g}, where the state is"
        raise PhysicsError(why, mend="choose another observable")
    order = np.argsort(values)
    rising = np.cumsum(share[order]) / share.sum()
    low, high = (float(values[order[min(int(np.searchsorted(rising, q)), len(order) - 1)]]) for q in (5e-5, 1 - 5e-5))
    step = width or _nice((high - low) / bins)
    if (high - low) / step > MOST_BINS / 4:
        raise PhysicsError(f"`{meter.text}` would fall into {(high - low) / step:.3g} bins", mend="ask for wider ones")
    reach = max(high - low, 4 * step)
    first, last = math.floor((low - reach) / step), math.floor((high + reach) / step)
    inner = meter.function

    def held(x: Array) -> Array:
        found: Array = np.clip(np.nan_to_num(inner(x)), (first + 0.5) * step, (last + 0.5) * step)
        return found

    return replace(meter, function=held, width=step, outermost=(first, last), span=_span(here))


def _span(wave: Wave) -> tuple[float, float]:
    """Return one and a half times the extent of a wave, on its axis."""
    middle, half = (wave.lows[0] + wave.highs[-1]) / 2, (wave.highs[-1] - wave.lows[0]) / 2
    return float(middle - 1.5 * half), float(middle + 1.5 * half)


def _nice(size: float) -> float:
    """Return 1, 2 or 5 times a power of ten, the nearest to a size on a logarithmic scale; 1 for nothing."""
    if not size > 0 or not math.isfinite(size):
        return 1.0
    power = 10.0 ** math.floor(math.log10(size))
    return power * min((1, 2, 5, 10), key=lambda m: abs(math.log(m * power / size)))


def holding(model: Model, known: Spectrum | None, wave: Wave, near: float | None, least: int) -> Spectrum:
    """Return as many levels of the main operator as it takes to hold a wave, from those known on."""
    count = max(16, least)
    found = known if known is not None and len(known.levels) >= count else solve(model, count=count, near=near)
    before = 0.0
    while True:
        if found.bound is not None and len(found.levels) > found.bound > 0:
            return solve(model, count=found.bound)
        held = float((np.abs(amplitudes(found, wave)) ** 2).sum()) / wave.norm
        hopeless = count >= ENOUGH and out_of_reach((before, held), WANTED, MOST_LEVELS / count)
        if held >= WANTED or count >= MOST_LEVELS or hopeless or (found.bound is not None and len(found.levels) >= found.bound):
            return found
        before = held
        count = min(2 * max(count, len(found.levels)), MOST_LEVELS)
        found = solve(model, count=count, near=near)


def _near(operator: Operator, wave: Wave) -> float | None:
    """Return the energy to look for levels around, the mean in the wave, where the operator has neither end."""
    if operator.order > 1 or wave.axis != "x":
        return None
    x, w = wave.rule
    step = 1e-7 * float(wave.highs[-1] - wave.lows[0])
    slope = (wave.at(x + step) - wave.at(x - step)) / (2 * step)
    parts = {k: Function(linear(pairs)) for k, pairs in operator.normal.items()}
    moved = sum((np.nan_to_num(regular_part(c)(x)) * (slope if k else wave.values) for k, c in parts.items()), np.zeros(len(x)))
    return float(np.real((w * wave.values.conj() * moved).sum())) / wave.norm
