"""The verb `measure`: a sequence of measurements, one run or many, and two of them in both orders."""

from __future__ import annotations

import argparse
import math
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, enough, expression_of, glyphs_of, least_for, model_of, status_of
from specterm.cli.source import Source
from specterm.errors import SheetError
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis.measurement import Joint, Orders, Record

BINS = 24


def measure(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `measure`."""
    import secrets  # noqa: PLC0415 - only where no seed is given

    from specterm.analysis.measurement import both_orders, course_of, repeat  # noqa: PLC0415 - heavy
    from specterm.analysis.measurement import measure as run  # noqa: PLC0415
    from specterm.session.records.measured import measured_record  # noqa: PLC0415

    model = model_of(arguments, source)
    spectrum = enough(arguments, model, least_for(model, arguments.state))
    course = course_of(
        model, spectrum, arguments.state, arguments.observables, source.folder, after=arguments.after,
        bins=arguments.bins or BINS, width=arguments.bin_width,
    )  # fmt: skip
    seed = arguments.seed if arguments.seed is not None else secrets.randbelow(10**6)
    record = run(course, arguments.state, seed, _chosen(arguments.choose))
    joints = repeat(course, arguments.runs, seed) if arguments.runs else ()
    pair = len(arguments.observables) == 2
    orders = both_orders(course) if pair and len(set(arguments.observables)) == 2 else None
    data = measured_record(record, arguments.after, joints, orders)
    return answered(
        arguments, data,
        lambda: _text(arguments, model, record, joints, orders), status_of(spectrum), (*spectrum.notes, *record.notes),
    )  # fmt: skip


def _chosen(text: str | None) -> list[float | None]:
    """Return the outcomes chosen, None where one is to be drawn."""
    if text is None:
        return []
    try:
        values = [None if part.strip() == "-" else float(part) for part in text.split(",")]
    except ValueError:
        values = [math.nan]
    if any(value is not None and not math.isfinite(value) for value in values):
        raise SheetError(f"--choose {text}: expected numbers or -, separated by commas", mend="for instance --choose 0.5,-")
    return values


def _text(arguments: argparse.Namespace, model: Model, record: Record, joints: tuple[Joint, ...], orders: Orders | None) -> str:
    """Return the record step by step, the counts of many runs, and the two orders beside each other."""
    from specterm.views.numbers import scale_of, short, with_unit  # noqa: PLC0415 - only text needs the views
    from specterm.views.outcome_table import joint_table, orders_text, step_table  # noqa: PLC0415

    glyphs = glyphs_of(arguments.glyphs)
    lines = [f"{record.state} on {expression_of(model)}   seed {record.seed}"]
    for number, step in enumerate(record.steps):
        if number and arguments.after:
            scale, unit = scale_of(model.units.time)
            lines.append(f"free evolution for {with_unit(short(scale * arguments.after), unit)}")
        lines += [f"{number + 1}. measure {step.observable}", step_table(step, glyphs=glyphs)]
    if joints:
        lines += [f"{arguments.runs} runs", joint_table(record.observables, joints, arguments.runs)]
    if orders:
        lines.append(orders_text(orders))
    return "\n".join(lines)
