"""`figure --view momentum`: text, JSON and CSV; closed forms of the oscillator and the ring."""

import csv
import io
import json
import math

import pytest
from command_line import COHERENT

RING = "H = p^2/2; x in ring(0, 2*pi); state w = exp(3*i*x)"


def test_density_as_data(run):
    """The ground state of the oscillator has exp(-k^2)/sqrt(pi); keys of the JSON."""
    ran = run("figure", "-e", COHERENT, "--view", "momentum", "--json")
    found = json.loads(ran.out)
    assert set(found) == {"state", "unit", "discrete", "held", "momenta", "density"}
    for k, density in zip(found["momenta"], found["density"], strict=True):
        assert density == pytest.approx(math.exp(-k * k) / math.sqrt(math.pi), abs=1e-10)


def test_probabilities_as_rows(run):
    """A wave on a ring has one momentum: one row of the table has probability 1."""
    ran = run("figure", "-e", RING, "--view", "momentum", "--state", "w", "--csv")
    rows = list(csv.reader(io.StringIO(ran.out)))
    assert rows[0] == ["momentum", "probability"]
    assert [float(k) for k, p in rows[1:] if float(p) > 0.5] == [3.0]


def test_drawn(run):
    """The figure has the size asked for and names what it shows."""
    ran = run("figure", "-e", COHERENT, "--view", "momentum", "--levels", "12", "--width", "60", "--height", "12")
    assert ran.status == 0
    assert "level(12): density over momentum" in ran.out
    assert len(ran.out.rstrip("\n").split("\n")) == 12


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("--json",), "only --view momentum has data"),
        (("--view", "momentum", "--levels", "0,1"), "one level or one state"),
        (("--view", "momentum", "--state", "nobody"), "no state `nobody`"),
    ],
)
def test_refused(run, words, told):
    """What cannot be drawn or told is bad input, and says so."""
    ran = run("figure", "-e", COHERENT, *words)
    assert ran.status == 2
    assert told in ran.err
