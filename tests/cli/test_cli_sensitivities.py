"""`sensitivities`: keys of the contract, CSV, text, names; closed forms of the oscillator (recomputed here)."""

import csv
import io
import json

import pytest

OSCILLATOR = "H = p^2/2 + w^2*x^2/2; w = 2; s = 0; F = H + s; diagonalise F; x in (-inf, inf)"


def test_keys(run):
    """JSON has parameters, and for each level its derivatives in that order, with errors, units and notes."""
    ran = run("sensitivities", "-e", OSCILLATOR, "-n", 3, "--json")
    assert ran.status == 0
    found = json.loads(ran.out)
    assert found["parameters"] == ["w", "s"]
    assert found["units"] == ["", ""]
    assert found["notes"] == []
    for n, level in enumerate(found["levels"]):
        assert level["index"] == n
        assert level["value"] == pytest.approx(2 * n + 1)
        assert level["derivatives"] == pytest.approx([n + 0.5, 1])
        assert all(0 <= error < 1e-9 for error in level["errors"])


def test_csv(run):
    """CSV has one line for each level and parameter."""
    ran = run("sensitivities", "-e", OSCILLATOR, "-n", 2, "--csv", "--parameter", "w")
    rows = list(csv.DictReader(io.StringIO(ran.out)))
    assert [(row["level"], row["parameter"]) for row in rows] == [("0", "w"), ("1", "w")]
    assert [float(row["derivative"]) for row in rows] == pytest.approx([0.5, 1.5])
    assert set(rows[0]) == {"level", "parameter", "derivative", "error", "unit"}


def test_lines(run):
    """--transitions gives the derivatives of the lines between all levels."""
    found = json.loads(run("sensitivities", "-e", OSCILLATOR, "-n", 3, "--transitions", "--json").out)
    lines = {(line["from"], line["to"]): line["derivatives"] for line in found["transitions"]}
    assert set(lines) == {(0, 1), (0, 2), (1, 2)}
    assert lines[0, 2] == pytest.approx([2, 0], abs=1e-12)


def test_table(run):
    """The table has levels down and parameters across, a unit where there is one, and `-` where there is no derivative."""
    ran = run("sensitivities", "-e", "H = p^2 + x^2 + x^k; k = 4; g = 2; x in (-inf, inf)", "-n", 2)
    lines = ran.out.splitlines()
    assert lines[1].split() == ["level", "value", "k", "g"]
    assert lines[2].split()[2:] == ["-", "0"]
    assert "no derivative with respect to `k`" in ran.err
    shown = run("sensitivities", "coupled-wells", "-n", 1).out.splitlines()[1]
    assert "F (meV/(kV/cm))" in shown


def test_unknown_name(run):
    """A parameter the sheet does not have is exit 2, with the nearest name."""
    ran = run("sensitivities", "coupled-wells", "--parameter", "gapp")
    assert ran.status == 2
    assert "did you mean `gap`?" in ran.err
