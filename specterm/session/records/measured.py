"""Measurements as data."""

from __future__ import annotations

import math
from typing import Any

from specterm.analysis.measurement import LOST, Joint, Orders, Step
from specterm.analysis.measurement import Record as Run
from specterm.analysis.meters import Outcome
from specterm.session.records.record import Record

_STEP = ("step", "observable", "value", "low", "high", "probability", "drawn")


def measured_record(run: Run, after: float, joints: tuple[Joint, ...], orders: Orders | None) -> Record:
    """Return one run as data, with the counts of many and both orders where there are; CSV holds the counts, else the steps."""
    data: dict[str, Any] = {
        "state": run.state,
        "seed": run.seed,
        "after": after,
        "steps": [step_data(step) for step in run.steps],
        "notes": list(run.notes),
    }
    if joints:
        data["runs"] = sum(joint.count for joint in joints)
        data["joint"] = [{"values": list(j.values), "probability": j.probability, "count": j.count} for j in joints]
    if orders:
        data["orders"] = {
            "observables": list(orders.observables),
            "values": [[outcome.value for outcome in side] for side in (orders.first, orders.second)],
            "forward": orders.forward.tolist(),
            "backward": orders.backward.tolist(),
            "distance": orders.distance,
            "missing": list(orders.missing),
        }
    if joints:
        heading = (*run.observables, "probability", "count")
        rows = [(*(_cell(value) for value in j.values), j.probability, j.count) for j in joints]
        return Record(data, heading, rows)
    rows = [row for number, step in enumerate(run.steps) for row in step_rows(number, step)]
    return Record(data, _STEP, rows)


def step_data(step: Step) -> dict[str, Any]:
    """Return one measurement as data."""
    return {
        "observable": step.observable,
        "unit": step.unit,
        "outcomes": [_outcome(outcome) for outcome in step.outcomes],
        "drawn": None if step.drawn is None else step.outcomes[step.drawn].value,
        "rest": step.rest,
        "beyond": step.beyond,
    }


def step_rows(number: int, step: Step) -> list[tuple[Any, ...]]:
    """Return the outcomes of one measurement as rows of a table; one without a value is what lies beyond them."""
    rows: list[tuple[Any, ...]] = [
        (number, step.observable, o.value, o.low, o.high, o.probability, int(place == step.drawn))
        for place, o in enumerate(step.outcomes)
    ]
    if step.rest > LOST:
        rows.append((number, step.observable, None, None, None, step.rest, int(step.beyond)))
    return rows


def _cell(value: float) -> float | None:
    return None if math.isnan(value) else value


def _outcome(outcome: Outcome) -> dict[str, Any]:
    return {
        "value": outcome.value,
        "probability": outcome.probability,
        "low": outcome.low,
        "high": outcome.high,
        "levels": list(outcome.levels),
    }
