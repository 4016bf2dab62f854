"""One measurement at a time: what could come out now, and the state after a result or after a time."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from specterm.analysis.measured_wave import Wave, of_prepared
from specterm.analysis.measurement import ROUGH_LEVELS, Step, drawn_place, evolved, nearest_place, uncovered
from specterm.analysis.meters import AxisMeter, Meter, holding, meter_for
from specterm.analysis.prepared import prepare
from specterm.errors import SheetError
from specterm.model import Model
from specterm.spectrum import Spectrum

SMOOTH_LEVELS = 16
"""Levels taken at least where a state was not cut sharply before."""


def fresh_wave(model: Model, spectrum: Spectrum, state: str, folder: Path | None = None) -> Wave:
    """Return a prepared state, or `level(n)`, ready to be measured; raises SheetError where it is not known."""
    return of_prepared(prepare(model, spectrum, state, folder))


def possible(
    model: Model, spectrum: Spectrum, wave: Wave, text: str, *, rough: bool = False, bins: int = 24, width: float | None = None
) -> tuple[Meter, Step]:
    """Return the meter of an observable and what it could give now, nothing drawn.

    `rough` says that the state was cut sharply before; `bins` and `width` rule how finely continuous observables are told
    apart. Raises SheetError for what is not known, PhysicsError for what cannot be measured.
    """
    least = ROUGH_LEVELS if rough else SMOOTH_LEVELS
    meter = meter_for(model, spectrum, text, wave, bins=bins, width=width, least=least)
    outcomes = tuple(meter.outcomes(wave))
    return meter, Step(meter.text, meter.unit, outcomes, None, uncovered(outcomes))


def drawn(step: Step, number: float) -> Step:
    """Return the step with the outcome that a random number in [0, 1) falls on.

    Where it falls beyond what was computed, `drawn` is None and `beyond` is said: the state after it is not known.
    """
    place = drawn_place(step.outcomes, number)
    return replace(step, drawn=place, beyond=place is None)


def chosen(step: Step, value: float) -> Step:
    """Return the step with the outcome nearest to a value."""
    return replace(step, drawn=nearest_place(step.outcomes, value))


def after(meter: Meter, wave: Wave, step: Step) -> Wave:
    """Return the state after the outcome taken, projected and normalised; SheetError after one beyond what was computed."""
    if step.beyond:
        raise SheetError("the state after a result beyond what was computed is not known", mend="prepare a state anew")
    return wave if step.drawn is None else meter.collapsed(wave, step.outcomes[step.drawn])


def waited(model: Model, spectrum: Spectrum, wave: Wave, time: float, *, rough: bool = False) -> Wave:
    """Return the state a time later, on as many levels as hold nearly all of it."""
    carrier = holding(model, spectrum, wave, None, ROUGH_LEVELS if rough else SMOOTH_LEVELS)
    return evolved(model, carrier, wave, time)


def sharp(meter: Meter) -> bool:
    """Say whether a result of this meter cuts the state sharply."""
    return isinstance(meter, AxisMeter)
