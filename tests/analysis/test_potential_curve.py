"""The potential to be drawn, recomputed here."""

import numpy as np
import pytest
from analysis_making import model

from specterm.analysis import potential_curve

X = np.linspace(-2, 2, 9)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("H = p^2 + x^4; x in (-inf, inf)", X**4),
        ("H = p*(1/(2 + x^2))*p + x; x in (-3, 3)", X),
        ("H = p^2; x in (-3, 3)", 0 * X),
        ("A = 3*x; H = (p - A)^2 + x^2; x in (-inf, inf)", X**2),
        ("H = p^4 + x^2; x in (-inf, inf)", X**2),
        ("H = p^4; x in ring(0, 1)", 0 * X),
        ("H = p + cos(x); x in ring(0, 2*pi)", np.cos(X)),
    ],
)
def test_potential(text, expected):
    """What is left of the operator when the momentum is at its best; 0 where there is nothing."""
    np.testing.assert_allclose(potential_curve(model(text), X), expected, rtol=0, atol=1e-13)


def test_poles_are_let_through():
    """Where the potential is infinite the curve is, without a warning."""
    assert potential_curve(model("H = p^2 + 2/x^2; x in (0, inf)"), np.array([0.0, 1.0])).tolist() == [np.inf, 2.0]
