"""What the keys of the notebook do."""

from __future__ import annotations

import secrets
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from specterm.session.notebook import Entry as Line
from specterm.session.notebook import Notebook
from specterm.tui.dialogs import Chooser, Entry
from specterm.tui.paged import Paged, number
from specterm.tui.pages.page import prepared_in
from specterm.tui.solving import digest_of
from specterm.views.numbers import scale_of


class Booked(Paged):
    """The part of the app that measures."""

    waiting: Callable[[], None] | None = None

    def _next(self, then: Callable[[], None]) -> Any:  # noqa: ANN401 - what could come next
        """Return what the next measurement could give; None while it is not known, and `then` follows when it is."""
        self.waiting = None
        if self.shown.look.page != "notebook":
            self.action_page("notebook")
        shown = self.painter.complete()
        found = shown.answer.result if shown.answer is not None and shown.fresh else None
        if shown.answer is not None and shown.fresh and shown.answer.error is not None:
            self.say(shown.answer.error.message, "warn")
        elif found is None:
            self.waiting = then
            self.say("as soon as the outcomes are there", "dim")
        elif found.step is None:
            from specterm.tui.pages.notebook import LOST_STATE  # noqa: PLC0415 - it is loaded by now

            self.say(LOST_STATE, "warn")
            return None
        return found

    def on_answer(self) -> None:
        """Do what waited for the outcomes, where they are there."""
        then = self.waiting
        if then is not None and self.shown.look.page == "notebook" and self.painter.complete().fresh:
            then()

    def _note(self, *lines: Line) -> None:
        """Write lines into the notebook; a preparation comes first where there is none for this sheet."""
        book, outcome = self._seeded(), self.shown.outcome
        assert outcome is not None
        if not self.bench.chain(outcome) and lines[0].kind != "prepared":
            state = prepared_in(self.shown.look, outcome) or "level(0)"
            book = book.noted(self._prepared(state))
        for line in lines:
            book = book.noted(line)
        self._keep(book)

    def _seeded(self) -> Notebook:
        """Return the notebook, with a seed of its own from the first entry on unless one was set."""
        book = self.bench.notebook
        if not book.entries and book.seed == 0:
            book = replace(book, seed=secrets.randbelow(10**6))
            self.bench = replace(self.bench, notebook=book)
        return book

    def _prepared(self, state: str) -> Line:
        outcome = self.shown.outcome
        assert outcome is not None
        return Line("prepared", state, sheet=self.document.name, digest=digest_of(outcome.request))

    def _keep(self, book: Notebook) -> None:
        """Show another notebook."""
        self.bench = replace(self.bench, notebook=book)
        self._choose(runs=0, orders=False)

    def action_draw(self) -> None:
        """Measure: draw an outcome by its probability."""
        import numpy as np  # noqa: PLC0415 - loaded by now

        found = self._next(self.action_draw)
        if found is None:
            return
        from specterm.analysis.once import drawn  # noqa: PLC0415 - heavy

        book = self._seeded()
        draw = np.random.default_rng([book.seed, len(book.entries)]).random()
        self._measured(drawn(found.step, float(draw)), chosen=False)

    def _measured(self, step: Any, *, chosen: bool) -> None:  # noqa: ANN401 - a step
        """Write a measurement down; one beyond what was computed has no value."""
        if step.drawn is None:
            self._note(Line("measured", step.observable, probability=step.rest, unit=step.unit, chosen=chosen))
        else:
            outcome = step.outcomes[step.drawn]
            self._note(
                Line(
                    "measured", step.observable, outcome.value, outcome.low, outcome.high, outcome.probability, step.unit,
                    outcome.levels, chosen,
                )
            )  # fmt: skip
        last = self.bench.notebook.entries[-1]
        from specterm.tui.pages.notebook import entry_words  # noqa: PLC0415 - it is loaded by now

        self.say(entry_words(last), "good" if step.drawn is not None else "warn")

    def action_choose(self) -> None:
        """Measure: choose the outcome."""
        found = self._next(self.action_choose)
        if found is None:
            return
        if not found.step.outcomes:
            self.say(f"no outcome of {found.step.observable} is among what was computed: there is none to choose", "warn")
            return
        from specterm.analysis.once import chosen as taken  # noqa: PLC0415 - heavy
        from specterm.views.outcome_table import outcome_text  # noqa: PLC0415

        entries = [
            Entry(str(place), outcome_text(one), f"probability {one.probability:.6f}")
            for place, one in enumerate(found.step.outcomes)
        ]

        def answered(place: str | None) -> None:
            if place is not None:
                self._measured(taken(found.step, found.step.outcomes[int(place)].value), chosen=True)

        self.ask(Chooser(f"Outcome of {found.step.observable}", entries), answered)

    def action_wait(self) -> None:
        """Let time pass."""
        if self.shown.outcome is None or self.shown.outcome.spectrum is None:
            self.say("there is no state yet", "warn")
            return
        from specterm.tui.pages.notebook import LOST_STATE, ended  # noqa: PLC0415 - it is loaded by now

        if ended(self.bench.chain(self.shown.outcome)):
            self.say(LOST_STATE, "warn")
            return
        scale, unit = scale_of(self._unit("time"))

        def answered(text: str | None) -> None:
            if text is None:
                return
            time = number(text)
            if abs(time) < float("inf") and time != 0:
                self._note(Line("waited", "", value=time / scale, unit=self._unit("time")))
                self.action_page("notebook")
            else:
                self.say(f"{text!r} does not do here: a time other than 0 is wanted", "warn")

        self.ask(Chooser("Free evolution for a time of" + (f" ({unit})" if unit else ""), (), free=True), answered)

    def action_prepare(self) -> None:
        """Prepare a state anew."""
        outcome = self.shown.outcome
        if outcome is None or outcome.spectrum is None or not outcome.spectrum.levels:
            self.say("there is no state to prepare", "warn")
            return
        entries = [Entry(name, name, "a state of the sheet") for name in outcome.states]
        entries += [Entry(f"level({level.index})", f"level({level.index})") for level in outcome.spectrum.levels]

        def answered(name: str | None) -> None:
            if name is not None:
                self._note(self._prepared(name))
                self.action_page("notebook")

        self.ask(Chooser("Prepare", entries), answered)

    def action_runs(self) -> None:
        """Count the results of many repetitions."""
        outcome = self.shown.outcome
        if outcome is None or not any(entry.kind == "measured" for entry in self.bench.chain(outcome)):
            self.say("measure something first (c): the runs repeat what was measured since the preparation", "warn")
            return
        self.action_page("notebook")
        self._ask_count("How many runs", 1000, lambda count: self._choose(runs=count, orders=False), 10_000_000)

    def action_undo_entry(self) -> None:
        """Take back the last entry."""
        book = self.bench.notebook
        if not book.entries:
            self.say("the notebook is empty", "warn")
            return
        self._keep(book.undone())
        self.say("taken back: the last entry of the notebook")

    def action_seed(self) -> None:
        """Set the seed of the draws to come."""
        self._ask_count(
            "Seed of the draws", self.bench.notebook.seed,
            lambda seed: self._keep(replace(self.bench.notebook, seed=seed)), 999_999_999,
        )  # fmt: skip
