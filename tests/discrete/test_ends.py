"""What the coefficients do at the ends: one table for finite ends, one for open ones, one for refusals.

Powers are the larger roots of the indicial equation (Frobenius, recomputed here); a 1/x^2 tail of strength c binds infinitely
many levels from c < -1/4 on (Hardy's inequality, recomputed here).
"""

import math

import pytest
from discrete_making import problem

from specterm.discrete.ends import far_end, near_end, refuse_inner_poles
from specterm.errors import PhysicsError

NEAR = [
    ("H = p^2 + x; x in (0, 5)", 0, "wall", 0, 0),
    ("H = p^2 + x; x in (0, 5), free", 0, "free", 0, 0),
    ("H = p^2 + x; x in (0, 5), free right", 0, "wall", 0, 0),
    ("H = p^2 + x; x in (0, 5), free right", 1, "free", 0, 0),
    ("H = p^2 + sqrt(x); x in (0, 5)", 0, "wall", 0, 0),
    ("H = p^2 - 1/x; x in (0, inf)", 0, "power", 1, 0),
    ("H = p^2 + 2/x^2 - 1/x; x in (0, inf)", 0, "power", 2, 0),
    ("H = p^2 + 12/x^2 - 1/x; x in (0, inf)", 0, "power", 4, 0),
    ("H = p^2 - 1/(4*x^2) + x^2; x in (0, inf)", 0, "power", 0.5, 0),
    ("H = p^2 - 0.21/x^2 + x^2; x in (0, inf)", 0, "power", 0.7, 0),
    ("H = p^2 + 2.99/x^2 + x^2; x in (0, inf)", 0, "power", 2.3, 0),
    ("H = p^2 + 2/(5-x)^2; x in (0, 5)", 1, "power", 2, 0),
    ("H = p^2/2 + 1/x^2; x in (0, 5)", 0, "power", 2, 0),
    ("H = p^2 + 2/sin(x)^2; x in (0, pi)", 0, "power", 2, 0),
    ("H = p^2 + 2/sin(x)^2; x in (0, pi)", 1, "power", 2, 0),
    ("H = p*x*p; x in (0, 1)", 0, "power", 0, 1),
    ("H = p*(1-x^2)*p; x in (-1, 1)", 0, "power", 0, 1),
    ("H = p*(1-x^2)*p + 9/(1-x^2); x in (-1, 1)", 0, "power", 1.5, 1),
    ("H = p*(1-x^2)*p + 9/(1-x^2); x in (-1, 1)", 1, "power", 1.5, 1),
    ("H = p^2 + 42/x^2 + x^2; x in (0, inf)", 0, "steep", 0, 0),
    ("H = p^2 + 1/x^4; x in (0, inf)", 0, "steep", 0, 0),
    ("H = p^2 + 4*(1/x^12 - 1/x^6); x in (0, inf)", 0, "steep", 0, 0),
    ("H = p^2 + exp(1/x); x in (0, 5)", 0, "steep", 0, 0),
]


@pytest.mark.parametrize(("text", "side", "kind", "power", "alpha"), NEAR)
def test_finite_ends(text, side, kind, power, alpha):
    """Kind and powers of a finite end are those of the equation's exponents there."""
    here = problem(text)
    end, place = near_end(here, side), (here.left, here.right)[side]
    slip = 1e-8 if place else 1e-9  # places 4e-8 from an end that is not 0 keep eight digits of their distance
    assert end.kind == kind
    if kind == "power":
        assert end.power == pytest.approx(power, rel=0, abs=slip)
        assert end.alpha == pytest.approx(alpha, rel=0, abs=slip)


FAR = [
    ("H = p^2 + x^2; x in (-inf, inf)", 0, math.inf, False, None),
    ("H = p^2 + x^2; x in (-inf, inf)", 1, math.inf, False, None),
    ("H = p^2 + exp(x); x in (-inf, inf)", 1, math.inf, False, None),
    ("H = p^2 + exp(x); x in (-inf, inf)", 0, 0, False, 0),
    ("H = p^2 + log(1+x^2); x in (-inf, inf)", 1, math.inf, False, None),
    ("H = p^2 + abs(x)^0.2; x in (-inf, inf)", 0, math.inf, False, None),
    ("H = p^2 + tanh(x); x in (-inf, inf)", 0, -1, False, 0),
    ("H = p^2 + tanh(x); x in (-inf, inf)", 1, 1, False, 0),
    ("H = p^2 - exp(-x^2); x in (-inf, inf)", 1, 0, False, 0),
    ("H = p^2 + 7 - exp(-x^2); x in (-inf, inf)", 0, 7, False, 0),
    ("H = p^2 + where(abs(x) < 1, -5, 2); x in (-inf, inf)", 1, 2, False, 0),
    ("H = p^2 - 1/x; x in (0, inf)", 1, 0, True, None),
    ("H = p^2 + 1/x; x in (0, inf)", 1, 0, False, None),
    ("H = p^2 - 1/sqrt(1+x^2); x in (-inf, inf)", 0, 0, True, None),
    ("H = p^2 + 3 - 1/(1+abs(x))^1.5; x in (-inf, inf)", 1, 3, True, None),
    ("H = p^2 - 0.2/(1+x^2); x in (-inf, inf)", 1, 0, False, -0.2),
    ("H = p^2 - 0.24/(1+x^2); x in (-inf, inf)", 1, 0, False, -0.24),
    ("H = p^2 - 0.26/(1+x^2); x in (-inf, inf)", 1, 0, True, -0.26),
    ("H = p^2/2 - 0.1/(1+x^2); x in (-inf, inf)", 1, 0, False, -0.2),
    ("H = p^2/2 - 0.2/(1+x^2); x in (-inf, inf)", 1, 0, True, -0.4),
    ("H = p^2 + 6/(1+x^2) - 9*exp(-x^2); x in (-inf, inf)", 0, 0, False, 6),
    ("H = p^2 - 1/(1+x^4); x in (-inf, inf)", 1, 0, False, 0),
    ("H = p^2 - 1/(1+abs(x))^3; x in (-inf, inf)", 0, 0, False, 0),
]


@pytest.mark.parametrize(("text", "side", "limit", "endless", "tail"), FAR)
def test_open_ends(text, side, limit, endless, tail):
    """Limit, tail (in units where the critical inverse square is -1/4) and whether infinitely many levels lie below."""
    end = far_end(problem(text), side)
    assert end.limit == pytest.approx(limit, rel=1e-9, abs=1e-9)
    assert end.endless is endless
    if tail is not None:
        assert end.tail == pytest.approx(tail, rel=2e-3, abs=1e-3)


REFUSED = [
    ("H = p^2 - 0.26/x^2; x in (0, inf)", "near", 0, "bounded below"),
    ("H = p^2 - 1/x^3; x in (0, 5)", "near", 0, "bounded below"),
    ("H = p^2 - 0.3/(5-x)^2; x in (0, 5)", "near", 1, "too strong"),
    ("H = p*x^2*p; x in (0, 1)", "near", 0, "too singular"),
    ("H = p^2 - x^2; x in (-inf, inf)", "far", 1, "without limit"),
    ("H = p^2 - x; x in (0, inf)", "far", 1, "no lowest level"),
    ("H = p^2 + x^3; x in (-inf, inf)", "far", 0, "no lowest level"),
    ("H = p^2 + cos(x); x in (-inf, inf)", "far", 1, "bands"),
    ("H = p^2 + sin(x) + exp(-x^2); x in (-inf, inf)", "far", 0, "ring"),
]


@pytest.mark.parametrize(("text", "where", "side", "words"), REFUSED)
def test_refused_ends(text, where, side, words):
    """Ends that leave no lowest level, or no value, are refused with the reason."""
    with pytest.raises(PhysicsError) as caught:
        (near_end if where == "near" else far_end)(problem(text), side)
    assert words in caught.value.message + " " + caught.value.mend


@pytest.mark.parametrize("inner", ["1/abs(x-0.3)", "1/(x-0.3)", "1/(x-0.3)^2", "-1/(x-0.3)^2", "1/sin(x-0.3)^2"])
def test_poles_inside_are_named(inner):
    """A pole inside the domain is refused, and its place is told."""
    with pytest.raises(PhysicsError, match=r"singular.*0\.3"):
        refuse_inner_poles(problem(f"H = p^2 + {inner}; x in (-1, 1)"))


@pytest.mark.parametrize("inner", ["abs(x-0.3)^0.5", "1/(1e-6 + (x-0.3)^2)", "where(x < 0.3, 0, 1e9)"])
def test_steep_places_are_no_poles(inner):
    """Cusps, narrow peaks and jumps inside the domain are let through."""
    refuse_inner_poles(problem(f"H = p^2 + {inner}; x in (-1, 1)"))
