"""Edges to the last bit, centres over 80 decades (recomputed here from the definitions)."""

import math

import numpy as np
import pytest
from model_making import function, model

INF = math.inf

EDGES = [
    ("step(x - 0.3)", [0.3]),
    ("0 < x < 2", [0, 2]),
    ("where(x > -1.1 and x < 3.7, 1, 0)", [-1.1, 3.7]),
    ("abs(x - 1.93)*sign(x + 1e-20)", [-1e-20, 1.93]),
    ("abs(x)^3", [0]),
    ("step(x^2 - 2)", [-math.sqrt(2), math.sqrt(2)]),
    ("step(x^2 - 1e-30)", [-1e-15, 1e-15]),
    ("step(x^2)", []),
    ("step(x^2 + 1)", []),
    ("where(x^3 < 8, 1, 2)", [2]),
    ("where(exp(x) < 3, 1, 2)", [math.log(3)]),
    ("max(x, 1)", [1]),
    ("min(x, 2 - x, 0.5)", [0.5, 1, 1.5]),
    ("max(x, 1 - x, exp(x) - 1)", None),
    ("sin(abs(x - 0.1)) + exp(where(x < 0.7, 1, 0))", [0.1, 0.7]),
    ("where(x < 1e25, 0, 1)", [1e25]),
    ("step(tanh(x - 5))", [5]),
    ("exp(-x^2)", []),
    ("where(x - 1/3, x, 1)", [1 / 3]),
]


@pytest.mark.parametrize(("text", "wanted"), [row for row in EDGES if row[1] is not None])
def test_edges(text, wanted):
    """The edges are where they should be, to one unit in the last place."""
    found = function(text).edges(-INF, INF)
    assert len(found) == len(wanted)
    assert np.all(np.abs(found - wanted) <= np.spacing(np.abs(wanted)))


def test_edges_are_strictly_inside():
    """Edges at the ends of the interval are left out."""
    f = function("where(0 < x < 2, 1, 0) + abs(x - 1)")
    assert list(f.edges(0, 2)) == [1]
    assert list(f.edges(0.5, 0.9)) == []


def test_edges_of_steps():
    """Both floor and ceil jump at every whole number of their argument."""
    assert list(function("floor(2*x)").edges(-1.1, 1.1)) == [-1, -0.5, 0, 0.5, 1]
    assert function("mod(x, 1)").edges(-2.5, 2.5) == pytest.approx([-2, -1, 0, 1, 2], abs=1e-15)


def test_edges_of_oscillating_conditions():
    """On a finite interval every sign change of sin(3 x) is found."""
    found = function("step(sin(3*x))").edges(0.1, 20)
    assert found == pytest.approx(np.pi / 3 * np.arange(1, 20), rel=1e-14)


def test_edges_follow_parameters_and_layers():
    """Parameters move the edges; layers have theirs at the inner boundaries."""
    m = model("a = 1.93\nw = 0.1\nV = where(abs(x - a) < w, 0, 1)\nx in (0, inf)\nH = p^2 + V")
    assert m.functions["V"].edges(0, INF) == pytest.approx([1.83, 1.93, 2.03], rel=1e-15)
    m = model("layers x from -5: thickness, V, m\n 5 1 2\n 6.1 0 3\n 5 1 2\nx in (-inf, inf)\nH = p*(1/m)*p + V")
    assert list(m.functions["V"].edges(-INF, INF)) == [0.0, 6.1]


CENTRES = [
    ("(x - 1.93)^2", [0, 1.93]),
    ("(1 - exp(-2.3*(x - 1.1391)))^2", [0, 1.1391]),
    ("exp(-((x - 5000)/3)^2)", [0, 5000]),
    ("(x^2 - 1.83^2)^2", [-1.83, 0, 1.83]),
    ("cosh(x) - 2", [-math.acosh(2), 0, math.acosh(2)]),
    ("1/(x^3 - 1e-24)", [0, 1e-8]),
    ("x^5 - 1e60*x", [-1e15, 0, 1e15]),
]


@pytest.mark.parametrize(("text", "wanted"), CENTRES)
def test_centres(text, wanted):
    """The zeros of every sum in the expression are found, whatever their scale."""
    found = function(text).centres(-INF, INF)
    assert found == pytest.approx(wanted, rel=1e-13, abs=1e-300)


def test_centres_stay_inside():
    """Centres outside the domain are left out, the ends themselves are allowed."""
    assert list(function("(x - 3)*(x + 3)").centres(0, 5)) == [0, 3]


def test_knots():
    """Only tables have knots."""
    assert function("abs(x) + step(x)").knots() == 0
