"""Truncated power series in t for x = x0 + h t, with mpmath coefficients: enough algebra to expand a sheet's potential."""

from __future__ import annotations

from mpmath import mp, mpf

ORDER = 56


class Series:
    """Coefficients of t^0, t^1, ... (trailing zeros dropped); comparisons look at the middle of the step, t = 1/2."""

    def __init__(self, coefficients):
        c = [mpf(v) for v in coefficients][: ORDER + 1]
        while len(c) > 1 and c[-1] == 0:
            c.pop()
        self.c = c

    @staticmethod
    def of(value):
        """Return a number as a series, a series as it is."""
        return value if isinstance(value, Series) else Series([value])

    def middle(self):
        """Value at t = 1/2."""
        return mp.polyval(self.c[::-1], mpf("0.5"))

    def __add__(self, other):
        a, b = self.c, Series.of(other).c
        n = max(len(a), len(b))
        return Series([(a[k] if k < len(a) else 0) + (b[k] if k < len(b) else 0) for k in range(n)])

    def __neg__(self):
        return Series([-v for v in self.c])

    def __sub__(self, other):
        return self + -Series.of(other)

    def __rsub__(self, other):
        return -self + other

    def __mul__(self, other):
        a, b = self.c, Series.of(other).c
        n = min(len(a) + len(b) - 1, ORDER + 1)
        return Series(
            [mp.fsum(a[j] * b[k - j] for j in range(max(0, k - len(b) + 1), min(k, len(a) - 1) + 1)) for k in range(n)]
        )

    __radd__, __rmul__ = __add__, __mul__

    def __truediv__(self, other):
        b = Series.of(other).c
        if len(b) == 1:
            return Series([v / b[0] for v in self.c])
        out = []
        for k in range(ORDER + 1):
            left = self.c[k] if k < len(self.c) else mpf(0)
            out.append((left - mp.fsum(b[j] * out[k - j] for j in range(1, min(k, len(b) - 1) + 1))) / b[0])
        return Series(out)

    def __rtruediv__(self, other):
        return Series([other]) / self

    def __pow__(self, power):
        if mp.isint(power) and power >= 0:
            out = Series([1])
            for _ in range(int(power)):
                out = out * self
            return out
        a, out = self.c, [self.c[0] ** power]
        for k in range(1, ORDER + 1):
            terms = ((power * j - (k - j)) * a[j] * out[k - j] for j in range(1, min(k, len(a) - 1) + 1))
            out.append(mp.fsum(terms) / (k * a[0]))
        return Series(out)

    def __lt__(self, other):
        return self.middle() < Series.of(other).middle()

    def __gt__(self, other):
        return self.middle() > Series.of(other).middle()

    def __abs__(self):
        return self if self.middle() > 0 else -self


def _times_derivative(a, other, k):
    """Return (1/k) sum_j j a_j other_(k-j): coefficient k of the integral of a' times other."""
    return mp.fsum(j * a[j] * other[k - j] for j in range(1, min(k, len(a) - 1) + 1)) / k


def exp(x):
    """Exponential of a number or series."""
    if not isinstance(x, Series):
        return mp.exp(x)
    out = [mp.exp(x.c[0])]
    for k in range(1, ORDER + 1):
        out.append(_times_derivative(x.c, out, k))
    return Series(out)


def _sine_cosine(x):
    s, c = [mp.sin(x.c[0])], [mp.cos(x.c[0])]
    for k in range(1, ORDER + 1):
        ds, dc = _times_derivative(x.c, c, k), -_times_derivative(x.c, s, k)
        s.append(ds)
        c.append(dc)
    return Series(s), Series(c)


def sin(x):
    """Sine of a number or series."""
    return _sine_cosine(x)[0] if isinstance(x, Series) else mp.sin(x)


def cos(x):
    """Cosine of a number or series."""
    return _sine_cosine(x)[1] if isinstance(x, Series) else mp.cos(x)


def cosh(x):
    """Hyperbolic cosine of a number or series."""
    return (exp(x) + exp(-x)) / 2


def sinh(x):
    """Hyperbolic sine of a number or series."""
    return (exp(x) - exp(-x)) / 2


def tanh(x):
    """Hyperbolic tangent of a number or series."""
    return 1 - 2 / (1 + exp(2 * x))


def sqrt(x):
    """Square root of a number or series."""
    return Series.of(x) ** mpf("0.5") if isinstance(x, Series) else mp.sqrt(x)


def log(x):
    """Natural logarithm of a number or series."""
    if not isinstance(x, Series):
        return mp.log(x)
    slope = Series([k * v for k, v in enumerate(x.c)][1:] or [0]) / x
    return Series([mp.log(x.c[0])] + [v / (k + 1) for k, v in enumerate(slope.c)])


def where(condition, yes, no):
    """One of two branches; the condition was decided at the middle of the step."""
    return yes if condition else no


def step(x):
    """Return the unit step, decided at the middle of the step."""
    return mpf(1) if Series.of(x).middle() > 0 else mpf(0)


NAMES = {
    "exp": exp,
    "sin": sin,
    "cos": cos,
    "cosh": cosh,
    "sinh": sinh,
    "tanh": tanh,
    "sqrt": sqrt,
    "log": log,
    "ln": log,
    "where": where,
    "step": step,
    "abs": abs,
    "pi": mp.pi,
    "inf": mp.inf,
    "sech": lambda x: 1 / cosh(x),
}
