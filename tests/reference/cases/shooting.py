"""Levels of -(K f')' + V f = E f: Taylor steps in fixed point (high precision), and Legendre elements in doubles."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from operator import mul

import numpy as np
from mpmath import mp, mpf
from numpy.polynomial import legendre
from scipy.sparse import coo_matrix, diags
from scipy.sparse.linalg import eigsh
from series import ORDER, Series, exp
from sheets import Nodes, Sheet

BITS = 300


@dataclass
class Step:
    """One step in s with x = s or x = e^s; `lists` are fixed-point Taylor coefficients of f' = r flux, flux' = (a - E b) f."""

    s: mpf
    h: mpf
    log: bool
    expand: Callable[[], tuple]

    @cached_property
    def lists(self):
        """The coefficients (r, a, b), worked out when first needed."""
        return tuple(fixed((self.h * Series.of(v)).c) for v in self.expand())


@dataclass(frozen=True)
class Mesh:
    """The steps, the matching step, and the two ends ("wall", "free", "plateau", or a power sigma: f ~ x^sigma)."""

    sheet: Sheet
    steps: list
    match: int
    left: object
    right: object


def fixed(values):
    """Fixed-point integers of a list of mpf."""
    return [int(v * (1 << BITS)) for v in values]


def make_step(sheet, s, h, log):
    """Set up the equation about the left end of a step."""

    def expand():
        line = Series([s, h])
        x = exp(line) if log else line
        slope = x if log else Series([1])
        K, V = sheet.at(x, mpf)
        return slope / K, slope * V, slope

    return Step(s, h, log, expand)


def mesh(sheet, pieces, left="wall", right="wall", match=None):
    """Divide pieces (a, b, steps[, "log"]) evenly (in ln x for "log")."""
    steps = []
    for first, last, count, *how in pieces:
        a, b = (mp.log(v) if how else v for v in (sheet.number(str(first)), sheet.number(str(last))))
        h = (b - a) / count
        steps += [make_step(sheet, a + k * h, h, bool(how)) for k in range(count)]
    where = len(steps) // 2 if match is None else next(k for k, st in enumerate(steps) if x_of(st) >= match)
    return Mesh(sheet, steps, where, left, right)


def x_of(step):
    """Left end of a step."""
    return mp.exp(step.s) if step.log else step.s


def advance(step, E, f, g, sign):
    """Taylor series over one step, forwards (sign 1, expansion point to far end) by fixed-point recurrences."""
    r, a, b = step.lists
    q = [(a[j] if j < len(a) else 0) - ((E * b[j]) >> BITS if j < len(b) else 0) for j in range(max(len(a), len(b)))]
    if sign < 0:
        r, q = ([v if j % 2 else -v for j, v in enumerate(w)] for w in (r, q))
    cf, cg = [f], [g]
    for k in range(ORDER + 4):
        nf = sum(map(mul, r, reversed(cg[-len(r) :]))) >> BITS
        ng = sum(map(mul, q, reversed(cf[-len(q) :]))) >> BITS
        cf.append(nf // (k + 1))
        cg.append(ng // (k + 1))
    return sum(cf), sum(cg)


def transfer(step, E):
    """Transfer matrix over one step."""
    one = 1 << BITS
    return advance(step, E, one, 0, 1), advance(step, E, 0, one, 1)


def carry(steps, E, f, g, back):
    """Carry (f, flux) through steps; returns fixed-point pair and the binary exponent taken out."""
    shift = 0
    for step in reversed(steps) if back else steps:
        (ff, gf), (fg, gg) = transfer(step, E)
        if back:
            f, g = (gg * f - fg * g) >> BITS, (ff * g - gf * f) >> BITS
        else:
            f, g = (ff * f + fg * g) >> BITS, (gf * f + gg * g) >> BITS
        extra = max(abs(f), abs(g)).bit_length() - BITS
        f, g = (f >> extra, g >> extra) if extra >= 0 else (f << -extra, g << -extra)
        shift += extra
    return f, g, shift


def start(m, E, end, step, back):
    """Fixed-point (f, flux) at an end."""
    if end == "wall":
        f, g = mpf(0), mpf(1)
    elif end == "free":
        f, g = mpf(1), mpf(0)
    else:
        s = step.s + (step.h if back else 0)
        x = Series([mp.exp(s) if step.log else s])
        K, V = (Series.of(v).c[0] for v in m.sheet.at(plateau_point(x, step, back), mpf))
        slope = mp.sqrt((V - E) / K) if end == "plateau" else mpf(end) / x.c[0]
        f, g = mpf(1), K * slope * (-1 if back else 1)
    return fixed([f, g])


def plateau_point(x, step, back):
    """Return a point just outside the end, for functions decided by comparisons."""
    return Series([x.c[0] + (step.h if back else -step.h) / 1000]) if not step.log else x


def characteristic(m, E):
    """Wronskian of the two one-sided solutions at the matching point: an entire function of E."""
    fixed_E = fixed([E])[0]
    f, g, s = carry(m.steps[: m.match], fixed_E, *start(m, E, m.left, m.steps[0], False), False)
    u, v, t = carry(m.steps[m.match :], fixed_E, *start(m, E, m.right, m.steps[-1], True), True)
    return mp.ldexp(mpf(f * v - g * u), s + t - 2 * BITS)


def root(function, guess, nudge):
    """Secant root of a function near a guess."""
    a, b = mpf(guess), mpf(guess) + mpf(nudge)
    fa, fb = function(a), function(b)
    for _ in range(120):
        if fb == fa or b == a:
            return b
        a, b, fa = b, b - fb * (b - a) / (fb - fa), fb
        if abs(b - a) <= abs(b) * mpf(10) ** -34 + mpf(10) ** -45:
            return b
        fb = function(b)
    raise ArithmeticError(f"no root near {guess}")


def trace(m, E):
    """Trace of the transfer matrix once round the ring."""
    fixed_E, one = fixed([E])[0], 1 << BITS
    f, _, s = carry(m.steps, fixed_E, one, 0, False)
    _, g, t = carry(m.steps, fixed_E, 0, one, False)
    return mp.ldexp(mpf(f), s - BITS) + mp.ldexp(mpf(g), t - BITS)


def elements(m, count, floor, order=12, phase=None, smallest=1e-11):
    """Lowest levels by Gauss-Lobatto-Legendre elements in doubles on the same steps (walls where the ends are open)."""
    xi, w, d = lobatto(order)
    rows, cols, vals, mass, at = [], [], [], {}, 0
    steps = [st for st in m.steps if x_of(st) >= smallest or not st.log]
    size = len(steps) * order + 1
    mass = np.zeros(size)
    for st in steps:
        s, h = float(st.s), float(st.h)
        nodes = s + h * (xi + 1) / 2
        x = (np.exp(nodes) if st.log else nodes).view(Nodes)
        slope = np.asarray(x) if st.log else np.ones(order + 1)
        K, V = (np.broadcast_to(np.asarray(v, float), x.shape) for v in m.sheet.at(x, float))
        A = d.T @ np.diag(w * K / slope * 2 / h) @ d + np.diag(w * V * slope * h / 2)
        index = np.arange(at, at + order + 1)
        mass[index] += w * slope * h / 2
        rows.append(np.repeat(index, order + 1))
        cols.append(np.tile(index, order + 1))
        vals.append(A.ravel())
        at += order
    A = coo_matrix((np.concatenate(vals), (np.concatenate(rows), np.concatenate(cols))), shape=(size, size)).tocsc()
    if phase is not None:
        fold = diags([np.ones(size)], [0], shape=(size, size - 1), dtype=complex).tolil()
        fold[size - 1, 0] = np.exp(2j * np.pi * float(phase))
        fold = fold.tocsc()
        A, M = fold.conj().T @ A @ fold, fold.conj().T @ diags(mass) @ fold
    else:
        keep = slice(0 if m.left == "free" else 1, size if m.right == "free" else size - 1)
        A, M = A[keep, keep], diags(mass[keep])
    root_mass = diags(1 / np.sqrt(np.real(M.diagonal())))
    return np.sort(
        eigsh(
            (root_mass @ A @ root_mass).tocsc(),
            k=count,
            sigma=floor,
            v0=np.cos(np.arange(len(M.diagonal()))),
            return_eigenvectors=False,
        )
    )


def lobatto(order):
    """Nodes, weights and differentiation matrix on (-1, 1)."""
    c = np.zeros(order + 1)
    c[-1] = 1
    x = np.concatenate([[-1], np.sort(legendre.legroots(legendre.legder(c)).real), [1]])
    P = legendre.legval(x, c)
    w = 2 / (order * (order + 1) * P**2)
    d = np.where(np.eye(order + 1), 0, P[:, None] / P[None, :] / (x[:, None] - x[None, :] + np.eye(order + 1)))
    d[0, 0], d[-1, -1] = -order * (order + 1) / 4, order * (order + 1) / 4
    return x, w, d
