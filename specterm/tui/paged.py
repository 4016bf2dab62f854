"""What the keys of the pages do."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import replace
from math import isfinite
from typing import Any

from specterm.errors import SheetError, SpectermError
from specterm.tui.actions import Keyed
from specterm.tui.dialogs import Chooser, Entry
from specterm.tui.pages import NAMES, page_of
from specterm.tui.pages.fit import vary_from
from specterm.tui.pages.page import Answered, Bench, Room
from specterm.tui.solving import Outcome
from specterm.tui.work import Counted
from specterm.views.numbers import scale_of, short

MOST_ASIDE = 200
FASTEST = 5
"""Rows that one key scrolls."""


class Paged(Keyed):
    """The part of the app that answers the keys of pages; attributes are set by the app itself."""

    bench: Bench

    def action_page(self, name: str) -> None:
        """Show a page."""
        self._look(self.shown.look.turned(name))
        self.place(typing=self.typing)

    def action_turn(self, steps: int) -> None:
        """Show the next page, or the one before."""
        self.action_page(NAMES[(NAMES.index(self.shown.look.page) + steps) % len(NAMES)])

    def _choose(self, **changes: Any) -> None:  # noqa: ANN401 - any of the choices
        """Show the page with other choices."""
        self._look(self.shown.look.chose(**changes))

    def action_scroll(self, direction: int) -> None:
        """Scroll the table of the page."""
        self._choose(scroll=max(0, self.shown.look.choices.scroll + FASTEST * direction))

    def action_along(self, steps: int) -> None:
        """Move the cursor of the page, held at its ends; without a cursor, the columns of its table."""
        if self.shown.look.page in ("means", "matrix", "lines", "slopes"):
            self._choose(aside=min(max(0, self.shown.look.choices.aside + steps), MOST_ASIDE))
            return
        last = page_length(self.shown.answer or self.painter.complete().answer)
        self._choose(cursor=min(max(0, self.shown.look.choices.cursor + steps), max(0, last - 1)))

    # What is asked about

    def action_observable(self) -> None:
        """Choose the observable of the page."""
        if self.shown.look.page == "sweep":
            self._ask_quantity()
            return
        if self.shown.look.page == "fit":
            self._ask_vary()
            return
        words = "Dipole of the lines" if self.shown.look.page == "lines" else "Observable"
        self._ask_observable(words, lambda name: self._choose(observable=name, scroll=0))

    def action_second(self) -> None:
        """Choose a second observable; in the notebook both orders of the two are shown, or no more."""
        book = self.shown.look.page == "notebook"
        if book and self.shown.look.choices.orders:
            self._choose(orders=False)
            return
        self._ask_observable("Second observable", lambda name: self._choose(other=name, orders=book, runs=0))

    def _ask_observable(self, words: str, then: Callable[[str | None], None]) -> None:
        """Let the user choose an observable of the sheet, or write one."""
        outcome = self.shown.outcome
        if outcome is None or outcome.model is None or self.shown.look.page == NAMES[0]:
            self.say("pages 2 to 6 have an observable to choose", "warn")
            return
        from specterm.analysis.named import named_observables  # noqa: PLC0415 - heavy

        names = (*named_observables(outcome.model), f"{outcome.model.domain.coordinate}^2", "p^2")
        entries = [Entry(name, name, "") for name in dict.fromkeys(names)]

        def chosen(name: str | None) -> None:
            if name:
                then(name)

        self.ask(Chooser(f"{words}: choose, or type an expression", entries, free=True), chosen)

    def action_amount(self) -> None:
        """Ask for what the page ranges over."""
        page, choices = self.shown.look.page, self.shown.look.choices
        if page == "matrix":
            self._choose(logarithmic=not choices.logarithmic)
        elif page == "lines":
            unit = " (K)" if self._unit("energy") else ""
            self._ask_value(f"Temperature{unit}; nothing: none", choices.temperature, "temperature", every=True)
        elif page == "time":
            self._ask_times()
        elif page == "sweep":
            self._ask_sweep()
        else:
            self.say("pages 3, 4, 5 and 8 have a range to set", "warn")

    def action_breadth(self) -> None:
        """Ask for the broadening of lines, or the number of bins."""
        page, choices = self.shown.look.page, self.shown.look.choices
        if page == "lines":
            unit = self._unit("energy")
            words = "Full width of the lines at half height" + (f" ({unit})" if unit else "")
            self._ask_value(words, choices.broadening, "broadening")
        elif page == "notebook":
            self._ask_count("Number of bins of a continuous observable", choices.bins, lambda count: self._choose(bins=count))
        else:
            self.say("lines have a broadening, the notebook has bins", "warn")

    def _unit(self, which: str) -> str:
        """Return the name of a unit of the sheet."""
        outcome = self.shown.outcome
        return "" if outcome is None or outcome.model is None else str(getattr(outcome.model.units, which))

    def _ask_value(self, words: str, now: float | None, name: str, *, every: bool = False) -> None:
        """Ask for a positive number, or nothing, and take it as the choice called `name`."""

        def answered(text: str | None) -> None:
            if text is None:
                return
            value = number(text) if text else None
            if value is not None and not 0 < value < float("inf"):
                self.say(f"{text!r} does not do here: a number above 0 is wanted", "warn")
                return
            self._choose(**{name: value}, **({"every": value is not None} if every else {}))

        self.ask(Chooser(words, (), free=True, text="" if now is None else short(now, 12)), answered)

    def _ask_count(self, words: str, now: int, then: Callable[[int], None], most: int = 1_000) -> None:
        """Ask for a whole number from 1 to `most`."""

        def answered(text: str | None) -> None:
            if text is None:
                return
            if text.isascii() and text.isdigit() and len(text) < 10 and 1 <= int(text) <= most:
                then(int(text))
            else:
                self.say(f"{text!r} does not do here: a whole number from 1 to {most} is wanted", "warn")

        self.ask(Chooser(words, (), free=True, text=str(now) if now else ""), answered)

    def _ask_times(self) -> None:
        """Ask for a range of times."""
        now, (scale, unit) = self.shown.look.choices.times, scale_of(self._unit("time"))
        start = "" if now is None else f"{short(scale * now[0], 12)}:{short(scale * now[1], 12)}:{now[2]}"

        def answered(text: str | None) -> None:
            if text is None:
                return
            times = times_from(text) if text else None
            if text and times is None:
                self.say(f"write times as first:last:how many (2 to 5000), not {text!r}", "warn")
                return
            self._choose(times=times and (times[0] / scale, times[1] / scale, times[2]), cursor=0)

        words = "Times as first:last:how many" + (f" ({unit})" if unit else "") + "; nothing: two periods"
        self.ask(Chooser(words, (), free=True, text=start), answered)

    def _ask_sweep(self) -> None:
        """Ask for the range of a sweep; the number picked is proposed."""
        look, outcome = self.shown.look, self.shown.outcome
        start = " ".join(look.choices.sweep)
        if not start and outcome is not None and outcome.model is not None and look.parameter in outcome.model.plain:
            start = f"{look.parameter}="

        def answered(text: str | None) -> None:
            if text is None:
                return
            from specterm.analysis.sweep_request import axis_of  # noqa: PLC0415 - heavy

            try:
                ranges = tuple(text.split())
                for one in ranges:
                    axis_of(one)
                if len(ranges) > 2:
                    raise SheetError("a sweep has one or two ranges", mend="leave some out")
            except SpectermError as error:
                self.say(f"{error.message}; {error.mend}", "warn")
                return
            self._choose(sweep=ranges, cursor=0)

        self.ask(Chooser("Sweep NAME=first:last:how many; two of them make a map", (), free=True, text=start), answered)

    def _ask_quantity(self) -> None:
        """Ask what a sweep follows."""
        states = self.shown.outcome.states if self.shown.outcome else ()
        entries = [Entry("levels", "levels"), Entry("transitions", "transitions", "energies from the chosen level")]
        entries += [Entry("strengths", "strengths", "of the lines from the chosen level")]
        entries += [Entry(f"weights={name}", f"weights of {name}") for name in states]
        entries += [Entry("expectation", "expectation", "type expectation=OBSERVABLE")]

        def chosen(text: str | None) -> None:
            if text:
                self._choose(quantity=text)

        self.ask(Chooser("Against the parameter", entries, free=True), chosen)

    def action_every(self) -> None:
        """Show the lines from all levels, or from the chosen one."""
        if self.shown.look.page not in ("lines", "slopes", "fit"):
            self.say("pages 4 and 7 show lines from all levels, or from the chosen one", "warn")
            return
        self._choose(every=not self.shown.look.choices.every, scroll=0)

    def action_into(self) -> None:
        """Choose another sheet that the lines lead into, or the observed lines of a fit."""
        if self.shown.look.page == "fit":
            self._ask_observed()
            return
        if self.shown.look.page != "lines":
            self.say("page 4 shows lines into another sheet", "warn")
            return
        found = sorted(path.name for path in self.folder.glob("*.sheet"))[:500]
        entries = [Entry("", "none", "lines between the levels of this sheet"), *(Entry(name, name) for name in found)]

        def chosen(name: str | None) -> None:
            if name is not None:
                self._choose(into=os.path.expanduser(name) or None, observable=None, scroll=0)

        self.ask(Chooser("Lines into the levels of the sheet", entries, free=True), chosen)

    def _ask_observed(self) -> None:
        """Choose the file of observed lines."""
        found = sorted(path.name for path in self.folder.glob("*.csv"))[:500]

        def chosen(name: str | None) -> None:
            if name:
                self._choose(observed=os.path.expanduser(name), every=False, scroll=0)
                if not self.shown.look.choices.vary:
                    self._ask_vary()

        words = "Observed lines: a file with the columns from, to, value, uncertainty"
        self.ask(Chooser(words, [Entry(name, name) for name in found], free=True), chosen)

    def _ask_vary(self) -> None:
        """Ask which numbers a fit varies."""
        look = self.shown.look
        start = " ".join(_with_bounds(name, *bounds) for name, bounds in look.choices.vary) or look.parameter or ""

        def answered(text: str | None) -> None:
            if text is None:
                return
            try:
                self._choose(vary=vary_from(text), every=False, scroll=0)
            except SpectermError as error:
                self.say(f"{error.message}; {error.mend}", "warn")

        self.ask(Chooser("Numbers to vary, such as  F m=0.05:0.08", (), free=True, text=start), answered)

    def action_share(self) -> None:
        """Ask for a share of the state weighed, and compute as many levels as hold it."""
        outcome, state = self.shown.outcome, self.shown.look.state
        if outcome is None or outcome.spectrum is None or state is None:
            self.say("weigh a state first: s goes through those of the sheet", "warn")
            return

        def answered(text: str | None) -> None:
            if text is None:
                return
            share = number(text)
            if 0 < share < 1 and self.shown.outcome is outcome:
                self.say(f"looking for the levels that hold {text} of {state}; x stops it", "dim")
                self.work.share(outcome, state, share)
            else:
                self.say(f"{text!r} does not do here: a share between 0 and 1 is wanted, such as 0.999", "warn")

        self.ask(Chooser(f"Share of {state} that the levels are to hold", (), free=True, text="0.999"), answered)

    def on_counted(self, event: Counted) -> None:
        """Compute the levels that hold a share, now that their number is known."""
        if event.error is not None:
            self.say(f"{event.error.message}; {event.error.mend}", "warn")
            return
        self._look(replace(self.shown.look, count=event.count))
        self.say(f"{event.count} levels hold {short(event.captured, 8)} of {event.state}", "good")
        self.compute()

    # What leaves the screen

    def action_export(self) -> None:
        """Write a table or the states to a file."""
        outcome = self.shown.outcome
        if outcome is None or outcome.spectrum is None or not outcome.spectrum.levels:
            self.say("there is nothing to export", "warn")
            return
        shown = self.painter.complete()
        page = page_of(shown.look)
        entries = [Entry("levels", "levels", "the table: csv, json"), Entry("states", "states", "eigenstates: csv, npz")]
        if shown.look.state:
            entries.insert(1, Entry("weights", "weights", f"of {shown.look.state}: csv, json"))
        if page is not None and (page.alone or (shown.answer is not None and shown.answer.error is None)):
            entries.insert(0, Entry("page", page.name, "what the page shows: csv, json"))

        def chosen(what: str | None) -> None:
            if what is None:
                return
            if what == "page" and page is not None:
                room = Room(80, 24, shown.look, outcome.units, shown.bench)
                result = shown.answer.result if shown.answer is not None else None
                self.files.export(page.name, lambda: page.record(result, room))
            else:
                self.files.export(what, exporter(what, outcome, shown.look.state))

        self.ask(Chooser("Export", entries), chosen)


def exporter(what: str, outcome: Outcome, state: str | None) -> Callable[[], Any]:
    """Return what makes the data of an export when they are wanted."""

    def made() -> Any:  # noqa: ANN401 - a record, or states
        from specterm.session.records.levels import levels_record, weights_record  # noqa: PLC0415 - heavy
        from specterm.session.records.states import states_record  # noqa: PLC0415

        assert outcome.spectrum is not None
        if what == "levels":
            return levels_record(outcome.model, outcome.spectrum)
        if what == "states":
            return states_record(outcome.model, outcome.spectrum)
        from specterm.analysis import project  # noqa: PLC0415 - heavy

        return weights_record(project(outcome.model, outcome.spectrum, state or "", outcome.request.folder))

    return made


def _with_bounds(name: str, low: float, high: float) -> str:
    """Return a number to vary as it is typed."""
    ends = [short(end, 12) if isfinite(end) else "" for end in (low, high)]
    return f"{name}={ends[0]}:{ends[1]}" if any(ends) else name


def page_length(answer: Answered | None) -> int:
    """Return how many places the cursor of a page has."""
    result = answer.result if answer is not None else None
    evolution = getattr(result, "evolution", None)
    return len(evolution.times) if evolution is not None else len(getattr(result, "places", ()))


def number(text: str) -> float:
    """Return the number a text stands for, NaN for none."""
    try:
        return float(text)
    except ValueError:
        return float("nan")


def times_from(text: str) -> tuple[float, float, int] | None:
    """Return first, last and count from `0:20:201`, None where it is no such thing."""
    parts = text.split(":")
    if len(parts) != 3 or not parts[2].strip().isdecimal() or len(parts[2]) > 6:
        return None
    first, last, count = number(parts[0]), number(parts[1]), int(parts[2])
    return (first, last, count) if isfinite(first) and isfinite(last) and first != last and 2 <= count <= 5000 else None


