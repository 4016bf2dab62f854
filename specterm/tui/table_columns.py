"""The column of choice in the table of levels: derivatives by the parameter picked, or shifts from the pin beside."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from specterm.tui.numbers_of import numbers_of
from specterm.tui.pages.page import Answered, Inquiry
from specterm.tui.pages.slopes import Slopes
from specterm.tui.pinned import Moved
from specterm.tui.solving import Outcome
from specterm.views.level_table import Extra, aligned
from specterm.views.numbers import bracket, short

if TYPE_CHECKING:
    from specterm.tui.rows import Shown


SLOW = 0.1
"""Seconds of a solution from which on levels to first order stand in while the next one runs."""


def column_inquiry(shown: Shown, outcome: Outcome) -> Inquiry | None:
    """Return what the column asks for, None without a column."""
    if outcome.spectrum is None or not outcome.spectrum.levels:
        return None
    name = shown.look.parameter
    if shown.look.column == "slope" and name is not None and name in outcome.model.plain:
        return Slopes((name,))
    return Moved(shown.pinned) if shown.look.column == "shift" and shown.pinned is not None else None


def estimate_inquiry(shown: Shown, outcome: Outcome) -> Slopes | None:
    """Return the question whose answer tells the levels to first order, where a new solution takes long enough for that."""
    name = shown.look.parameter
    slow = outcome.spectrum is not None and outcome.spectrum.levels and outcome.spectrum.seconds > SLOW
    return Slopes((name,)) if slow and name is not None and name in outcome.model.plain else None


def estimate_of(shown: Shown, outcome: Outcome, text: str, answer: Answered | None) -> Extra | None:
    """Return the levels of `text` to first order in the number picked, marked as such; None where nothing is known of it."""
    from specterm.analysis.sensitivities import first_order  # noqa: PLC0415 - it brings the engine

    name = shown.look.parameter
    if name is None or answer is None or answer.error is not None or outcome.spectrum is None:
        return None
    then, now = numbers_of(outcome.request.text).get(name), numbers_of(text).get(name)
    if then is None or now is None or then.value == now.value:
        return None
    levels = np.array([level.value for level in outcome.spectrum.levels])
    values = first_order(levels, answer.result.slopes, name, now.value - then.value)
    texts = ["-" if np.isnan(value) else f"~{short(float(value), 7)}" for value in values]
    return Extra("to 1st order", aligned(texts))


def column_of(shown: Shown, outcome: Outcome, answer: Answered | None) -> Extra | None:
    """Return the column, with dots while its numbers are on their way."""
    heading = f"dE/d{shown.look.parameter}" if shown.look.column == "slope" else "shift"
    assert outcome.spectrum is not None
    count = len(outcome.spectrum.levels)
    if answer is None or answer.error is not None:
        return Extra(heading, ("..." if answer is None else "-",) * count)
    texts = _slopes(answer.result) if shown.look.column == "slope" else _shifts(answer.result, outcome)
    return Extra(heading, texts) if len(texts) == count else None


def _slopes(found: Any) -> tuple[str, ...]:  # noqa: ANN401 - SlopesFound
    from specterm.views.derivative_table import cell_text  # noqa: PLC0415 - it brings the engine

    pairs = zip(found.slopes.derivatives[:, 0].tolist(), found.slopes.errors[:, 0].tolist(), strict=True)
    return aligned([cell_text(value, error, 5) for value, error in pairs])


def _shifts(found: Any, outcome: Outcome) -> tuple[str, ...]:  # noqa: ANN401 - shifts
    """Return shifts with their errors, and the number a level had where it is another one now."""
    assert outcome.spectrum is not None
    texts = []
    for shift, level in zip(found, outcome.spectrum.levels, strict=True):
        if shift.shift is None:
            texts.append("new")
            continue
        value = "0" if shift.error is not None and abs(shift.shift) <= shift.error else bracket(shift.shift, shift.error)
        sign = "+" if value[0] not in "-~0" else ""
        was = "" if shift.before == level.index else f"was {shift.before} "
        texts.append(f"{was}{sign}{value}")
    return tuple(texts)
