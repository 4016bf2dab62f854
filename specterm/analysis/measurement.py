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
"""Probability that no outcome covers: told, and drawn as a result of its own, from here on; below it is left to rounding."""
ROUGH_LEVELS = 128
"""Levels taken at least where a state was cut sharply before."""
ROUGHLY = 1e-5
"""A value chosen is that of an outcome if it agrees with it to this share: nobody types all the digits."""
BEYOND = -1
"""The place of a result beyond what was computed, in a branch."""
Branch = tuple[int, ...]
"""The places of the outcomes taken so far."""


@dataclass(frozen=True)
class Step:
    """One measurement: what could come out, which outcome was taken (its place, or None), and the probability not covered.

    `beyond` says that the result drawn is none of the outcomes: it lies in the continuum or past the levels computed, and
    the state after it is not known.
    """

    observable: str
    unit: str
    outcomes: tuple[Outcome, ...]
    drawn: int | None
    rest: float
    beyond: bool = False


@dataclass(frozen=True)
class Record:
    """The steps of one run, the `seed` of its draws and notes on what limits it; a step beyond what was computed is the last.

    `observables` are all that were to be measured.
    """

    state: str
    steps: tuple[Step, ...]
    seed: int
    notes: tuple[str, ...]
    observables: tuple[str, ...] = ()


@dataclass(frozen=True)
class Joint:
    """One result of a whole sequence: a value for each step, its probability, and how often it came in the runs.

    A value is nan where the result lies beyond what was computed; the run ends there, so that all later ones are nan too.
    """

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
    """A sequence of measurements as a tree: outcomes and states are computed when a branch is first taken, and kept.

    `start` is the state before the first measurement, `after` the times of free evolution between one and the next.
    """

    model: Model
    spectrum: Spectrum
    start: Wave
    meters: tuple[Meter, ...]
    after: tuple[float, ...] = ()
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
            time = self.after[len(before)] if self.after else 0.0
            self.waves[path] = evolved(self.model, self.spectrum, found, time, self._evaluate)
        return self.waves[path]

    @cached_property
    def _evaluate(self) -> KnownLevels | None:
        return None if self.spectrum.states is None else KnownLevels(self.spectrum.states)


def evolved(model: Model, spectrum: Spectrum, wave: Wave, time: float, known: KnownLevels | None = None) -> Wave:
    """Return the state a time later, from its amplitudes on the levels.

    The part they do not hold is left out, and the norm is less by it: it is missing from whatever is measured next.
    """
    if time == 0:
        return wave
    values = np.array([level.value for level in spectrum.levels])
    held = amplitudes(spectrum, wave)
    size = min(1.0, float(np.linalg.norm(held)))
    return level_wave(spectrum, held * np.exp(-1j * (values - values[:1]) * time / model.hbar), known, size=size)


def course_of(
    model: Model,
    spectrum: Spectrum,
    state: str,
    observables: Sequence[str],
    folder: Path | None = None,
    *,
    after: float | Sequence[float] = 0.0,
    bins: int = 24,
    width: float | None = None,
) -> Course:
    """Return a sequence of measurements of observables (names or expressions) on a state, made ready.

    `after` is a time of free evolution between two measurements, or the times before each of them, the first too, in the
    sheet's unit; `bins` and `width` rule how finely continuous observables are told apart. Raises SheetError for what is not
    known, PhysicsError for what cannot be measured.
    """
    waits = _waits(after, len(observables))
    wave = of_prepared(prepare(model, spectrum, state, folder))
    texts = list(dict.fromkeys(observables))
    least = ROUGH_LEVELS if any(cuts_sharply(model, text) for text in texts) else 16
    if any(waits[:1]):
        spectrum = holding(model, spectrum, wave, None, least)
        wave = evolved(model, spectrum, wave, waits[0])
    meters = {text: meter_for(model, spectrum, text, wave, bins=bins, width=width, least=least) for text in texts}
    carrier = _carrier(model, spectrum, wave, meters, least) if any(waits[1:]) else spectrum
    return Course(model, carrier, wave, tuple(meters[text] for text in observables), waits[1:])


def _waits(after: float | Sequence[float], count: int) -> tuple[float, ...]:
    """Return the times before each of `count` measurements; SheetError where there are not as many."""
    if isinstance(after, (int, float)):
        return (0.0, *(float(after),) * (count - 1))[:count]
    waits = tuple(float(time) for time in after)
    if len(waits) != count:
        raise SheetError(f"{len(waits)} times are given for {count} measurements", mend="give one before each, 0 for none")
    return waits


def _carrier(model: Model, spectrum: Spectrum, wave: Wave, meters: dict[str, Meter], least: int) -> Spectrum:
    """Return the levels that carry a state through free evolution: those its energy is measured with, where it is."""
    for text, meter in meters.items():
        if isinstance(meter, LevelMeter) and text.strip() == model.main:
            return meter.spectrum
    return holding(model, spectrum, wave, None, least)


def measure(course: Course, state: str, seed: int, chosen: Sequence[float | None] = ()) -> Record:
    """Return one run: at each step the outcome nearest to the value chosen, or one drawn by its probability.

    A draw may fall beyond what was computed, with the probability that no outcome covers: the run ends there. The same seed
    gives the same record. Raises SheetError where more values are chosen than there are measurements, or none can be chosen.
    """
    if len(chosen) > len(course.meters):
        raise SheetError(f"{len(chosen)} outcomes are chosen for {len(course.meters)} measurements", mend="choose fewer")
    draws = np.random.default_rng(seed)
    branch: Branch = ()
    steps = []
    for number, meter in enumerate(course.meters):
        outcomes = course.outcomes(branch)
        wanted = chosen[number] if number < len(chosen) else None
        if not outcomes and wanted is not None:
            raise SheetError(f"no outcome of `{meter.text}` is among the levels computed", mend="ask for more with -n")
        place = nearest_place(outcomes, wanted) if wanted is not None else drawn_place(outcomes, float(draws.random()))
        steps.append(Step(meter.text, meter.unit, outcomes, place, uncovered(outcomes), beyond=place is None))
        if place is None:
            break
        branch = (*branch, place)
    return Record(state, tuple(steps), seed, tuple(_notes(course, steps, chosen)), tuple(meter.text for meter in course.meters))


def nearest_place(outcomes: Sequence[Outcome], value: float) -> int:
    """Return the place of the outcome nearest to a value."""
    return min(range(len(outcomes)), key=lambda k: abs(outcomes[k].value - value))


def drawn_place(outcomes: Sequence[Outcome], number: float) -> int | None:
    """Return the place of an outcome for a random number in [0, 1), None where it falls beyond what the outcomes cover."""
    place = int(np.searchsorted(np.cumsum(shares_of(outcomes))[:-1], number, side="right"))
    return place if place < len(outcomes) else None


def shares_of(outcomes: Sequence[Outcome]) -> Array:
    """Return the probabilities draws are made with, the last that of a result beyond what was computed; they sum to 1."""
    rest = uncovered(outcomes)
    shares = np.array([*(outcome.probability for outcome in outcomes), rest if rest > LOST else 0.0])
    found: Array = shares / shares.sum()
    return found


def uncovered(outcomes: Sequence[Outcome]) -> float:
    """Return the probability that no outcome covers."""
    return max(0.0, 1.0 - math.fsum(outcome.probability for outcome in outcomes))


def _held(outcome: Outcome, meter: Meter, value: float) -> bool:
    """Say whether an outcome is the one meant by a value: in its bin, or at its levels but for digits left out or errors."""
    slack = ROUGHLY * max(abs(outcome.low), abs(outcome.high)) if math.isfinite(outcome.low + outcome.high) else 0.0
    if isinstance(meter, LevelMeter):
        errors = [level.error or 0.0 for level in meter.spectrum.levels if level.index in outcome.levels]
        slack = max([slack, *errors])
    return outcome.low - slack <= value <= outcome.high + slack


def _notes(course: Course, steps: Sequence[Step], chosen: Sequence[float | None]) -> list[str]:
    """Return what the outcomes do not cover, which levels are not what they seem, and which choices were not to be had."""
    notes = []
    for number, (step, meter) in enumerate(zip(steps, course.meters, strict=False), start=1):
        if step.rest > LOST:
            notes.append(f"{step.rest:.3g} of the probability of `{step.observable}` lies beyond what was computed")
        if isinstance(meter, LevelMeter) and any(level.kind == "box" for level in meter.spectrum.levels):
            notes.append(f"outcomes of `{step.observable}` include box levels: only their sum over a range means something")
        wanted = chosen[number - 1] if number <= len(chosen) else None
        if wanted is not None and step.drawn is not None and not _held(step.outcomes[step.drawn], meter, wanted):
            nearest = f"{step.outcomes[step.drawn].value:.10g}"
            notes.append(f"no outcome of `{step.observable}` is {wanted:.10g}: the nearest one, {nearest}, was taken")
        if step.beyond:
            ends = f"the result of measurement {number} lies beyond what was computed"
            notes.append(f"{ends}: what follows cannot be told" if number < len(course.meters) else ends)
    return notes


def repeat(course: Course, runs: int, seed: int) -> tuple[Joint, ...]:
    """Return the joint results that came in `runs` repetitions of the whole sequence, with probabilities and counts.

    Runs are drawn together, branch by branch (multinomial), which gives the same distribution as one by one. A result beyond
    what was computed ends its runs.
    """
    draws = np.random.default_rng(seed)
    alive: list[tuple[Branch, float, int]] = [((), 1.0, runs)]
    for _ in course.meters:
        after: list[tuple[Branch, float, int]] = []
        for branch, probability, count in alive:
            if branch[-1:] == (BEYOND,):
                after.append((branch, probability, count))
                continue
            shares = shares_of(course.outcomes(branch))
            counts = draws.multinomial(count, shares)
            places = (*range(len(shares) - 1), BEYOND)
            after += [
                ((*branch, place), probability * float(share), int(n))
                for place, share, n in zip(places, shares, counts, strict=True)
                if n > 0
            ]
        alive = after
    return tuple(Joint(_values(course, branch), probability, count) for branch, probability, count in alive)


def _values(course: Course, branch: Branch) -> tuple[float, ...]:
    """Return the value at each step, nan from a result beyond what was computed on."""
    values = [math.nan if place == BEYOND else course.outcomes(branch[:k])[place].value for k, place in enumerate(branch)]
    return (*values, *[math.nan] * (len(course.meters) - len(values)))


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
