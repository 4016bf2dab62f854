"""`table(...)` -> a function of the coordinate through the points of a file."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from specterm.errors import Span, printable
from specterm.language.catalogue import refuse
from specterm.language.nodes import Table
from specterm.model.domain import Domain
from specterm.model.scalar import ONE, Scalar
from specterm.model.spline import cubic, linear
from specterm.model.tablefile import TableText, column, read_table
from specterm.model.term import Term, make
from specterm.model.term import linear as linear_sum
from specterm.units import UnitSystem

if TYPE_CHECKING:
    from pathlib import Path

Floats = NDArray[np.float64]
STEEPEST = 1e140
"""Values, distances, slopes and bends of a table stay below this, so that their squares are numbers."""


@dataclass(frozen=True)
class Points:
    """What a table says: places `x` (n,), strictly increasing, and values `y` (n,), in the sheet's units."""

    x: Floats
    y: Floats


def build_table(node: Table, folder: Path | None, units: UnitSystem, domain: Domain | None) -> Term:
    """Return the function a table stands for: a cubic spline (C2, not-a-knot ends) through its points, or straight lines.

    A third column is the imaginary part. A domain that reaches beyond the points is an error unless `hold` or `extend` is said.
    """
    table = read_table(folder, node.path, node.span)
    parts = [_spline(_points(table, node, units, k), node, domain) for k in range(1, len(node.columns))]
    return parts[0] if len(parts) == 1 else linear_sum([(ONE, parts[0]), (Scalar(1j), parts[1])])


def _spline(points: Points, node: Table, domain: Domain | None) -> Term:
    """Return the function through some points."""
    outside = node.outside
    if domain is not None:
        covered = points.x[0] <= domain.left and domain.right <= points.x[-1]
        if outside == "error" and not covered:
            raise refuse(
                "table-outside",
                node.span,
                left=f"{points.x[0]:g}",
                right=f"{points.x[-1]:g}",
                domain=f"({domain.left:g}, {domain.right:g})",
            )
        outside = "extend" if covered else outside
    _check_steepness(points, node)
    interpolate = cubic if node.smooth else linear
    return make("spline", (), interpolate(f'table("{node.path}")', points.x, points.y, outside), real=True)


def _check_steepness(points: Points, node: Table) -> None:
    """Refuse points between which slopes, or what a cubic needs beyond them, leave the range of numbers."""
    with np.errstate(all="ignore"):
        gaps = np.diff(points.x)
        bend = np.abs(np.diff(points.y)) / gaps / np.minimum(gaps, 1.0) ** 2
        steep = np.flatnonzero(~(bend < STEEPEST) | ~(gaps < STEEPEST) | ~(np.abs(points.y[1:]) < STEEPEST))
    if steep.size:
        raise refuse("table-steep", node.span, path=printable(node.path), place=f"{points.x[steep[0]]:g}")


def _points(table: TableText, node: Table, units: UnitSystem, number: int) -> Points:
    """Return the first column and another one as points."""
    (first, first_unit), (second, second_unit) = node.columns[0], node.columns[number]
    x = column(table, first, node.span) * _factor(first_unit, units, node.span)
    y = column(table, second, node.span) * _factor(second_unit, units, node.span)
    order = np.argsort(x, kind="stable")
    x, y = x[order], y[order]
    same = np.flatnonzero(np.diff(x) == 0)
    for k in same:
        if y[k] != y[k + 1]:
            a, b = sorted((table.lines[order[k]], table.lines[order[k + 1]]))
            raise refuse("table-conflict", node.span, path=table.path, first=a, second=b, place=f"{x[k]:g}")
    keep = np.append(True, np.diff(x) > 0)[: len(x)]
    x, y = x[keep], y[keep]
    if len(x) < 2:
        raise refuse("table-too-short", node.span, path=table.path, found=len(x))
    return Points(x, y)


def _factor(unit: str | None, units: UnitSystem, span: Span) -> float:
    return 1.0 if unit is None else units.parse(unit, span)[0]
