"""Numbers that know how far rounding may have moved them: the constants of a sheet."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass

ULP = 2.0**-53
"""Half a unit in the last place, relative: the error of one correctly rounded operation."""


@dataclass(frozen=True, slots=True)
class Scalar:
    """A number and a bound `slack` of its distance from the number that is meant (first order in the rounding unit)."""

    value: complex | float
    slack: float = 0.0

    def __add__(self, other: Scalar) -> Scalar:
        """Return the sum; real and imaginary parts add separately, so neither loses to the other."""
        value = tidy(self.value + other.value)
        exact = self.value == 0 or other.value == 0 or _small_integer(value)
        return Scalar(value, self.slack + other.slack + (0.0 if exact else ULP * abs(value)))

    def __neg__(self) -> Scalar:
        return Scalar(-self.value, self.slack)

    def __sub__(self, other: Scalar) -> Scalar:
        return self + (-other)

    def __mul__(self, other: Scalar) -> Scalar:
        """Return the product; an imaginary part that is pure rounding is dropped."""
        a, b = self.value, other.value
        value = _product(a, b)
        own = 0.0 if _binary(a) or _binary(b) or _all_integers(a, b, value) else _ulps(a, b) * ULP * abs(value)
        return Scalar(value, abs(a) * other.slack + abs(b) * self.slack + self.slack * other.slack + own)

    def __truediv__(self, other: Scalar) -> Scalar:
        """Return the quotient; by zero it is infinite or undefined, as in IEEE arithmetic."""
        a, b = self.value, other.value
        if b == 0:
            return Scalar(float("nan") if a == 0 or isinstance(a, complex) else float("inf") * a)
        value = _quotient(a, b)
        own = 0.0 if _binary(b) or (_small_integer(value) and value * b == a) else _ulps(b) * ULP * abs(value)
        return Scalar(value, (self.slack + abs(value) * other.slack) / abs(b) + own)

    def conjugate(self) -> Scalar:
        """Return the complex conjugate."""
        return Scalar(self.value.conjugate(), self.slack)

    @property
    def is_real(self) -> bool:
        """Say whether there is no imaginary part."""
        return not isinstance(self.value, complex)

    @property
    def is_finite(self) -> bool:
        """Say whether the number is neither infinite nor undefined."""
        return cmath.isfinite(self.value)


def written(value: complex | float) -> Scalar:
    """Return a number as read from text: exact if it is a multiple of 2^-20 below 2^30, else off by at most half an ulp."""
    value = tidy(value)
    exact = abs(value) < 2.0**30 and _small_integer(value * 2.0**20)
    return Scalar(value, 0.0 if exact or _small_integer(value) else ULP * abs(value))


def tidy(value: complex | float) -> complex | float:
    """Return a real number where the imaginary part is exactly zero."""
    if isinstance(value, complex):
        return value.real if value.imag == 0 else complex(value)
    return float(value)


def snap(value: complex | float, slack: float) -> complex | float:
    """Return the real part alone where the imaginary part is within the rounding of the whole."""
    value = tidy(value)
    if isinstance(value, complex) and abs(value.imag) <= slack + 4 * ULP * abs(value):
        return value.real
    return value


def _small_integer(value: complex | float) -> bool:
    if isinstance(value, complex):
        return _small_integer(value.real) and _small_integer(value.imag)
    return abs(value) <= 2.0**53 and value == int(value)


def _all_integers(*values: complex | float) -> bool:
    return all(_small_integer(v) for v in values)


def _binary(value: complex | float) -> bool:
    """Say whether multiplying by the value is exact: a power of two, perhaps times i."""
    if isinstance(value, complex):
        return (value.real == 0 or value.imag == 0) and _binary(value.real + value.imag)
    return abs(math.frexp(value)[0]) == 0.5


def _ulps(*values: complex | float) -> int:
    """Return the half-ulps one product or quotient may lose: more where both parts of a complex number take part."""
    return 4 if any(isinstance(v, complex) and v.real and v.imag for v in values) else 1


def _product(a: complex | float, b: complex | float) -> complex | float:
    if not isinstance(a, complex) or not isinstance(b, complex):
        return tidy(_scaled(a, b))
    imaginary, scale = a.real * b.imag + a.imag * b.real, abs(a.real * b.imag) + abs(a.imag * b.real)
    return tidy(complex(a.real * b.real - a.imag * b.imag, 0.0 if abs(imaginary) <= 2 * ULP * scale else imaginary))


def _scaled(a: complex | float, b: complex | float) -> complex | float:
    if isinstance(a, complex):
        return complex(a.real * b.real, a.imag * b.real)
    if isinstance(b, complex):
        return complex(a * b.real, a * b.imag)
    return a * b


def _quotient(a: complex | float, b: complex | float) -> complex | float:
    if not isinstance(b, complex):
        return tidy(complex(a.real / b, a.imag / b)) if isinstance(a, complex) else a / b
    if abs(b.real) >= abs(b.imag):
        ratio = b.imag / b.real
        bottom = b.real + ratio * b.imag
        turned = complex(1.0, -ratio)
    else:
        ratio = b.real / b.imag
        bottom = b.real * ratio + b.imag
        turned = complex(ratio, -1.0)
    return _quotient(_product(a, turned), bottom)


ZERO = Scalar(0.0)
ONE = Scalar(1.0)
