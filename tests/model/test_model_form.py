"""Weak forms and Sturm reduction: quadrature of the form equals the operator applied directly (recomputed here)."""

import numpy as np
import pytest
from model_making import function, model, operator

from specterm.errors import PhysicsError
from specterm.language import parse
from specterm.model import build

LAYERS = "layers x: thickness, V, m\n  1 0 0.5\n  2 3 0.7\n  1 0 0.5\nx in layers\n"
NODES, WEIGHTS = np.polynomial.legendre.leggauss(120)
LEFT, RIGHT = "exp(-(x - 0.3)^2)*(1 - x^2)^8", "(1 - x^2)^8*sin(2*x + 0.4)"


def derivatives(text, highest):
    """Return the values of a function and its derivatives at the nodes."""
    f, out = function(text), []
    for _ in range(highest + 1):
        out.append(f(NODES))
        f = f.derivative()
    return out


def by_form(op):
    """Return the form of an operator between the two trial functions, which vanish with 7 derivatives at +-1."""
    f, g = derivatives(LEFT, 8), derivatives(RIGHT, 8)
    return sum(np.sum(WEIGHTS * f[j] * c(NODES) * g[k]) for (j, k), c in op.form().terms)


def directly(op):
    """Return the integral of f times (operator g)."""
    f, g = derivatives(LEFT, 0)[0], derivatives(RIGHT, 8)
    return sum(
        np.sum(WEIGHTS * f * c.value * type(function("x"))(t)(NODES) * g[power])
        for power, pairs in op.normal.items()
        for c, t in pairs
    )


OPERATORS = [
    "p", "x*p", "p*x", "p^2", "p*(1 + x^2)*p", "x^2*p^2", "p^2*x^2", "(p - x^3)^2", "(p^2 - 2)^2", "p^3",
    "x*p^3 + p*cos(x)*p^2", "p*exp(x)*p*sin(x)*p", "exp(i*x)*D*x", "D^4*x", "(x + D)^5",
]  # fmt: skip


@pytest.mark.parametrize("text", OPERATORS)
def test_form_is_the_operator(text):
    """The weak form between two functions is the integral of one times the operator applied to the other, to 1e-10."""
    op = operator(text, "hbar = 0.7")
    assert by_form(op) == pytest.approx(directly(op), rel=1e-10, abs=1e-10)


@pytest.mark.parametrize(
    ("text", "keys"),
    [
        ("p*(1/(2 + x))*p", [(1, 1)]), ("x*p", [(0, 1)]), ("p*x", [(1, 0)]), ("x*p + p*x", [(0, 1), (1, 0)]),
        ("(p - x)^2", [(0, 0), (0, 1), (1, 0), (1, 1)]), ("p^4", [(2, 2)]), ("p^2", [(1, 1)]), ("x", [(0, 0)]),
        ("commutator(x, p*exp(x)*p)", [(0, 1), (1, 0)]), ("commutator(x, commutator(x, p*exp(x)*p))", [(0, 0)]),
    ],
)  # fmt: skip
def test_shape_of_the_form(text, keys):
    """The form has the terms one would write by hand, and no others."""
    assert [key for key, _ in operator(text).form().terms] == keys


def test_jumps_are_not_differentiated():
    """With layers, p (1/(2m)) p, V p + p V and commutators with x have forms free of edges."""
    m = model(LAYERS + "H = p*(1/(2*m))*p + V\nA = V*p + p*V\nC = commutator(x, H)\nE = commutator(x, C)")
    for op in m.operators.values():
        assert not any(c.has_edge for _, c in op.form().terms)
    assert m.operators["C"].order == 1
    assert m.operators["E"].function(np.array([0.5, 2.0])) == pytest.approx([-2.0, -1 / 0.7])


def test_sturm_of_a_vector_potential():
    """(p - A)^2/2 + V has K = hbar^2/2, B = -hbar A, V + A^2/2 (recomputed here)."""
    x = np.array([0.3, 1.2])
    s = operator("(p - x^3)^2/2 + cos(x)", "hbar = 0.7").sturm()
    assert s.K.constant == pytest.approx(0.245)
    assert s.B(x) == pytest.approx(-0.7 * x**3)
    assert s.V(x) == pytest.approx(np.cos(x) + x**6 / 2)
    assert s.K.is_real
    assert s.B.is_real
    assert s.V.is_real


def test_sturm_of_dilation_and_of_second_order():
    """Both x p + p x (B = 2 hbar x, K = V = 0), its half and p^2 x^2 + x^2 p^2 = 2 p x^2 p - 2 hbar^2 come out right."""
    x = np.array([0.3, 1.2])
    for text, factor in (("x*p + p*x", 2), ("x*p - i*hbar/2", 1)):
        s = operator(text, "hbar = 0.7").sturm()
        assert s.K.constant == 0
        assert s.B(x) == pytest.approx(0.7 * factor * x)
        assert s.V(x) == pytest.approx([0, 0], abs=1e-15)
    s = operator("p^2*x^2 + x^2*p^2", "hbar = 0.7").sturm()
    assert s.B is None
    assert s.K(x) == pytest.approx(2 * 0.49 * x**2)
    assert s.V(x) == pytest.approx([-2 * 0.49] * 2)


def test_sturm_is_real_for_phases():
    """exp(i x) p^2 exp(-i x) = (p - hbar)^2: K, B and V come out real."""
    s = operator("exp(i*x)*p^2*exp(-i*x)").sturm()
    x = np.array([0.3, 1.2])
    assert s.K(x) == pytest.approx([1, 1])
    assert s.B(x) == pytest.approx([-2, -2])
    assert s.V(x) == pytest.approx([1, 1])
    assert s.V(x).dtype == float


def test_differentiated_jumps_are_refused():
    """V p^2 + p^2 V with a V that jumps has no Sturm form; the advice is p V p. Nor can an edge be evaluated."""
    m = model(LAYERS + "H = V*p^2 + p^2*V")
    assert m.operator.hermitian() is None
    with pytest.raises(PhysicsError, match="second derivative") as found:
        m.operator.sturm()
    assert "p*f*p" in found.value.mend
    with pytest.raises(PhysicsError, match="jumps"):
        m.functions["V"].derivative()(np.array([0.5]))


def test_smooth_choices_have_no_edge():
    """A `where` whose branches meet can be differentiated, to as many orders as they meet; one that jumps cannot."""
    meeting = function("where(x < 0.3, x^2, 0.6*x - 0.09)")
    assert not meeting.derivative().has_edge
    assert meeting.derivative()(np.array([0.1, 1.0])) == pytest.approx([0.2, 0.6])
    assert not meeting.derivative().derivative().has_edge
    assert meeting.derivative().derivative().derivative().has_edge
    assert function("where(x < 0.3, x^2, x)").derivative().has_edge
    assert not function("abs(x)").derivative().has_edge
    assert function("abs(x)").derivative().derivative().has_edge


@pytest.mark.parametrize("shift", ["0", "250.33", "-98765.4"])
def test_a_sum_of_narrow_wells_far_away_does_not_vanish(shift):
    """Functions that are zero to rounding at every usual place still count, wherever and however narrow they are."""
    text = f"V = -2.7*exp(-((x - ({shift}))/0.9)^2) - 0.02*sech((x - ({shift}))/1e-3)^2"
    model = build(parse(text + "\nH = p^2/2 + V\nx in (-inf, inf)"))
    place = np.array([float(shift)])
    assert np.allclose(model.operator.sturm().V(place), -2.72, rtol=1e-12)


def test_an_imaginary_well_far_away_is_not_hermitian():
    """A complex potential is found though it is zero at every usual place of comparison."""
    model = build(parse("V = exp(-((x - 250.3)/0.01)^2)\nH = p^2/2 + x^2/2 + i*V\nx in (-inf, inf)"))
    assert model.operator.hermitian() is not None
