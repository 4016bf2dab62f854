"""What the keys of parameters and pins do."""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal
from typing import TYPE_CHECKING

from specterm.session.pins import MOST, Pin, renamed, unused_name
from specterm.tui.booked import Booked
from specterm.tui.dialogs import Chooser, Entry, Question
from specterm.tui.numbers_of import numbers_of
from specterm.tui.pages.sweep import There
from specterm.tui.pinned import Pinned
from specterm.tui.rows import Shown
from specterm.tui.solving import Outcome, Request
from specterm.tui.work import PinSolved
from specterm.views.numbers import short, with_unit

if TYPE_CHECKING:
    from specterm.language.edits import NumberPlace

_FINENESS = 12
"""Powers of ten a step may be away from the last digit written."""


class Tuned(Booked):
    """The part of the app that nudges numbers and keeps pins."""

    pins: tuple[Pinned, ...]

    # Numbers of the sheet

    def _numbers(self) -> dict[str, NumberPlace]:
        """Return the plain numbers of the text as it stands, none where it cannot be read."""
        return numbers_of(self.document.text)

    def action_pick(self) -> None:
        """Pick the number that the nudging keys change."""
        known = self._numbers()
        if not known:
            unread = self.error is not None and self.error.span is not None
            words = "the sheet cannot be read: mend it first" if unread else "no plain number such as  F = 20 [kV/cm]  to nudge"
            self.say(words, "warn")
            return
        entries = [Entry(name, name, _written(place)) for name, place in known.items()]

        def chosen(name: str | None) -> None:
            if name is not None:
                self._look(replace(self.shown.look, parameter=name, fineness=0))
                self._tell(name)

        self.ask(Chooser("Number to nudge", entries), chosen)

    def _tell(self, name: str) -> None:
        """Show what is picked where it stands in the sheet."""
        place = self._numbers().get(name)
        if place is not None:
            self.sheet.text.point(place.span)
        self.say("")

    def tuned_words(self) -> str:
        """Return what number is picked, its value and its step, "" where none is; first of all, that nothing can be kept."""
        name, warning = self.shown.look.parameter, "NOT KEPT for a crash  " if self.keeping.failing else ""
        place = self._numbers().get(name) if name is not None else None
        if place is None:
            return warning.rstrip()
        from specterm.language.edits import step_of  # noqa: PLC0415 - it is loaded by now

        step = step_of(place.text).scaleb(self.shown.look.fineness).normalize()
        return f"{warning}{name} = {_written(place)}, step {step:f}"

    def action_nudge(self, direction: int) -> None:
        """Change the number picked by one step, in its place in the sheet."""
        from specterm.language.edits import number_text, step_of  # noqa: PLC0415 - it is loaded by now

        known, name = self._numbers(), self.shown.look.parameter
        if name is None or name not in known:
            self.action_pick()
            return
        place = known[name]
        exact = Decimal(place.text.replace("−", "-").replace(" ", ""))
        step = step_of(place.text).scaleb(self.shown.look.fineness)
        self._put(place, number_text(exact + (-direction if place.flipped else direction) * step, place.text))
        self._tell(name)

    def _put(self, place: NumberPlace, text: str) -> None:
        """Write a number into the sheet, as an edit that can be undone, and compute at once."""
        self.sheet.text.put(place.span, text)
        self.take_typed()
        self.compute()

    def action_fineness(self, direction: int) -> None:
        """Make the step ten times coarser or finer."""
        look = self.shown.look
        if look.parameter is None:
            self.action_pick()
            return
        self._look(replace(look, fineness=min(max(look.fineness + direction, -_FINENESS), _FINENESS)))
        self._tell(look.parameter)

    def action_take_value(self) -> None:
        """Write the value at the sweep's cursor, or the numbers fitted, into the sheet."""
        shown = self.painter.complete()
        if self.shown.look.page == "fit":
            self._take_fit(shown)
            return
        inquiry = shown.also.inquiry if shown.also is not None else None
        known = self._numbers()
        if not isinstance(inquiry, There) or inquiry.name not in known:
            self.say("page 8 has a cursor whose value can be taken, once a number of the sheet is swept", "warn")
            return
        from specterm.language.edits import number_text  # noqa: PLC0415 - it is loaded by now

        place = known[inquiry.name]
        self._put(place, number_text(-inquiry.value if place.flipped else inquiry.value, place.text))
        self.say(f"{inquiry.name} = {short(inquiry.value, 12)} is in the sheet now; u takes it back", "good")

    def _take_fit(self, shown: Shown) -> None:
        """Write the numbers fitted into the sheet, as an edit that can be undone."""
        fit = getattr(shown.answer.result, "fit", None) if shown.answer is not None and shown.fresh else None
        if fit is None:
            self.say("there is no fit to take", "warn")
            return
        from specterm.analysis.fitting import fitted_text  # noqa: PLC0415 - it is loaded by now

        self.take_text(fitted_text(self.document.text, fit))
        self.take_typed()
        self.compute()
        self.say("the numbers fitted are in the sheet now; u takes them back", "good")

    # Pins

    def action_pin(self) -> None:
        """Keep the spectrum shown, to stand beside those to come."""
        outcome = self.shown.outcome
        if outcome is None or outcome.spectrum is None or not outcome.spectrum.levels:
            self.say("there is no spectrum to pin", "warn")
            return
        if len(self.pins) >= MOST:
            self.say(f"there are {MOST} pins already: drop one with B", "warn")
            return
        asked, known = outcome.request, self._numbers()
        name = self.shown.look.parameter
        wanted = f"{name} = {_written(known[name])}" if name in known and name is not None else self.document.name
        label = unused_name([one.pin for one in self.pins], wanted)
        pin = Pin(label, asked.text, asked.folder, asked.count, asked.near, asked.tolerance)
        self._with_pins((*self.pins, Pinned(pin, outcome)), len(self.pins))
        self.say(f"pinned as {label}; it stands beside from now on (B: all pins)", "good")

    def _with_pins(self, pins: tuple[Pinned, ...], beside: int | None) -> None:
        """Show other pins, the one at place `beside` beside the present spectrum."""
        self.pins = pins
        pinned = pins[beside] if beside is not None and pins else None
        column = "shift" if pinned is not None else ("none" if self.shown.look.column == "shift" else self.shown.look.column)
        self.shown = replace(self.shown, pinned=pinned)
        self._look(replace(self.shown.look, column=column))

    def restore_pins(self, pins: tuple[Pin, ...]) -> None:
        """Take up pins of an earlier session; their spectra are computed one by one."""
        self.pins = tuple(
            Pinned(pin, Outcome(Request(0, pin.text, pin.folder, pin.count, pin.near, pin.tolerance))) for pin in pins
        )
        for pin in pins:
            self.work.pin(pin)

    def on_pin_solved(self, event: PinSolved) -> None:
        """Take the spectrum of a pin that has been taken up again."""
        self.pins = tuple(replace(one, outcome=event.outcome) if one.pin == event.pin else one for one in self.pins)
        self.shown = replace(self.shown, pinned=self.pins[-1] if self.pins else None)
        self.redraw()

    def action_pins(self) -> None:
        """Choose a pin, and what to do with it."""
        if not self.pins:
            self.say("nothing is pinned: P pins the spectrum shown", "warn")
            return
        entries = [
            Entry(str(place), one.pin.name, f"{len(one.outcome.spectrum.levels)} levels" if one.outcome.spectrum else "")
            for place, one in enumerate(self.pins)
        ]

        def chosen(answer: str | None) -> None:
            if answer == "none":
                self._with_pins(self.pins, None)
            elif answer is not None:
                self._with_pin(int(answer))

        self.ask(Chooser("Pins", [*entries, Entry("none", "none", "nothing beside the present spectrum")]), chosen)

    def _with_pin(self, place: int) -> None:
        """Ask what to do with the pin at a place."""
        one = self.pins[place]
        answers = {
            "b": "stand it beside", "s": "swap: it becomes the sheet, the present one a pin", "r": "rename", "d": "drop it",
            "n": "nothing",
        }  # fmt: skip

        def answered(letter: str | None) -> None:
            if letter == "b":
                self._with_pins(self.pins, place)
            elif letter == "d":
                self._with_pins((*self.pins[:place], *self.pins[place + 1 :]), None)
            elif letter == "s":
                self._swap(place)
            elif letter == "r":
                self.ask(Chooser("Name of the pin", (), free=True, text=one.pin.name), lambda name: self._rename(place, name))

        self.ask(Question(f"Pin {one.pin.name}", answers), answered)

    def _rename(self, place: int, name: str | None) -> None:
        """Give a pin another name."""
        if name:
            names = renamed(tuple(one.pin for one in self.pins), place, name)
            pins = tuple(replace(one, pin=pin) for one, pin in zip(self.pins, names, strict=True))
            self._with_pins(pins, place)

    def _swap(self, place: int) -> None:
        """Make a pin the sheet, as an edit that can be undone, and the present sheet a pin in its place."""
        outcome, one = self.shown.outcome, self.pins[place]
        if outcome is None or outcome.spectrum is None:
            return
        asked = outcome.request
        pin = Pin(f"before {one.pin.name}"[:80], asked.text, asked.folder, asked.count, asked.near, asked.tolerance)
        self._with_pins((*self.pins[:place], Pinned(pin, outcome), *self.pins[place + 1 :]), place)
        self.take_text(one.pin.text)
        self.take_typed()
        self._look(replace(self.shown.look, count=one.pin.count))
        self.compute()

    def action_column(self) -> None:
        """Show the next column of choice in the table of levels."""
        self._look(self.shown.look.next_column())
        look = self.shown.look
        if look.column == "slope" and look.parameter is None:
            self.say("column: derivatives by a number of the sheet; p picks it", "warn")
        elif look.column == "shift" and self.shown.pinned is None:
            self.say("column: shifts from a pin; P pins the spectrum shown", "warn")
        else:
            self.say(f"column: {look.column}")


def _written(place: NumberPlace) -> str:
    """Return a number as the sheet has it."""
    return with_unit(place.text, f"[{place.unit}]" if place.unit else "")
