"""The page of the notebook: what was measured, what the next measurement could give, repeated runs, both orders of two."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from specterm.session.notebook import Entry, Notebook
from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell, prepared_in
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, text_rows
from specterm.views.numbers import scale_of, short, with_unit

if TYPE_CHECKING:
    from specterm.analysis.measured_wave import Wave
    from specterm.analysis.measurement import Joint, Orders, Step
    from specterm.analysis.meters import Meter


@dataclass(frozen=True)
class Next:
    """Asks what a measurement could give after all that is in the notebook since the last preparation.

    `state` is prepared where the notebook has nothing yet. With `other`, both orders of two measurements; with `runs`, counts
    of so many repetitions of all that was measured.
    """

    chain: tuple[Entry, ...]
    state: str
    observable: str
    other: str | None
    runs: int
    bins: int
    seed: int
    waves: dict[Any, Any] = field(compare=False, hash=False, repr=False)

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> NextFound:
        """Return what could come out now."""
        from specterm.analysis.measurement import both_orders, repeat  # noqa: PLC0415 - heavy

        texts = tuple(entry.text for entry in self.chain if entry.kind == "measured")
        joints = repeat(self._course(outcome, texts), self.runs, self.seed) if self.runs and texts else ()
        orders = both_orders(self._course(outcome, (self.observable, self.other))) if self.other else None
        if ended(self.chain):
            return NextFound(None, orders, joints, texts)
        wave, meters = self._replayed(outcome, should_stop)
        return NextFound(self._possible(outcome, self.observable, wave, meters)[1], orders, joints, texts)

    def _possible(self, outcome: Outcome, text: str, wave: Wave, meters: dict[str, Meter]) -> tuple[Meter, Step]:
        """Return meter and outcomes; an observable measured before in this chain keeps its bins."""
        from specterm.analysis.measurement import Step as Made  # noqa: PLC0415 - heavy
        from specterm.analysis.measurement import uncovered  # noqa: PLC0415
        from specterm.analysis.once import possible, sharp  # noqa: PLC0415

        assert outcome.spectrum is not None
        known = meters.get(text)
        if known is not None and sharp(known):
            outcomes = tuple(known.outcomes(wave))
            return known, Made(known.text, known.unit, outcomes, None, uncovered(outcomes))
        rough = any(sharp(meter) for meter in meters.values())
        return possible(outcome.model, outcome.spectrum, wave, text, rough=rough, bins=self.bins)

    def _replayed(self, outcome: Outcome, should_stop: Stop) -> tuple[Wave, dict[str, Meter]]:
        """Return the state after the chain and the meters used in it; what was replayed before is remembered."""
        from specterm.analysis.once import after, chosen, fresh_wave, sharp, waited  # noqa: PLC0415 - heavy
        from specterm.errors import WorkStopped  # noqa: PLC0415

        model, spectrum = outcome.model, outcome.spectrum
        assert spectrum is not None
        state = self.chain[0].text if self.chain else self.state
        meters: dict[str, Meter] = {}
        wave: Wave = fresh_wave(model, spectrum, state, outcome.request.folder)
        for length in range(2, len(self.chain) + 1):
            key, entry = (self.chain[:length], self.bins), self.chain[length - 1]
            if should_stop():
                raise WorkStopped("stopped")
            if key not in self.waves:
                if entry.kind == "waited":
                    rough = any(sharp(meter) for meter in meters.values())
                    self.waves[key] = waited(model, spectrum, wave, entry.value, rough=rough), None
                else:
                    meter, step = self._possible(outcome, entry.text, wave, meters)
                    self.waves[key] = after(meter, wave, chosen(step, entry.value)), meter
            wave, used = self.waves[key]
            if used is not None:
                meters = {**meters, entry.text: used}
        return wave, meters

    def _course(self, outcome: Outcome, texts: tuple[Any, ...]) -> Any:  # noqa: ANN401 - a course
        """Return the sequence of measurements from the preparation on."""
        from specterm.analysis.measurement import course_of  # noqa: PLC0415 - heavy

        assert outcome.spectrum is not None
        state = self.chain[0].text if self.chain else self.state
        waits = waits_of(self.chain, len(texts))
        return course_of(outcome.model, outcome.spectrum, state, texts, outcome.request.folder, after=waits, bins=self.bins)


def waits_of(chain: tuple[Entry, ...], count: int) -> tuple[float, ...]:
    """Return the time waited before each of the first `count` measurements of a chain, 0 where it says nothing."""
    waits = [0.0] * count
    place = 0
    for entry in chain:
        if entry.kind == "measured":
            place += 1
        elif entry.kind == "waited" and place < count:
            waits[place] += entry.value
    return tuple(waits)


LOST_STATE = "the last result lies beyond what was computed: prepare a state anew with N"


def ended(chain: tuple[Entry, ...]) -> bool:
    """Say whether a measurement of the chain gave a result beyond what was computed: the state is not known from then on."""
    return any(entry.kind == "measured" and math.isnan(entry.value) for entry in chain)


@dataclass(frozen=True, eq=False)
class NextFound:
    """What could come out now, both orders of two, joint results of many runs of `texts`.

    `step` is None after a result beyond what was computed.
    """

    step: Step | None
    orders: Orders | None
    joints: tuple[Joint, ...]
    texts: tuple[str, ...]


def _inquiry(look: Look, outcome: Outcome, bench: Bench) -> Next | None:
    state = prepared_in(look, outcome) or "level(0)"
    if outcome.spectrum is None or not outcome.spectrum.levels:
        return None
    choices, book = look.choices, bench.notebook
    other = choices.other if choices.orders and choices.other != _observable(look, outcome) else None
    asked = (_observable(look, outcome), other, choices.runs, choices.bins)
    return Next(bench.chain(outcome), state, *asked, book.seed, bench.waves)


def _observable(look: Look, outcome: Outcome) -> str:
    return look.choices.observable or outcome.model.main


def entry_words(entry: Entry) -> str:
    """Return one line of the notebook."""
    if entry.kind == "prepared":
        return f"prepared {entry.text}" + (f" of {entry.sheet}" if entry.sheet else "")
    if entry.kind == "waited":
        scale, unit = scale_of(entry.unit)
        return f"waited {with_unit(short(scale * entry.value), unit)}"
    if math.isnan(entry.value):
        value = "beyond what was computed"
    elif entry.levels:
        value = with_unit(short(entry.value, 10), entry.unit) + f" (level {','.join(str(level) for level in entry.levels)})"
    elif entry.low < entry.high:
        value = with_unit(f"{short(entry.low)} to {short(entry.high)}", entry.unit)
    else:
        value = with_unit(short(entry.value, 10), entry.unit)
    how = "chosen" if entry.chosen else "drawn"
    return f"measured {entry.text}: {value}, {how}, probability {short(entry.probability, 4)}"


def _rows(found: NextFound | None, room: Room) -> Rows:
    """Return the notebook over what could come next."""
    book = room.bench.notebook
    lines: list[Row] = _entries(book, room, max(2, room.height // 3 if found else room.height))
    if found is None:
        return padded(lines, room.width, room.height)
    from specterm.views.outcome_table import joint_table, orders_text, step_table  # noqa: PLC0415 - it brings the engine

    rest = room.height - len(lines)
    if found.joints:
        total = sum(joint.count for joint in found.joints)
        blocks = [f"{total} runs of {', '.join(found.texts)}", joint_table(found.texts, found.joints, total)]
    elif found.orders:
        blocks = [f"{found.orders.observables[0]} and {found.orders.observables[1]} in both orders", orders_text(found.orders)]
    elif found.step is None:
        blocks = [LOST_STATE]
    else:
        most = max(1, rest - 4)
        blocks = [f"next: {found.step.observable} could give", step_table(found.step, glyphs=room.glyphs, most=most)]
    lines.append(fit_row(((" " + blocks[0], "title"),), room.width))
    for block in blocks[1:]:
        lines += text_rows(block, room.width, glyphs=room.glyphs)
    return padded(lines, room.width, room.height)


def _entries(book: Notebook, room: Room, most: int) -> list[Row]:
    """Return the last entries of the notebook, at most `most` lines with the heading."""
    count = len(book.entries)
    first = max(0, count - (most - 1))
    seen = f", the last {count - first} of {count}" if first else ""
    seed = f", seed {book.seed}" if count else ""
    rows: list[Row] = [fit_row(((f" notebook{seed}{seen}", "title"),), room.width)]
    alive = len(book.entries) - len(book.chain)
    if not count:
        rows.append(fit_row(((" nothing measured yet: c draws an outcome, C chooses one", "dim"),), room.width))
    for place in range(first, count):
        words = f" {place + 1:>3}  {entry_words(book.entries[place])}"
        rows.append(fit_row(((words, "plain" if place >= alive else "dim"),), room.width))
    return rows


def _record(_: Any, room: Room) -> Record | None:  # noqa: ANN401 - what could come next is not exported
    return room.bench.notebook.record()


NOTEBOOK = Page(
    "notebook", _inquiry, _rows, _record, "no level: there is nothing to measure", alone=True,
    keys=("book.draw", "book.choose", "page.observable", "book.wait", "book.undo", "book.prepare", "page.second", "book.runs"),
)
