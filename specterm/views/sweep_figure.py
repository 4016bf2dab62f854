"""A sweep as a figure: followed levels against a parameter with one of them strong, or a map over two."""

from __future__ import annotations

import numpy as np

from specterm.analysis.sweep import Sweep
from specterm.views.cells import Rows
from specterm.views.heat_map import heat_map
from specterm.views.line_chart import chart
from specterm.views.numbers import bracket, short, with_unit
from specterm.views.plain_table import sure, text_columns
from specterm.views.plot import Curve, Label

WORDS = {"levels": "levels", "transitions": "transition energies", "strengths": "strengths"}
WHAT = {True: "crossing", False: "avoided", None: "not resolved"}
LABELS = {"expectation": "<{}>", "weights": "weights of {}"}


def sweep_rows(
    found: Sweep,
    width: int,
    height: int,
    level: int | None = None,
    cursor: int | None = None,
    glyphs: str = "braille",
) -> Rows:
    """Return the figure in exactly `height` rows of `width` columns: each followed state a curve, that of `level` strong.

    `level` is the number of the level a followed state starts as; `cursor`, the number of a point, draws a line there. With two
    parameters the rows are those of `map_rows`. Points not yet done are gaps.
    """
    if len(found.request.axes) == 2:
        return map_rows(found, width, level, glyphs)[:height]
    order = np.argsort(found.places[:, 0], kind="stable")
    x = found.places[order, 0]
    logarithmic = evenly_logarithmic(found)
    x = np.log10(np.abs(x)) if logarithmic else x
    chosen = branch_of(found, level)
    names = [branch for branch in range(found.branches.shape[1]) if branch != chosen]
    curves = [Curve(x, found.along(branch, found.quantity)[order], "other") for branch in names]
    if chosen is not None:
        curves.append(Curve(x, found.along(chosen, found.quantity)[order], "chosen"))
    labels = []
    if cursor is not None and 0 <= cursor < len(x):
        place = float(x[int(np.flatnonzero(order == cursor)[0])])
        finite = found.quantity[np.isfinite(found.quantity)]
        ends = (float(finite.min()), float(finite.max())) if len(finite) else (0.0, 1.0)
        curves.insert(0, Curve(np.array([place, place]), np.array(ends), "wall"))
        if chosen is not None:
            labels.append(Label(place, float(found.along(chosen, found.quantity)[cursor]), "o", "chosen"))
    return chart(
        curves, width, height, glyphs=glyphs, title=title_of(found), xlabel=_axis_name(found, 0, logarithmic=logarithmic),
        xlim=_around(float(x[0])) if x[0] == x[-1] else None, labels=[label for label in labels if np.isfinite(label.y)],
    )  # fmt: skip


def _around(value: float) -> tuple[float, float]:
    """Return limits of an axis with one value on it."""
    half = abs(value) / 2 or 1.0
    return value - half, value + half


def branch_of(found: Sweep, level: int | None) -> int | None:
    """Return the followed state that starts as the level of a number, None where there is none."""
    if level is None or level not in found.numbers or not found.branches.size:
        return None
    column = found.numbers.index(level)
    for row in found.branches:
        if (row >= 0).any():
            places = np.flatnonzero(row == column)
            return int(places[0]) if len(places) else None
    return None


def evenly_logarithmic(found: Sweep) -> bool:
    """Say whether the values of the parameter are spaced by equal factors, and are drawn so."""
    values = np.asarray(found.request.axes[0].values)
    if len(values) < 3 or not (values[0] * values > 0).all():
        return False
    steps = np.diff(np.log(np.abs(values)))
    return bool(np.ptp(steps) <= 1e-6 * np.abs(steps).max() and np.ptp(np.diff(values)) > 1e-3 * np.abs(np.diff(values)).max())


def title_of(found: Sweep) -> str:
    """Return what the figure shows, with its unit."""
    quantity = found.request.quantity
    words = WORDS.get(quantity.kind) or LABELS[quantity.kind].format(quantity.detail)
    if quantity.kind in ("transitions", "strengths"):
        words += f" from level {quantity.start}"
    return f"{words} ({found.quantity_unit})" if found.quantity_unit else words


def _axis_name(found: Sweep, axis: int, *, logarithmic: bool = False) -> str:
    name, unit = found.request.axes[axis].name, found.units[axis]
    name = f"{name} ({unit})" if unit else name
    return f"log10 {name}" if logarithmic else name


def map_rows(found: Sweep, width: int, level: int | None = None, glyphs: str = "braille") -> Rows:
    """Return a map over two parameters: the quantity of one level (the lowest without one), darker where it is larger.

    A row for each value of the first parameter, a column for each of the second, both numbered; above it what the numbers mean.
    """
    rows, columns = (axis.values for axis in found.request.axes)
    number = found.numbers[0] if found.numbers and level is None else level
    lines = [((f"{title_of(found)}, level {number}", "title"),)]
    if number not in found.numbers:
        return (*lines, (("no such level", "warn"),))
    table = found.quantity[:, found.numbers.index(number)].reshape(len(rows), len(columns))
    known = table[np.isfinite(table)]
    low = float(known.min()) if len(known) else 0.0
    for axis, what in ((0, "rows"), (1, "columns")):
        values = found.request.axes[axis].values
        lines.append(((f"{what}: {_axis_name(found, axis)} = {short(values[0])} ... {short(values[-1])}", "axis"),))
    lines.append(((f"shades: from {with_unit(short(low), found.quantity_unit)} on", "axis"),))
    return (*lines, *heat_map(table - low, range(len(rows)), range(len(columns)), width, glyphs=glyphs))


def gap_table(found: Sweep) -> str:
    """Return the smallest gaps as a table, "" where there are none."""
    if not found.gaps:
        return ""
    rows = list(
        zip(
            [f"{gap.pair[0]}-{gap.pair[1]}" for gap in found.gaps],
            sure([gap.at for gap in found.gaps], [gap.at_error for gap in found.gaps]),
            [bracket(gap.gap, gap.gap_error) for gap in found.gaps],
            [WHAT[gap.crossing] for gap in found.gaps],
            strict=True,
        )
    )
    unit = f" ({found.energy_unit})" if found.energy_unit else ""
    return text_columns(("levels", _axis_name(found, 0), f"gap{unit}", ""), rows, left=frozenset({3}))


def ends_table(found: Sweep) -> str:
    """Return the quantity of each level at the first and at the last point (once where they are one) as a table."""
    ends = list(dict.fromkeys((0, len(found.places) - 1)))
    headings = ["level"] + [
        ", ".join(f"{axis.name} = {short(value)}" for axis, value in zip(found.request.axes, found.places[end], strict=True))
        for end in ends
    ]
    columns = [[str(number) for number in found.numbers]]
    for end in ends:
        values, errors = found.quantity[end].tolist(), found.quantity_errors[end].tolist()
        columns.append(list(sure(values, [error if np.isfinite(error) else None for error in errors])))
    return text_columns(headings, list(zip(*columns, strict=True)))
