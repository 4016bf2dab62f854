"""Piecewise polynomials through tabulated points: a C2 cubic with not-a-knot ends, or straight lines."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specterm.model.arrays import Values
from specterm.model.scalar import ULP

Floats = NDArray[np.float64]
_ONE_PIECE = 99


@dataclass(frozen=True)
class Spline:
    """A derivative of a piecewise polynomial. `x` are the knots (n,), increasing; piece k is the sum of c[j, k] (t - x[k])^j.

    `c` has shape (m, n - 1). `outside` says what holds beyond the knots: "error" (nan), "hold" (the end value) or "extend" (the
    last piece goes on). `smooth` is how many derivatives are continuous, `taken` how many have been taken already. `name` is
    how the function is written. `size` bounds |y|, for the rounding of the construction.
    """

    name: str
    x: Floats
    c: Floats
    outside: str
    smooth: int
    size: Floats
    taken: int = 0

    @cached_property
    def digest(self) -> int:
        """A number that is the same for the same function."""
        packed = self.x.tobytes() + self.c.tobytes() + self.outside.encode() + bytes([self.taken, self.smooth + 1])
        return int.from_bytes(packed, "little") % (2**127 - 1)

    def derivative(self) -> Spline | None:
        """Return the derivative, or None where the function itself jumps."""
        if self.smooth < 0 or (self.outside == "hold" and self.taken > 0):
            return None
        orders = np.arange(1, len(self.c))[:, None]
        c = self.c[1:] * orders if len(self.c) > 1 else np.zeros((1, len(self.x) - 1))
        return replace(self, c=c, smooth=self.smooth - 1, taken=self.taken + 1)

    def breaks(self) -> Floats:
        """Return the knots where a derivative jumps: all inner ones, and the ends where the function is held there."""
        return self.x if self.outside == "hold" else self.x[1:-1]

    def _pieces(self, t: Floats) -> tuple[NDArray[np.intp], Floats]:
        k = np.clip(np.searchsorted(self.x, t, side="right") - 1, 0, len(self.x) - 2)
        inside = np.clip(t, self.x[0], self.x[-1]) if self.outside == "hold" else t
        return k, inside - self.x[k]

    def values_at(self, t: Floats) -> Values:
        """Return the values at the places t."""
        k, u = self._pieces(t)
        value = self.c[-1][k]
        for row in self.c[-2::-1]:
            value = value * u + row[k]
        beyond = (t < self.x[0]) | (t > self.x[-1])
        if self.outside == "error":
            value = np.where(beyond, np.nan, value)
        elif self.outside == "hold" and self.taken:
            value = np.where(beyond, 0.0, value)
        return np.where(np.isnan(t), np.nan, value)

    def rounding(self, t: Floats) -> Values:
        """Return a bound of the error of the values: of the sum, of the coefficients, and of the rounding of t itself."""
        k, u = self._pieces(t)
        size = np.abs(u)
        power, own, slope = np.ones_like(size), np.zeros_like(size), np.zeros_like(size)
        for j, row in enumerate(self.c):
            part = np.abs(row[k])
            own = own + part * power
            if j + 1 < len(self.c):
                slope = slope + (j + 1) * np.abs(self.c[j + 1][k]) * power
            power = power * size
        return 8 * ULP * own + slope * 2 * ULP * np.abs(t) + self.size[k] * 8 * ULP


def linear(name: str, x: Floats, y: Floats, outside: str) -> Spline:
    """Return straight lines through the points."""
    return Spline(name, x, np.array([y[:-1], np.diff(y) / np.diff(x)]), outside, 0 if len(x) > 2 else _ONE_PIECE, _sizes(y))


def cubic(name: str, x: Floats, y: Floats, outside: str) -> Spline:
    """Return the interpolating cubic spline with not-a-knot ends; a parabola through 3 points, a line through 2.

    Method: de Boor, A Practical Guide to Splines (2001), chapter IV (from memory).
    """
    if len(x) == 2:
        return linear(name, x, y, outside)
    slopes = _parabola_slopes(x, y) if len(x) == 3 else _slopes(x, y)
    h, d = np.diff(x), np.diff(y) / np.diff(x)
    second = (3 * d - 2 * slopes[:-1] - slopes[1:]) / h
    third = (slopes[:-1] + slopes[1:] - 2 * d) / h**2
    if outside == "extend":
        _drop_rounding(third, h**3, y)
    return Spline(name, x, np.array([y[:-1], slopes[:-1], second, third]), outside, 2 if len(x) > 3 else _ONE_PIECE, _sizes(y))


def _drop_rounding(third: Floats, cubes: Floats, y: Floats) -> None:
    """Set the cubic coefficients of the two end pieces to zero, in place, where they are rounding: far out they would rule."""
    for end in (0, -1):
        if abs(third[end]) * cubes[end] <= 1e-13 * float(np.abs(y).max()):
            third[end] = 0.0


def _sizes(y: Floats) -> Floats:
    return np.maximum(np.abs(y[:-1]), np.abs(y[1:]))


def _parabola_slopes(x: Floats, y: Floats) -> Floats:
    h, d = np.diff(x), np.diff(y) / np.diff(x)
    bend = (d[1] - d[0]) / (h[0] + h[1])
    return np.array([d[0] - bend * h[0], d[0] + bend * h[0], d[1] + bend * h[1]])


def _slopes(x: Floats, y: Floats) -> Floats:
    """Return the slopes at the knots: a tridiagonal system, its ends closed by the continuity of the third derivative there."""
    from scipy.linalg import solve_banded  # noqa: PLC0415 - takes long to import, few sheets need it

    h, d = np.diff(x), np.diff(y) / np.diff(x)
    n = len(x)
    bands, right = np.zeros((3, n)), np.empty(n)
    bands[1, 1:-1] = 2 * (h[:-1] + h[1:])
    bands[0, 2:] = h[:-1]
    bands[2, :-2] = h[1:]
    right[1:-1] = 3 * (h[1:] * d[:-1] + h[:-1] * d[1:])
    span = h[0] + h[1]
    bands[1, 0], bands[0, 1] = h[1], span
    right[0] = ((h[0] + 2 * span) * h[1] * d[0] + h[0] ** 2 * d[1]) / span
    span = h[-1] + h[-2]
    bands[1, -1], bands[2, -2] = h[-2], span
    right[-1] = (h[-1] ** 2 * d[-2] + (2 * span + h[-1]) * h[-2] * d[-1]) / span
    solution: Floats = solve_banded((1, 1), bands, right)
    return solution
