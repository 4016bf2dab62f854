"""Measurements as tables: outcomes with bars, counts of many runs, and two orders beside each other."""

from __future__ import annotations

import math
from collections.abc import Sequence

from specterm.analysis.measurement import Joint, Orders, Step
from specterm.analysis.meters import Outcome
from specterm.views.numbers import short
from specterm.views.plain_table import text_columns
from specterm.views.weight_bars import bar

MOST_ROWS = 40
SMALL = 5e-5
"""Outcomes less probable than this are not printed, unless one is the one drawn; JSON and CSV have them all."""
BAR = 30
BEYOND = "beyond what was computed"


def outcome_text(outcome: Outcome) -> str:
    """Return the value of a level, or the bin it stands for."""
    if outcome.levels:
        levels = ",".join(str(level) for level in outcome.levels)
        return f"{short(outcome.value, 10)} (level {levels})"
    if outcome.low == outcome.high:
        return short(outcome.value, 10)
    return f"{short(outcome.low)} to {short(outcome.high)}"


def step_table(step: Step, *, glyphs: str = "braille", most: int = MOST_ROWS) -> str:
    """Return the outcomes of one measurement with their probabilities, at most `most` lines; `>` marks the one taken.

    One more line is for what lies beyond them, where that is anything to speak of.
    """
    shown = [place for place, o in enumerate(step.outcomes) if o.probability >= SMALL or place == step.drawn]
    if len(shown) > most:
        kept = sorted(shown, key=lambda place: -step.outcomes[place].probability)[: most - 1]
        shown = sorted({*kept, *([] if step.drawn is None else [step.drawn])})
    hidden = len(step.outcomes) - len(shown)
    rows = [
        [
            ">" if place == step.drawn else "",
            outcome_text(step.outcomes[place]),
            f"{step.outcomes[place].probability:.6f}",
            bar(step.outcomes[place].probability, BAR, glyphs).rstrip(),
        ]
        for place in shown
    ]
    if step.rest >= SMALL or step.beyond:
        mark = ">" if step.beyond else ""
        rows.append([mark, BEYOND, f"{step.rest:.6f}", bar(step.rest, BAR, glyphs).rstrip()])
    heading = f"outcome ({step.unit})" if step.unit else "outcome"
    table = text_columns(["", heading, "probability", ""], rows, left=frozenset({3}))
    return f"{table}\n  {hidden} less probable ones not shown" if hidden > 0 else table


def joint_table(names: Sequence[str], joints: Sequence[Joint], runs: int) -> str:
    """Return the results of many runs, the most frequent first, counts beside what the probabilities promise."""
    ranked = sorted(joints, key=lambda joint: -joint.count)
    rows = [
        [
            *_joint_cells(joint),
            str(joint.count),
            short(joint.probability * runs),
            f"{joint.probability:.6f}",
        ]
        for joint in ranked[:MOST_ROWS]
    ]
    table = text_columns([*names, "count", "expected", "probability"], rows)
    return f"{table}\n  {len(ranked) - MOST_ROWS} rarer ones not shown" if len(ranked) > MOST_ROWS else table


def _joint_cells(joint: Joint) -> list[str]:
    """Return the values of a joint result: the first that is none lies beyond what was computed, then the run has ended."""
    known = [short(value, 8) for value in joint.values if not math.isnan(value)]
    ended = len(joint.values) - len(known)
    return [*known, *["beyond"][:ended], *["-"] * (ended - 1)]


def orders_text(orders: Orders) -> str:
    """Return the joint probabilities that differ most between the two orders, and how far the orders differ in all."""
    a, b = orders.observables
    pairs = [(row, column) for row in range(len(orders.first)) for column in range(len(orders.second))]
    gaps = abs(orders.forward - orders.backward)
    ranked = sorted((pair for pair in pairs if gaps[pair] > SMALL), key=lambda pair: -gaps[pair])[:8]
    rows = [
        [
            outcome_text(orders.first[i]),
            outcome_text(orders.second[j]),
            f"{orders.forward[i, j]:.6f}",
            f"{orders.backward[i, j]:.6f}",
        ]
        for i, j in ranked
    ]
    head = f"{a} before {b} against {b} before {a}: half the sum of |differences| is {short(orders.distance)}"
    if max(orders.missing) > SMALL:
        head += f"\n  beyond what was computed, counted as one result: {' against '.join(short(m, 3) for m in orders.missing)}"
    return f"{head}\n{text_columns([a, b, f'{a} first', f'{b} first'], rows)}" if rows else head
