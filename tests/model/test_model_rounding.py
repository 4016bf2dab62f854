"""The running error bound is never below the true error, found with mpmath in 50 digits."""

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from model_making import PRECISION, exact, function

from specterm.model.function import Function
from specterm.model.scalar import Scalar, written

EXPRESSIONS = [
    "87340.6*(1 - exp(-2.3117*(x - 1.1391)))^2",
    "(x^2 - 1.83^2)^2 - 3.1*x",
    "(x - 1.93)^2 - (x^2 - 3.86*x + 3.7249)",
    "1/cosh(x/0.3)^2 - 0.7*tanh(x)",
    "1e8*cos(1e6*x) + x",
    "sqrt(1 + 1e-9*x^2) - 1",
    "where(x < 0.5, 0.1*x, 0.3 - x) + abs(x - 0.7)",
    "exp(30*x)*exp(-29.9*x) - x^7/3.3",
    "besselj(1.5, 1 + x^2)*airyai(-3*x) + erf(x/7)",
    "(1 + x^2)^1.3/(0.1 + x^2)^(1/3)",
    "gamma(1.5 + x^2) - lgamma(0.2 + x^2)",
    "log(1 + x^2)/(1.7 + sin(3*x)) - hypot(x, 0.3)",
    "min(0.1*x^2, 0.7 - x, 0.3) + max(x, 0.1 - x)",
    "(1e8 + 0.1 - 1e8)*x",
    "(0.1 + 0.2 - 0.3)*1e16*x + asinh(x)*atan(3.3*x)",
]
POINTS = np.random.default_rng(20).uniform(-1, 1, 40) * np.geomspace(1e-3, 3, 40)


def largest_errors(expression, values):
    """Return the largest distance of each value from the exact one, x being known to 2^-52 of itself only."""
    errors = np.zeros(len(POINTS))
    for shift in (-1, 0, 1):
        with mpmath.workdps(PRECISION):
            true = [exact(expression, mpmath.mpf(t) * (1 + shift * mpmath.mpf(2) ** -52)) for t in POINTS]
            errors = np.maximum(errors, [float(abs(v - t)) for v, t in zip(values, true, strict=True)])
    return errors


@pytest.mark.parametrize("expression", EXPRESSIONS)
def test_bound_covers_the_error(expression):
    """At 40 random places the error is within the bound, and the bound stays below 10,000 times the largest error."""
    f = function(expression)
    errors, bounds = largest_errors(expression, f(POINTS)), f.rounding(POINTS)
    assert np.all(errors <= bounds)
    assert np.max(bounds) <= 1e4 * max(np.max(errors), 1e-16)


OPERATIONS = [
    "x + 0.1",
    "x - 0.3",
    "x*0.7",
    "x/0.7",
    "x*x^3*sin(x)",
    "x^2",
    "x^3",
    "x^7",
    "0.1/x",
    "(x + 0.1)*(x + 0.3)",
    "x^0.3",
]


@pytest.mark.parametrize("expression", OPERATIONS)
def test_bound_of_one_operation_is_close(expression):
    """The bound of few operations covers the error at 2,000 places and is at most 16 times the largest relative error."""
    x = np.abs(np.random.default_rng(21).uniform(0.5, 2, 2000))
    f = function(expression)
    values, bounds = f(x), f.rounding(x)
    worst = 0.0
    for shift in (-1, 0, 1):
        with mpmath.workdps(30):
            true = [exact(expression, mpmath.mpf(t) * (1 + shift * mpmath.mpf(2) ** -52)) for t in x]
            errors = np.array([float(abs(v - t)) for v, t in zip(values, true, strict=True)])
        assert np.all(errors <= bounds)
        worst = max(worst, np.max(errors / bounds))
    assert worst > 1 / 16


@given(
    st.recursive(
        st.sampled_from(["x", "0.3", "1.7", "2", "x^2", "-x", "1e-3"]),
        lambda inner: st.one_of(
            st.tuples(inner, st.sampled_from(["+", "-", "*", "/"]), inner).map(lambda t: f"({t[0]} {t[1]} ({t[2]}))"),
            inner.map(lambda t: f"sin({t})"),
            inner.map(lambda t: f"exp(-({t})^2)"),
            inner.map(lambda t: f"({t})^3"),
        ),
        max_leaves=12,
    ),
    st.floats(-3, 3).map(lambda t: round(t, 3)),
)
@settings(max_examples=300, deadline=None, derandomize=True)
def test_bound_covers_the_error_of_random_expressions(expression, x):
    """Whatever the expression, a finite value with a finite bound is within the bound of the exact one."""
    try:
        f = function(expression)
        true = exact(expression, x)
    except (ZeroDivisionError, ArithmeticError, ValueError):
        return
    value, bound = f(np.array([x]))[0], f.rounding(np.array([x]))[0]
    if np.isfinite(value) and np.isfinite(bound):
        assert abs(value - true) <= bound + 1e-300


def test_scalars_keep_their_slack():
    """Constant arithmetic keeps a bound: 1e8 + 0.1 - 1e8 is off from 0.1 by less than its slack, and by more than 1e-9."""
    value = written(1e8) + written(0.1) - written(1e8)
    assert 1e-9 < abs(value.value - 0.1) <= value.slack


def test_exact_scalars_have_no_slack():
    """Small integers, powers of two and their products are exact."""
    for value in (
        written(3.0) * written(0.5),
        written(6.0) / written(3.0),
        Scalar(1j) * Scalar(1j),
        written(2.0) + written(5.0),
    ):
        assert value.slack == 0


def test_rounding_of_the_coordinate_counts():
    """The bound of x itself is 2^-52 |x|."""
    assert Function(function("x").term).rounding(np.array([3.0]))[0] == 3.0 * 2.0**-52
