"""`expectation`, `transitions` and `evolve`: keys of the contract, closed forms of the oscillator (recomputed here)."""

import csv
import io
import json
import math

import pytest
from command_line import COHERENT, QUARTIC

OSCILLATOR = "H = p^2/2 + x^2/2; x in (-inf, inf)"


def data(run, *words):
    """Return what a verb answers as JSON."""
    ran = run(*words, "--json")
    assert ran.status == 0, ran.err
    return json.loads(ran.out)


@pytest.mark.parametrize(
    ("observable", "which", "mean", "spread"),
    [
        ("x", ("--state", "s"), 1, math.sqrt(0.5)),
        ("p", ("--state", "s"), 0, math.sqrt(0.5)),
        ("H", ("--state", "s"), 1, math.sqrt(0.5)),
        ("x^2", ("--level", "1"), 1.5, math.sqrt(1.5)),
        ("p^2", ("--level", "2"), 2.5, math.sqrt(3.5)),
        ("x*p + p*x", ("--level", "1"), 0, math.sqrt(6)),
    ],
)
def test_expectation(run, observable, which, mean, spread):
    """Mean and spread of an observable in a level or a state, within the error told."""
    found = data(run, "expectation", "-e", COHERENT, observable, *which)
    assert {"observable", "mean", "spread", "error"} <= set(found)
    assert abs(found["mean"] - mean) <= found["error"] + 1e-15
    assert found["spread"] == pytest.approx(spread, rel=1e-8)
    assert found["error"] < 1e-8  # eight digits are of use


def test_transitions(run):
    """Lines of an oscillator: only neighbours, strength n + 1 up and -n down, |dipole|^2 = (n + 1)/2, and the sum rule 1."""
    up = data(run, "transitions", "-e", OSCILLATOR, "-n", 5)
    down = data(run, "transitions", "-e", OSCILLATOR, "-n", 5, "--from", 3)
    for found in (up, down):
        assert {"transitions", "sum_rule"} <= set(found)
        for line in found["transitions"]:
            assert {"from", "to", "energy", "dipole", "strength", "wavelength"} <= set(line)
            n, m = line["from"], line["to"]
            expected = {n + 1: n + 1, n - 1: -n}.get(m, 0)
            assert line["energy"] == pytest.approx(m - n, abs=1e-11)
            assert line["strength"] == pytest.approx(expected, abs=1e-9)
            assert line["dipole"][0] ** 2 + line["dipole"][1] ** 2 == pytest.approx(abs(expected) / 2, abs=1e-9)
        assert found["sum_rule"] == pytest.approx(1, abs=1e-9)


def test_evolve(run):
    """A coherent state survives with exp(cos t - 1) for a displacement of 1, its mean goes as cos t, its spread stays."""
    found = data(run, "evolve", "-e", COHERENT, "s", "--times", "0:6.2831853071795865:5")
    assert {"times", "survival", "mean", "spread"} <= set(found)
    assert found["times"] == pytest.approx([k * math.pi / 2 for k in range(5)])
    assert found["survival"] == pytest.approx([math.exp(math.cos(t) - 1) for t in found["times"]], abs=1e-9)
    assert found["mean"] == pytest.approx([math.cos(t) for t in found["times"]], abs=1e-9)
    assert found["spread"] == pytest.approx([math.sqrt(0.5)] * 5, abs=1e-9)


def test_times_as_a_list(run):
    """Times may be a comma list."""
    assert data(run, "evolve", "-e", COHERENT, "s", "--times", "0,0.5,2")["times"] == [0, 0.5, 2]


CSV = [
    ("expectation", ("x",), "mean"),
    ("transitions", (), "strength"),
    ("evolve", ("s", "--times", "0:1:3"), "survival"),
]


@pytest.mark.parametrize(("verb", "words", "column"), CSV)
def test_csv(run, verb, words, column):
    """CSV of every verb loads with the csv module, and its numbers are numbers."""
    rows = list(csv.DictReader(io.StringIO(run(verb, "-e", COHERENT, *words, "--csv").out)))
    assert rows
    for row in rows:
        float(row[column])
        assert None not in row
        assert None not in row.values()


MALFORMED = [
    ("expectation", "-e", QUARTIC),
    ("expectation", "-e", QUARTIC, "kappa"),
    ("expectation", "-e", QUARTIC, "((("),
    ("expectation", "-e", QUARTIC, "x", "--state", "nobody"),
    ("expectation", "-e", QUARTIC, "x", "--level", "-1"),
    ("expectation", "-e", QUARTIC, "x", "--level", "one"),
    ("transitions", "-e", QUARTIC, "--dipole", "kappa"),
    ("transitions", "-e", QUARTIC, "--from", "x"),
    ("evolve", "-e", COHERENT, "s"),
    ("evolve", "-e", COHERENT, "nobody", "--times", "0:1:3"),
    ("evolve", "-e", COHERENT, "s", "--times", "0:1:0"),
    ("evolve", "-e", COHERENT, "s", "--times", "a:b:c"),
    ("evolve", "-e", COHERENT, "s", "--times", "0:inf:3"),
    ("evolve", "-e", COHERENT, "s", "--times", ""),
]


@pytest.mark.parametrize("words", MALFORMED, ids=" ".join)
def test_malformed(run, words):
    """What makes no sense ends with exit 2 and a reason, and prints no result."""
    ran = run(*words)
    assert ran.status == 2
    assert ran.err.strip()
    assert ran.out == ""
