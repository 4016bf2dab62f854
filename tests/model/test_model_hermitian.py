"""What is Hermitian, what is not, and the form to use instead (standard rules of operator ordering, recomputed here)."""

import pytest
from model_making import model, operator

LAYERS = "layers x: thickness, V, m\n  1 0 0.5\n  2 3 0.7\n  1 0 0.5\nx in layers\n"

HERMITIAN = [
    "p", "i*D", "p^2", "D^2", "-D^2 + x^4", "x*p + p*x", "(x*p + p*x)/2", "p*x^2*p", "p*exp(x)*p + sin(x)", "(p - x^3)^2",
    "x*p - i/2", "p^2*x^2 + x^2*p^2", "(p^2 - 2)^2 + x", "i*(x*D + 1/2)", "p^3", "dagger(x*p)*(x*p)", "x*p^2 - i*p",
    "exp(i*x)*p*exp(-i*x)", "exp(i*x) + exp(-i*x)", "exp(x)*D*exp(-2*x)*D*exp(x)", "p*abs(x)*p", "7",
    "0.1*p*x + 0.2*x*p - 0.1*x*p", "i*commutator(x, p^2)", "p*where(x < 0, 1, 2)*p", "(p^2)^8",
]  # fmt: skip

REFUSED = [
    ("x*p", "x*p", "(x*p + p*x)/2"),
    ("p*x", "p*x", "(p*x + x*p)/2"),
    ("x^2*p^2", "x^2*p^2", "p*x^2*p"),
    ("p^2*x^2/2", "0.5*p^2*x^2", "0.5*p*x^2*p"),
    ("D", "", "i*D"),
    ("i*p", "", "i*D"),
    ("p^2 + i*x", "complex", "real"),
    ("p^2/2 + x^2/2 + 0.1*i*x", "complex", "real"),
    ("i*p*x*p", "", "wrong phase"),
    ("sin(x)*p^3", "sin(x)*p^3", "(sin(x)*p^3 + p^3*sin(x))/2"),
    ("x*p - 0.4*i", "x*p", "x*p"),
    ("x*p + p*x + 1e-6*x*p", "x*p", ""),
    ("abs(x)*p^2", "abs(x)*p^2", "p*abs(x)*p"),
    ("p*x*p + exp(i*x)", "complex", ""),
]


@pytest.mark.parametrize("text", HERMITIAN)
def test_accepted(text):
    """An operator that equals its adjoint is Hermitian."""
    assert operator(text, "hbar = 1").hermitian() is None


@pytest.mark.parametrize(("text", "reason", "mend"), REFUSED)
def test_refused(text, reason, mend):
    """An operator that is not its own adjoint is refused, the word named, and a form to use proposed."""
    found = operator(text).hermitian()
    assert found is not None
    assert "not Hermitian" in found.reason
    assert reason in found.reason
    assert mend in found.mend


def test_layered_mass():
    """With a mass that jumps, (1/(2m)) p^2 is refused in favour of p (1/(2m)) p, which is accepted."""
    found = model(LAYERS + "H = (1/(2*m))*p^2 + V").operator.hermitian()
    assert found is not None
    assert found.mend == "use the symmetric form 0.5*p*(1/m)*p"
    assert model(LAYERS + "H = p^2/(2*m) + V").operator.hermitian() is not None
    assert model(LAYERS + "H = p*(1/(2*m))*p + V").operator.hermitian() is None
    assert model(LAYERS + "H = m^(-1/4)*p*m^(-1/2)*p*m^(-1/4) + V").operator.hermitian() is None


def test_user_names_appear():
    """The form proposed uses the user's name of a function."""
    found = model("k = exp(1.7*x)\nH = k*p^2\nx in (0, 1)").operator.hermitian()
    assert found is not None
    assert found.mend == "use the symmetric form p*k*p"


def test_small_domains_and_ranges():
    """The test works where the functions live: on a domain of 1e-9, far from 0, and where sqrt is undefined outside."""
    assert model("x in (0, 1e-9)\nH = x*p").operator.hermitian() is not None
    assert model("x in (5000, 5001)\nH = p*sqrt(x - 4999)*p").operator.hermitian() is None
    assert model("x in (5000, 5001)\nH = sqrt(x - 4999)*p^2").operator.hermitian() is not None
