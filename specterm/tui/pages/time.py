"""The page of time: survival, the mean of an observable, and the density at the cursor, of one state."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell, prepared_in
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded
from specterm.views.numbers import bracket, scale_of, short, with_unit

if TYPE_CHECKING:
    from specterm.analysis.evolution import Evolution, Packet
    from specterm.arrays import Array

PLACES = 241
MOST_NOTES = 3


@dataclass(frozen=True)
class Course:
    """Asks what becomes of a state at the times (None: about two of its periods), for an observable."""

    state: str
    times: tuple[float, float, int] | None
    observable: str | None

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> CourseFound:
        """Return survival, means and the packet itself."""
        from specterm.analysis.capture import captured_by  # noqa: PLC0415 - heavy
        from specterm.analysis.evolution import (  # noqa: PLC0415
            MOST_LEVELS,
            NEARLY_ALL,
            evolve,
            packet_of,
            places_of,
            usual_times,
        )

        model, folder = outcome.model, outcome.request.folder
        spectrum, weights = captured_by(
            model, self.state, NEARLY_ALL, folder, tolerance=outcome.request.tolerance, most=MOST_LEVELS,
            least=len(outcome.spectrum.levels) if outcome.spectrum else 1, should_stop=should_stop,
        )  # fmt: skip
        first, last, count = self.times or usual_times(model, weights)
        times = np.linspace(first, last, count)
        found = evolve(model, spectrum, self.state, times.tolist(), self.observable, folder)
        packet = packet_of(model, spectrum, weights)
        some = times[:: max(1, len(times) // 60)]
        places = places_of(packet, some, (spectrum.left, spectrum.right), PLACES, finer=8, least=1e-4)
        return CourseFound(found, packet, places)


@dataclass(frozen=True, eq=False)
class CourseFound:
    """An evolution with the packet behind it, and places (n,) that hold it at all the times."""

    evolution: Evolution
    packet: Packet
    places: Array


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Course | None:
    state = prepared_in(look, outcome)
    if state is None or outcome.spectrum is None or not outcome.spectrum.levels:
        return None
    return Course(state, look.choices.times, look.choices.observable)


def _rows(found: CourseFound, room: Room) -> Rows:
    """Return the line of the cursor's time over the curves."""
    from specterm.views.time_curve import density_curve, mean_curve, survival_curve  # noqa: PLC0415 - it brings the engine

    evolution = found.evolution
    place = min(room.look.choices.cursor, len(evolution.times) - 1)
    time = float(evolution.times[place])
    rows: list[Row] = [fit_row(((" " + words, style),), room.width) for words, style in _words(found, place, room.width)]
    density = np.abs(found.packet.wave(found.places, np.array([time]))[0]) ** 2
    left = room.height - len(rows)
    parts = 3 if left >= 27 else 2 if left >= 12 else 1
    heights = [left // parts] * parts
    heights[0] += left - sum(heights)
    (scale, unit), glyphs = scale_of(evolution.unit), room.glyphs
    times, time = scale * evolution.times, scale * time
    rows += survival_curve(times, evolution.survival, room.width, heights[0], unit=unit, glyphs=glyphs, at=time)
    if parts > 1:
        name, where = evolution.observable, with_unit(short(time, 5), unit)
        if parts > 2:
            rows += mean_curve(
                times, evolution.mean, evolution.spread, name, room.width, heights[1], unit=unit, glyphs=glyphs, at=time
            )
        across = room.units.coordinate + (f" ({room.units.length})" if room.units.length else "")
        rows += density_curve(
            found.places, density, across, room.width, heights[-1], glyphs=glyphs, title=f"density at {where}"
        )
    return padded(rows, room.width, room.height)


def _measured(text: str, unit: str) -> str:
    """Return a number with its unit; what is not known has none."""
    return "-" if text.strip() == "-" else with_unit(text.strip(), unit)


def _words(found: CourseFound, place: int, width: int) -> list[tuple[str, str]]:
    """Return what is known at the cursor, of the state as a whole, and notes."""
    from specterm.views.time_table import moment_texts, repeat_texts  # noqa: PLC0415 - it brings the engine

    e = found.evolution
    scale, unit = scale_of(e.unit)
    mean, spread, unit_shown = moment_texts(e, slice(place, place + 1))
    own = unit_shown if e.shown[0] != 1 else ""
    survival = bracket(float(e.survival[place]), float(e.survival_error[place]))
    here = [
        f"{e.state} at {with_unit(short(scale * float(e.times[place]), 6), unit)}", f"survival {survival}",
        f"<{e.observable}> {_measured(mean[0], own)}", f"spread {_measured(spread[0], own)}",
    ]  # fmt: skip
    whole = [f"captured {short(e.captured, 10)}", *repeat_texts(e)]
    notes = [line for note in e.notes for line in textwrap.wrap(note, max(10, width - 2))]
    return [("   ".join(here), "title"), ("   ".join(whole), "plain"), *((line, "warn") for line in notes[:MOST_NOTES])]


def _record(found: Any, _: Room) -> Record:  # noqa: ANN401 - an evolution
    from specterm.session.records.evolution import evolution_record  # noqa: PLC0415 - heavy

    return evolution_record(found.evolution)


TIME = Page(
    "time", _inquiry, _rows, _record, "no prepared state: add a line  state NAME = expression, or choose a level with S",
    keys=("page.along", "page.observable", "page.amount", "weights.state"),
)
