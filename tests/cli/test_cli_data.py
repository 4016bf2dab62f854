"""JSON and CSV: the keys and types of the contract, all digits, null where there is nothing."""

import csv
import io
import json

import pytest
from command_line import COHERENT, QUARTIC

NUMBER = (int, float)
LEVEL = {
    "index": int, "value": float, "error": (float, type(None)), "kind": str, "nodes": (int, type(None)),
    "parity": (str, type(None)), "width": (float, type(None)),
}  # fmt: skip
LEVELS = {
    "operator": str, "units": dict, "levels": list, "bound": (int, type(None)), "threshold": (float, type(None)),
    "complete": bool, "domain": dict, "basis": str, "seconds": float, "notes": list,
}  # fmt: skip
WEIGHTS = {"state": str, "weights": list, "captured": float, "mean": float, "spread": float}
WEIGHT = {"index": int, "value": float, "weight": float, "error": float, "amplitude": list}


def assert_typed(data, keys):
    """Assert that all keys are there with their types."""
    for key, kind in keys.items():
        assert key in data
        assert isinstance(data[key], kind), f"{key}: {data[key]!r}"


SHEETS = [
    QUARTIC,
    "H = p^2 - 2/cosh(x)^2; x in (-inf, inf)",
    "H = p^2 + cos(x); x in ring(0, 2*pi), phase 0.3",
    "H = p^4 + x^2; x in (-inf, inf)",
    "H = p^2 + exp(-x^2); x in (-inf, inf)",
    "units: energy meV, length nm, mass m_e; m = 0.067; H = p^2/(2*m); x in (0, 10)",
]


@pytest.mark.parametrize("sheet", SHEETS)
def test_levels_json(run, sheet):
    """`levels --json` has the keys and types of the contract, whatever the sheet."""
    ran = run("levels", "-e", sheet, "-n", 3, "--json")
    assert ran.status == 0
    data = json.loads(ran.out)
    assert_typed(data, LEVELS)
    for level in data["levels"]:
        assert_typed(level, LEVEL)
        assert set(level) == set(LEVEL)
    assert set(data["units"]) == {"energy", "length", "mass", "time"}


def test_levels_json_values(run):
    """Values are those of the engine with all digits; box levels have no error; null stands for infinite and for none."""
    data = json.loads(run("levels", "-e", SHEETS[1], "-n", 2, "--json").out)
    assert data["levels"][0]["value"] == pytest.approx(-1, rel=1e-14)
    assert [level["kind"] for level in data["levels"]] == ["bound", "box"]
    assert data["levels"][1]["error"] is None
    assert (data["bound"], data["threshold"], data["complete"]) == (1, 0, True)
    assert data["domain"]["left"] is None
    quartic = run("levels", "-e", QUARTIC, "-n", 3, "--json").out
    assert json.loads(quartic)["bound"] is None
    value = json.loads(quartic)["levels"][1]["value"]
    assert f'"value": {value!r}' in quartic


def test_units_of_the_sheet(run):
    """With units the names are told; hbar^2 pi^2/(2 m L^2) of 10 nm and 0.067 m_e is 56.1245 meV (scipy.constants, redone)."""
    data = json.loads(run("levels", "-e", SHEETS[5], "-n", 1, "--json").out)
    assert (data["units"]["energy"], data["units"]["length"]) == ("meV", "nm")
    assert data["levels"][0]["value"] == pytest.approx(56.1237, rel=1e-4)


def test_weights_json(run):
    """`weights --json` has its keys, amplitudes as pairs, weights as their squares."""
    ran = run("weights", "-e", COHERENT, "s", "-n", 4, "--json")
    data = json.loads(ran.out)
    assert_typed(data, WEIGHTS)
    for weight in data["weights"]:
        assert_typed(weight, WEIGHT)
        re, im = weight["amplitude"]
        assert re * re + im * im == pytest.approx(weight["weight"], rel=1e-12)
    assert data["state"] == "s"
    assert data["captured"] == pytest.approx(sum(w["weight"] for w in data["weights"]), rel=1e-14)


def test_check_json(run):
    """`check --json` says ok, or where and what, and how to mend it."""
    good = json.loads(run("check", "-e", QUARTIC, "--json").out)
    assert (good["ok"], good["problems"]) == (True, [])
    ran = run("check", "-e", "H = p^2 + kappa*x^2; x in (-inf, inf)", "--json")
    bad = json.loads(ran.out)
    assert (ran.status, bad["ok"]) == (2, False)
    assert_typed(bad["problems"][0], {"line": int, "column": int, "message": str, "mend": str})
    assert (bad["problems"][0]["line"], bad["problems"][0]["column"]) == (1, 11)
    ran = run("check", "-e", "H = x*p; x in (-inf, inf)", "--json")
    assert ran.status == 1
    assert "Hermitian" in json.loads(ran.out)["problems"][0]["message"]


def test_presets_json(run):
    """`presets --json` lists name and title."""
    data = json.loads(run("presets", "--json").out)
    assert len(data["presets"]) > 3
    for preset in data["presets"]:
        assert set(preset) == {"name", "title"}


def test_levels_csv(run):
    """`levels --csv` loads with the csv module and holds what JSON holds, empty where that has null."""
    words = ("levels", "-e", SHEETS[1], "-n", 3)
    rows = list(csv.DictReader(io.StringIO(run(*words, "--csv").out)))
    levels = json.loads(run(*words, "--json").out)["levels"]
    assert list(rows[0]) == list(LEVEL)
    for row, level in zip(rows, levels, strict=True):
        for key, value in level.items():
            assert row[key] == ("" if value is None else repr(value) if isinstance(value, float) else str(value))


def test_weights_csv(run):
    """`weights --csv` loads with the csv module, real and imaginary parts apart."""
    rows = list(csv.DictReader(io.StringIO(run("weights", "-e", COHERENT, "s", "-n", 4, "--csv").out)))
    assert list(rows[0]) == ["index", "value", "weight", "error", "amplitude_re", "amplitude_im"]
    assert float(rows[0]["weight"]) == pytest.approx(0.6065306597126334, abs=1e-10)  # exp(-1/2), recomputed here


def test_check_and_presets_csv(run):
    """`check --csv` and `presets --csv` load with the csv module."""
    rows = list(csv.reader(io.StringIO(run("check", "-e", "H = p^2 + q; x in (0, 1)", "--csv").out)))
    assert rows[0] == ["line", "column", "message", "mend"]
    assert rows[1][:2] == ["1", "11"]
    assert next(csv.reader(io.StringIO(run("presets", "--csv").out))) == ["name", "title"]


def test_one_form_at_a_time(run):
    """JSON and CSV together are refused."""
    assert run("levels", "-e", QUARTIC, "--json", "--csv").status == 2
