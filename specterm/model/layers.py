"""`layers` blocks -> piecewise-constant functions of the coordinate."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.language.nodes import LayersBlock, Node
from specterm.model.pieces import Pieces
from specterm.model.scalar import ULP, ZERO, Scalar, written
from specterm.model.term import Term, constant, make
from specterm.units import UnitSystem

Evaluate = Callable[[Node, str], Scalar]


@dataclass(frozen=True)
class Layers:
    """A block made ready: `boundaries` (n + 1,) from the first to the last, and a term for each column but the thickness."""

    boundaries: NDArray[np.float64]
    columns: dict[str, Term]


def build_layers(block: LayersBlock, units: UnitSystem, evaluate: Evaluate, carries: Callable[[Node], bool]) -> Layers:
    """Return the functions of a block; `evaluate` gives the number a cell stands for (or raises SheetError).

    A column's unit is for cells that do not carry one themselves (`carries`). The outermost layers go on beyond their
    boundaries; at a boundary the layer to its right counts.
    """
    factors = [written(1.0 if unit is None else units.parse(unit, span)[0]) for _, unit, span in block.columns]

    def cell(row: tuple[Node, ...], column: int, what: str) -> Scalar:
        value = evaluate(row[column], what)
        return value if carries(row[column]) else value * factors[column]

    place = evaluate(block.start, "the start of the layers") if block.start is not None else ZERO
    places = [place]
    for row in block.rows:
        thickness = cell(row, 0, "the thickness of a layer")
        if not thickness.value.real > 0:
            raise refuse("layer-thickness", row[0].span, found=f"{thickness.value:g}")
        place = place + thickness
        if not place.is_finite:
            raise refuse("not-finite", row[0].span, what="the end of this layer", value="infinite")
        places.append(place)
    boundaries = np.array([float(p.value.real) for p in places])
    _check_rising(boundaries, [row[0].span for row in block.rows])
    columns = {}
    for k, (name, _, _) in enumerate(block.columns[1:], 1):
        cells = [cell(row, k, f"a cell of column `{name}`") for row in block.rows]
        columns[name] = _column(name, boundaries, cells)
    return Layers(boundaries, columns)


def _check_rising(boundaries: NDArray[np.float64], spans: list[Span]) -> None:
    flat = np.flatnonzero(np.diff(boundaries) <= 0)
    if flat.size:
        raise refuse("layer-thickness", spans[int(flat[0])], found="one too thin to be seen beside its place")


def _column(name: str, boundaries: NDArray[np.float64], cells: list[Scalar]) -> Term:
    """Return a column; boundaries between layers of equal value stay, a column of one value is a constant."""
    values = np.array([float(c.value.real) for c in cells])
    if np.all(values == values[0]):
        return constant(cells[0])
    slack = np.array([c.slack for c in cells]) + ULP * np.abs(values)
    return make("pieces", (), Pieces(name, boundaries[1:-1], values, slack), real=True)
