"""What the physics refuses: one table from the operator to words of the message; and work that is stopped."""

import itertools

import pytest
from spectrum_making import model

from specterm.errors import PhysicsError, WorkStopped
from specterm.spectrum import solve

REFUSED = [
    ("H = x*p; x in (-inf, inf)", "Hermitian", "(x*p + p*x)/2"),
    ("H = p^2 + i*x; x in (-inf, inf)", "Hermitian", "complex"),
    ("m = 1 + x^2; H = p^2/(2*m); x in (-inf, inf)", "Hermitian", "p*"),
    ("H = p^2 - x^2; x in (-inf, inf)", "not bounded below", "lowest"),
    ("H = p^2 - x^4; x in (-inf, inf)", "not bounded below", "outgoing"),
    ("H = p^2 + x^3; x in (-inf, inf)", "not bounded below", "wall"),
    ("H = p^2 - exp(x); x in (-inf, inf)", "not bounded below", "lowest"),
    ("H = p^2 - 1/x^2; x in (0, inf)", "not bounded below", "inverse square"),
    ("H = p^2 - 1/x^4; x in (0, 1)", "not bounded below", "lowest"),
    ("H = p^2 + cos(x); x in (-inf, inf)", "bands", "ring"),
    ("H = p^2 - 1/abs(x); x in (-inf, inf)", "singular", "end the domain there"),
    ("H = p^2 + 1/(x-0.25)^2; x in (0, 1)", "singular", "0.25"),
    ("H = p^2 + tan(x); x in (0, pi)", "singular", "1.57"),
    ("H = p^2 + sqrt(x); x in (-1, 1)", "no value", "end"),
    ("H = p*x*p; x in (-1, 1)", "one sign", "positive"),
    ("H = p*x^2*p; x in (0, 1)", "too singular", "inwards"),
    ("H = p; x in (-inf, inf)", "continuous", "ring"),
    ("H = p; x in (0, inf)", "self-adjoint", "ring"),
]


@pytest.mark.parametrize(("text", "words", "more"), REFUSED)
def test_refused(text, words, more):
    """The refusal says why, and where there is one, the form to use."""
    with pytest.raises(PhysicsError) as caught:
        solve(model(text), count=3)
    told = caught.value.message + " " + caught.value.mend
    assert words in told
    assert more in told
    assert caught.value.mend


LONG = ["H = p^2 + x^4; x in (-inf, inf)", "H = p^2 - 2/x; x in (0, inf)", "H = p^4 + x^2; x in (-inf, inf)"]


@pytest.mark.parametrize(("text", "patience"), [(LONG[2], 0), *((text, n) for text in LONG[:2] for n in (0, 1, 2, 5))])
def test_stopped(text, patience):
    """Work stops at the next question after it is told to: WorkStopped, whenever that is."""
    asked = itertools.count()
    with pytest.raises(WorkStopped):
        solve(model(text), count=60, should_stop=lambda: next(asked) >= patience)


def test_asked_often():
    """The question is asked again and again while the work goes on, not only at its start."""
    asked = itertools.count()
    solve(model(LONG[0]), count=60, should_stop=lambda: next(asked) < 0)
    assert next(asked) >= 5


def test_progress_is_told():
    """Progress comes in words with the number of unknowns."""
    told = []
    solve(model(LONG[0]), count=5, progress=told.append)
    assert told
    assert all("unknowns" in words for words in told)
