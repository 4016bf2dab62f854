"""Sequences of measurements on a prepared state: outcomes, draws, states afterwards, repeated runs, both orders of two."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path

import numpy as np

from specterm.analysis.level_waves import KnownLevels, amplitudes, level_wave
from specterm.analysis.measured_wave import Wave, of_prepared
from specterm.analysis.meters import LevelMeter, Meter, Outcome, cuts_sharply, holding, meter_for
from specterm.analysis.prepared import prepare
from specterm.arrays import Array
from specterm.errors import SheetError
from specterm.model import Model
from specterm.spectrum import Spectrum

RARE = 1e-7
"""First outcomes less probable than this are not followed further in the joint probabilities."""
LOST = 1e-6
"""Probability that no outcome covers, told from here on."""
ROUGH_LEVELS = 128
"""Levels taken at least where a state was cut sharply before."""
Branch = tuple[int, ...]
"""The places of the outcomes taken so far."""


@dataclass(frozen=True)
class Step:
    """One measurement: what could come out, which outcome was taken (its place, or None), and the probability not covered."""

    observable: str
    unit: str
    outcomes: tuple[Outcome, ...]
    drawn: int | None
    rest: float


@dataclass(frozen=True)
class Record:
    """The steps of one run, the `seed` of its draws and notes on what limits it."""

    state: str
    steps: tuple[Step, ...]
    seed: int
    notes: tuple[str, ...]


@dataclass(frozen=True)
class Joint:
    """One result of a whole sequence: a value for each step, its probability, and how often it came in the runs."""

    values: tuple[float, ...]
    probability: float
    count: int


@dataclass(frozen=True)
class Orders:
    """Joint probabilities of two measurements in both orders, [first value, second value], and how far they differ.

    `forward` measures the first before the second, `backward` the other way round, both indexed by the values of the first and
    then of the second; `missing` is what either leaves out, as a rule on levels above those computed. `distance` is half the
    sum of |forward - backward|, the missing shares compared as one more result: 0 where the order does not matter, at most 1.
    The true one is not below it, and above it by the smaller missing share at most.
    """

    observables: tuple[str, str]
    first: tuple[Outcome, ...]
    second: tuple[Outcome, ...]
    forward: Array
    backward: Array
    distance: float
    missing: tuple[float, float] = (0.0, 0.0)


@dataclass
class Course:
    """A sequence of measurements as a tree: outcomes and states are computed when a branch is first taken, and kept."""

    model: Model
    spectrum: Spectrum
    start: Wave
    meters: tuple[Meter, ...]
    after: float = 0.0
    waves: dict[Branch, Wave] = field(default_factory=dict)
    known: dict[Branch, tuple[Outcome, ...]] = field(default_factory=dict)

    def outcomes(self, path: Branch) -> tuple[Outcome, ...]:
        """Return what the next measurement can give after the outcomes whose places are in `path`."""
        if path not in self.known:
            self.known[path] = tuple(self.meters[len(path)].outcomes(self.wave(path)))
        return self.known[path]

    def wave(self, path: Branch) -> Wave:
        """Return the state before the next measurement."""
        if not path:
            return self.start
        if path not in self.waves:
            before = path[:-1]
            found = self.meters[len(before)].collapsed(self.wave(before), self.outcomes(before)[path[-1]])
            self.waves[path] = evolved(self.model, self.spectrum, found, self.after, self._evaluate)
        return self.waves[path]

    @cached_property
    def _evaluate(self) -> KnownLevels | None:
        return None if self.spectrum.states is None else KnownLevels(self.spectrum.states)


def evolved(model: Model, spectrum: Spectrum, wave: Wave, time: float, known: KnownLevels | None = None) -> Wave:
    """Return the state a time later, from its amplitudes on the levels; the part they do not hold is left out."""
    if time == 0:
        return wave
    values = np.array([level.value for level in spectrum.levels])
    return level_wave(spectrum, amplitudes(spectrum, wave) * np.exp(-1j * (values - values[0]) * time / model.hbar), known)


def course_of(
    model: Model,
    spectrum: Spectrum,
    state: str,
    observables: Sequence[str],
    folder: Path | None = None,
    *,
    after: float = 0.0,
    bins: int = 24,
    width: float | None = None,
) -> Course:
    """Return a sequence of measurements of observables (names or expressions) on a state, made ready.

    `after` is a time of free evolution between two measurements, in the sheet's unit; `bins` and `width` rule how finely
    continuous observables are told apart. Raises SheetError for what is not known, PhysicsError for what cannot be measured.
    """
    wave = of_prepared(prepare(model, spectrum, state, folder))
    texts = list(dict.fromkeys(observables))
    least = ROUGH_LEVELS if any(cuts_sharply(model, text) for text in texts) else 16
    meters = {text: meter_for(model, spectrum, text, wave, bins=bins, width=width, least=least) for text in texts}
    carrier = spectrum if after == 0 or len(observables) < 2 else _carrier(model, spectrum, wave, meters, least)
    return Course(model, carrier, wave, tuple(meters[text] for text in observables), after)


def _carrier(model: Model, spectrum: Spectrum, wave: Wave, meters: dict[str, Meter], least: int) -> Spectrum:
    """Return the levels that carry a state through free evolution: those its energy is measured with, where it is."""
    for text, meter in meters.items():
        if isinstance(meter, LevelMeter) and text.strip() == model.main:
            return meter.spectrum
    return holding(model, spectrum, wave, None, least)


def measure(course: Course, state: str, seed: int, chosen: Sequence[float | None] = ()) -> Record:
    """Return one run: at each step the outcome nearest to the value chosen, or one drawn by its probability.

    The same seed gives the same record. Raises SheetError where more values are chosen than there are measurements, or none is
    possible.
    """
    if len(chosen) > len(course.meters):
        raise SheetError(f"{len(chosen)} outcomes are chosen for {len(course.meters)} measurements", mend="choose fewer")
    draws = np.random.default_rng(seed)
    branch: Branch = ()
    steps = []
    for number, meter in enumerate(course.meters):
        outcomes = course.outcomes(branch)
        if not outcomes:
            raise SheetError(f"no outcome of `{meter.text}` is among the levels computed", mend="ask for more with -n")
        wanted = chosen[number] if number < len(chosen) else None
        place = nearest_place(outcomes, wanted) if wanted is not None else drawn_place(outcomes, float(draws.random()))
        steps.append(Step(meter.text, meter.unit, outcomes, place, uncovered(outcomes)))
        branch = (*branch, place)
    return Record(state, tuple(steps), seed, tuple(_notes(course, steps)))


def nearest_place(outcomes: Sequence[Outcome], value: float) -> int:
    """Return the place of the outcome nearest to a value."""
    return min(range(len(outcomes)), key=lambda k: abs(outcomes[k].value - value))


def drawn_place(outcomes: Sequence[Outcome], number: float) -> int:
    """Return the place of an outcome for a random number in [0, 1), probabilities taken relative to those covered."""
    rising = np.cumsum([outcome.probability for outcome in outcomes])
    return int(min(np.searchsorted(rising, number * rising[-1], side="right"), len(outcomes) - 1))


def uncovered(outcomes: Sequence[Outcome]) -> float:
    """Return the probability that no outcome covers."""
    return max(0.0, 1.0 - math.fsum(outcome.probability for outcome in outcomes))


def _notes(course: Course, steps: Sequence[Step]) -> list[str]:
    """Return what the outcomes do not cover, and which levels are not what they seem."""
    notes = []
    for step, meter in zip(steps, course.meters, strict=True):
        if step.rest > LOST:
            notes.append(f"{step.rest:.3g} of the probability of `{step.observable}` lies beyond what was computed")
        if isinstance(meter, LevelMeter) and any(level.kind == "box" for level in meter.spectrum.levels):
            notes.append(f"outcomes of `{step.observable}` include box levels: only their sum over a range means something")
    return notes


def repeat(course: Course, runs: int, seed: int) -> tuple[Joint, ...]:
    """Return the joint results that came in `runs` repetitions of the whole sequence, with probabilities and counts.

    Runs are drawn together, branch by branch (multinomial), which gives the same distribution as one by one.
    """
    draws = np.random.default_rng(seed)
    alive: list[tuple[Branch, float, int]] = [((), 1.0, runs)]
    for _ in course.meters:
        after: list[tuple[Branch, float, int]] = []
        for branch, probability, count in alive:
            shares = np.array([outcome.probability for outcome in course.outcomes(branch)])
            counts = draws.multinomial(count, shares / shares.sum())
            after += [((*branch, place), probability * float(shares[place]), int(n)) for place, n in enumerate(counts) if n > 0]
        alive = after
    return tuple(Joint(_values(course, branch), probability, count) for branch, probability, count in alive)


def _values(course: Course, branch: Branch) -> tuple[float, ...]:
    return tuple(course.outcomes(branch[:k])[place].value for k, place in enumerate(branch))


def both_orders(course: Course) -> Orders:
    """Return the joint probabilities of the course's two measurements in the order given and in the other."""
    first, second = course.meters
    other = Course(course.model, course.spectrum, course.start, (second, first), course.after)
    forward, backward = _joint(course), {(b, a): p for (a, b), p in _joint(other).items()}
    rows, columns = (sorted({pair[k] for pair in (*forward, *backward)}, key=lambda o: o.value) for k in (0, 1))
    tables = [_table(joint, rows, columns) for joint in (forward, backward)]
    missing = (_missing(tables[0]), _missing(tables[1]))
    distance = float(np.abs(tables[0] - tables[1]).sum() + abs(missing[0] - missing[1])) / 2
    return Orders((first.text, second.text), tuple(rows), tuple(columns), tables[0], tables[1], distance, missing)


def _table(joint: dict[tuple[Outcome, Outcome], float], rows: Sequence[Outcome], columns: Sequence[Outcome]) -> Array:
    """Return joint probabilities as a matrix."""
    places = [{outcome: place for place, outcome in enumerate(side)} for side in (rows, columns)]
    table = np.zeros((len(rows), len(columns)))
    for (a, b), probability in joint.items():
        table[places[0][a], places[1][b]] = probability
    return table


def _missing(table: Array) -> float:
    return max(0.0, 1.0 - float(table.sum()))


def _joint(course: Course) -> dict[tuple[Outcome, Outcome], float]:
    """Return the probability of each pair of outcomes, outcomes named without their own probability."""
    found: dict[tuple[Outcome, Outcome], float] = {}
    for place, first in enumerate(course.outcomes(())):
        if first.probability < RARE:
            continue
        for second in course.outcomes((place,)):
            found[_bare(first), _bare(second)] = first.probability * second.probability
    return found


def _bare(outcome: Outcome) -> Outcome:
    return Outcome(outcome.value, 0.0, outcome.low, outcome.high, outcome.levels)
