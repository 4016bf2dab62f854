"""Operator algebra: identities that hold exactly (standard operator calculus, recomputed here)."""

import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from model_making import function, model, operator

from specterm.errors import SheetError
from specterm.model import Operator

X = np.array([-1.7, -0.3, 0.4, 1.1, 2.3])


def apply(op: Operator, text):
    """Return the values of an operator applied to a function, at X."""
    g = function(text)
    total = np.zeros(X.shape, dtype=complex)
    for power, pairs in op.normal.items():
        slope = g
        for _ in range(power):
            slope = slope.derivative()
        for c, t in pairs:
            total = total + c.value * type(g)(t)(X) * slope(X)
    return total


def same(a, b, rest="hbar = 0.7"):
    """Say whether two expressions are the same operator: their difference vanishes on a test function, to rounding."""
    left, right = operator(a, rest), operator(b, rest)
    trial = "exp(-x^2/3)*(1 + x + sin(2*x))"
    return np.allclose(apply(left, trial), apply(right, trial), rtol=1e-11, atol=1e-11)


IDENTITIES = [
    ("p", "-i*hbar*D"),
    ("p*x - x*p", "-i*hbar"),
    ("commutator(x, p)", "i*hbar"),
    ("commutator(x^3, p)", "3*i*hbar*x^2"),
    ("commutator(p^2, x)", "-2*i*hbar*p"),
    ("D*sin(x)", "sin(x)*D + cos(x)"),
    ("D^2*exp(x)", "exp(x)*(D + 1)^2"),
    ("(p - x^2)^2", "p^2 - p*x^2 - x^2*p + x^4"),
    ("(p + i*x)*(p - i*x)", "p^2 + x^2 - hbar"),
    ("p*x^2*p", "x^2*p^2 - 2*i*hbar*x*p"),
    ("dagger(x*p)", "p*x"),
    ("dagger(D)", "-D"),
    ("dagger(i*x*D^2)", "-i*D^2*x"),
    ("dagger(p*sin(x)*p^2)", "p^2*sin(x)*p"),
    ("dagger((x + i*p)*(x^2 + p))", "(x^2 + p)*(x - i*p)"),
    ("p/2", "0.5*p"),
    ("p^2/(1 + x^2)", "p^2*(1/(1 + x^2))"),
    ("-p^0", "-1"),
    ("commutator(x, commutator(p*(1 + x^2)*p, x))", "2*hbar^2*(1 + x^2)"),
]


@pytest.mark.parametrize(("left", "right"), IDENTITIES)
def test_identities(left, right):
    """Both sides act alike on a function."""
    assert same(left, right)


def test_same_can_fail():
    """The comparison used here sees a wrong sign and a wrong order of factors."""
    assert not same("p*x", "x*p")
    assert not same("D", "-D")
    assert not same("dagger(x*p)", "x*p")


@pytest.mark.parametrize(
    ("text", "order"),
    [
        ("p", 1), ("p^2 + x", 2), ("x", 0), ("commutator(x, p)", 0), ("commutator(x, p^2)", 1), ("(p^2 - 1)^2", 4),
        ("commutator(x, commutator(x, p^2/2 + x^4))", 0), ("p^2*sin(x) - sin(x)*p^2", 1), ("sin(x)^2*D + cos(x)^2*D - D", 0),
        ("p^16", 16),
    ],
)  # fmt: skip
def test_order(text, order):
    """The order is that of what is left after cancellation."""
    assert operator(text).order == order


POLYNOMIAL = st.lists(
    st.tuples(st.integers(-3, 3).filter(bool), st.integers(0, 2), st.integers(0, 2)), min_size=1, max_size=3
).map(lambda terms: " + ".join(f"({c})*x^{k}*p^{n}" for c, k, n in terms))


@given(POLYNOMIAL, POLYNOMIAL, POLYNOMIAL)
@settings(max_examples=60, deadline=None, derandomize=True)
def test_jacobi_identity(a, b, c):
    """[a, [b, c]] + [b, [c, a]] + [c, [a, b]] = 0 for polynomial operators."""
    f, g, h = operator(a), operator(b), operator(c)
    total = f.commutator(g.commutator(h)) + g.commutator(h.commutator(f)) + h.commutator(f.commutator(g))
    assert all(abs(value.value) < 1e-9 for pairs in total.normal.values() for value, _ in pairs)


@given(POLYNOMIAL, POLYNOMIAL)
@settings(max_examples=60, deadline=None, derandomize=True)
def test_adjoint_of_a_product(a, b):
    """dagger(a b) = dagger(b) dagger(a), and dagger(dagger(a)) = a."""
    f, g = operator(a), operator(b)
    gap = f.compose(g).adjoint() - g.adjoint().compose(f.adjoint())
    again = f.adjoint().adjoint() - f
    assert all(abs(value.value) < 1e-9 for op in (gap, again) for pairs in op.normal.values() for value, _ in pairs)


@pytest.mark.parametrize(
    "text", ["p^17", "(p^4)^5", "(p + x)^9*p^8", "(x*p + p*x + p^2 + x + D + D*x^2 + x^2*D)^8", "(p - x)^16"]
)
def test_limits(text):
    """Orders above 16 and more than 10,000 terms are refused at once."""
    start = time.perf_counter()
    with pytest.raises(SheetError, match=r"order|terms"):
        operator(text)
    assert time.perf_counter() - start < 60


def test_hbar_belongs_to_p():
    """The momentum is -i hbar D with the sheet's hbar, the one of the units, or 1."""
    assert operator("p", "hbar = 0.37").words[0].coefficient.value == pytest.approx(-0.37j)
    units = model("units: energy eV, length nm, mass m_e\nx in (0, 1)")
    assert units.observable("p").words[0].coefficient.value == pytest.approx(-1j * units.hbar)
    assert units.hbar**2 / 2 == pytest.approx(0.0380998211, rel=1e-8)  # hbar^2/(2 m_e) in eV nm^2, CODATA 2022


def test_names_of_momentum_and_derivative():
    """`px` and `Dx` are second names for the only coordinate x; the user's D is a number and leaves p alone."""
    assert operator("px").words == operator("p").words
    assert operator("Dx").words == operator("D").words
    assert model("D = 3\nH = p^2 + D").operator.sturm().V.constant == 3
    assert model("phi in ring(0, 2*pi)\nH = p^2").operator.order == 2
