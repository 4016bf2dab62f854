"""Values, derivatives and rounding bounds of every function of the table, against mpmath 1.4 in 50 digits."""

import mpmath
import numpy as np
import pytest
from model_making import EXACT, PRECISION, exact, function

from specterm.model.elementary import FUNCTIONS, SECOND_NAMES, first_name

_LINE = (-2.3, -0.71, 0.37, 1.9)
_UNIT = (-0.83, -0.2, 0.41, 0.93)
_POSITIVE = (0.013, 0.52, 1.7, 9.3)
_BEYOND = (-3.1, -1.2, 1.4, 7.7)
PLACES = {
    "log": _POSITIVE,
    "log1p": _POSITIVE,
    "log10": _POSITIVE,
    "log2": _POSITIVE,
    "sqrt": _POSITIVE,
    "cbrt": _POSITIVE,
    "asin": _UNIT,
    "acos": _UNIT,
    "atanh": _UNIT,
    "asec": _BEYOND,
    "acsc": _BEYOND,
    "acoth": _BEYOND,
    "acosh": (1.1, 2.7, 30.0),
    "asech": (0.1, 0.52, 0.93),
    "gamma": (*_POSITIVE, -1.4),
    "lgamma": (*_POSITIVE, -1.4),
    "digamma": _POSITIVE,
    "bessely": _POSITIVE,
    "besselk": _POSITIVE,
    "besseli": _POSITIVE,
    "besselj": (*_POSITIVE, 57.3),
    "polygamma": _POSITIVE,
}
ARGUMENTS = {
    "hypot": "x, 0.7",
    "atan2": "x, 0.7 - x^2",
    "min": "x, 0.6, x^3",
    "max": "x, 0.6, x^3",
    "polygamma": "2, x",
    "besselj": "1.5, x",
    "bessely": "2, x",
    "besseli": "3, x",
    "besselk": "0.5, x",
}


def text(name):
    """Return a call of the function in the sheet's language."""
    return f"{name}({ARGUMENTS.get(name, 'x')})"


def places(name):
    """Return places inside the function's range of definition."""
    return np.array(PLACES.get(name, _LINE))


def names():
    """Return the function names; mpmath has every one of them."""
    assert set(FUNCTIONS) == set(EXACT) - {"where"}
    return sorted(FUNCTIONS)


@pytest.mark.parametrize("name", names())
def test_values(name):
    """A function's values agree with mpmath to its own rounding bound, and the bound is below 1e-12 of the value's scale."""
    x = places(name)
    f = function(text(name))
    bounds = f.rounding(x)
    true = [exact(text(name), t) for t in x]
    assert all(abs(v - t) <= b for v, t, b in zip(f(x), true, bounds, strict=True))
    assert np.all(bounds <= 1e-12 * (1 + np.abs([complex(t) for t in true])))


@pytest.mark.parametrize("name", [n for n in names() if not FUNCTIONS[n].jumps])
def test_derivatives(name):
    """The symbolic derivative agrees with mpmath's numerical one to 1e-11."""
    x = places(name)
    values = function(text(name)).derivative()(x)
    with mpmath.workdps(PRECISION):
        true = [float(mpmath.re(mpmath.diff(lambda t: exact(text(name), t), mpmath.mpf(t)))) for t in x]
    assert values == pytest.approx(true, rel=1e-11, abs=1e-12)


@pytest.mark.parametrize("name", [n for n in names() if not FUNCTIONS[n].jumps and n not in ("abs", "min", "max")])
def test_second_derivatives(name):
    """The derivative of the derivative agrees with mpmath's second numerical derivative to 1e-9."""
    x = places(name)
    values = function(text(name)).derivative().derivative()(x)
    with mpmath.workdps(PRECISION):
        true = [float(mpmath.re(mpmath.diff(lambda t: exact(text(name), t), mpmath.mpf(t), 2))) for t in x]
    assert values == pytest.approx(true, rel=1e-9, abs=1e-10)


@pytest.mark.parametrize("second", sorted(SECOND_NAMES))
def test_second_names(second):
    """A second name means the same expression as the first."""
    first = first_name(second)
    assert function(text(first).replace(first, second, 1)) == function(text(first))


def test_undefined_places_are_nan():
    """Roots, logarithms and inverse functions of real numbers outside their range give nan and stay real."""
    for expression in ("sqrt(x)", "log(x)", "asin(2 + x^2)", "x^0.5", "acosh(x)"):
        values = function(expression)(np.array([-1.5]))
        assert values.dtype == float
        assert np.isnan(values[0])


def test_complex_values_where_i_is_involved():
    """With `i` in the expression the values are complex: exp(i x) on the unit circle, sqrt of a complex number off the axis."""
    x = np.array([0.3, 2.0])
    assert function("exp(i*x)")(x) == pytest.approx(np.cos(x) + 1j * np.sin(x), rel=1e-15)
    assert function("sqrt(i*x)")(x) == pytest.approx(np.sqrt(1j * x), rel=1e-15)


@pytest.mark.parametrize(
    "expression",
    [
        "exp(i*x)*exp(-i*x)", "abs(exp(i*x) + 2)", "re(exp(i*x))", "im(i*x)", "arg(x + i)", "conj(x + i*x^2)*(x + i*x^2)",
        "exp(i*x) + exp(-i*x)", "i*(exp(i*x) - exp(-i*x))", "cosh(i*x)", "exp(i*pi)*x",
    ],
)  # fmt: skip
def test_real_functions_built_from_complex_ones(expression):
    """A function whose imaginary part cancels is known to be real, and its values are float64."""
    f = function(expression)
    assert f.is_real
    assert f(np.array([0.3, 2.0])).dtype == float


def test_complex_functions_are_not_real():
    """A function with an imaginary part anywhere is not real."""
    for expression in ("i*x", "exp(i*x)", "x + 1e-9*i", "where(x > 7, i, 0)"):
        assert not function(expression).is_real


def test_comparisons_and_logic():
    """Comparisons give 1 and 0, chains mean `and`, `step(0)` is 1, `sign(0)` is 0."""
    x = np.array([-1.0, 0.0, 1.0, 2.0])
    assert list(function("0 < x <= 1")(x)) == [0, 0, 1, 0]
    assert list(function("x < 0 or not x < 2")(x)) == [1, 0, 0, 1]
    assert list(function("step(x)")(x)) == [0, 1, 1, 1]
    assert list(function("sign(x)")(x)) == [-1, 0, 1, 1]
    assert list(function("x == 1")(x)) == [0, 0, 1, 0]


def test_where_keeps_the_other_branch_out():
    """What is undefined or infinite in the branch not taken does not come through."""
    values = function("where(x > 0, 1/x, sqrt(-x))")(np.array([-4.0, 0.0, 2.0]))
    assert list(values) == [2.0, 0.0, 0.5]


def test_beyond_the_range_of_doubles():
    """inf/inf and 0*inf inside an expression do not spoil a value that is itself in range."""
    x = np.array([-800.0, 800.0])
    assert list(function("sinh(x)/cosh(x)^2")(x)) == [0.0, 0.0]
    assert list(function("exp(x)/(1 + exp(x))")(x)) == [0.0, 1.0]
    assert function("exp(x)*exp(-x)")(x) == pytest.approx([1, 1], abs=1e-12)
    assert list(function("x^3")(np.array([1e200, -1e200]))) == [np.inf, -np.inf]


def test_values_by_continuity():
    """sin(x)/x and (1 - cos(x))/x^2 are 1 and 1/2 at 0 to their own bounds; a pole stays undefined or infinite."""
    zero = np.zeros(1)
    f = function("sin(x)/x")
    assert abs(f(zero)[0] - 1) <= f.rounding(zero)[0] < 1e-14
    assert not np.isfinite(function("1/x - 1/x^2")(zero)[0])
    assert not np.isfinite(function("1/x^2")(zero)[0])
    assert np.isnan(function("abs(x)/x")(zero)[0])


def test_huge_arguments_do_not_fail():
    """At |x| = 1e300 every function gives a number, inf or nan, without a warning."""
    x = np.array([-1e300, 1e300])
    for name in names():
        assert function(text(name))(x).shape == (2,)


def test_shape_and_constants():
    """The result has the shape of x, also for constants, and `constant` gives their value."""
    f = function("2.5 + 0*x")
    assert f.constant == 2.5
    assert f(np.zeros((2, 3))).shape == (2, 3)
    assert function("x").constant is None


def test_long_and_deep_expressions():
    """A sum of 1,400 terms and a chain of 1,500 definitions are evaluated and differentiated without recursion."""
    f = function(" + ".join(f"{k}*x^{k % 7}" for k in range(1, 1401)))
    assert f(np.array([1.0]))[0] == 1400 * 1401 / 2
    chain = "a0 = x\n" + "\n".join(f"a{k} = sin(a{k - 1}) + {k}" for k in range(1, 1500))
    assert np.isfinite(function("a1499", chain).derivative()(np.array([0.3]))[0])
