"""The verb `measure`, and figures and options of the other verbs on states and lines."""

import csv
import io
import json

import pytest

WALLS = "H = p^2/2; x in (0, 1); left = x < 1/2; state s = level(0) + i*level(1)"
TRAP = "H = p^2/2 + x^2/2; x in (-inf, inf); state s = exp(-(x - 1)^2/2)"


def data(run, *words):
    """Return what a verb answers as JSON."""
    ran = run(*words, "--json")
    assert ran.status == 0, ran.err
    return json.loads(ran.out)


def test_keys_of_a_record(run):
    """Steps with observable, outcomes of value and probability, and the value drawn (design, section 6)."""
    found = data(run, "measure", "-e", WALLS, "s", "H", "left", "--seed", "4")
    assert [step["observable"] for step in found["steps"]] == ["H", "left"]
    for step in found["steps"]:
        assert {"value", "probability"} <= set(step["outcomes"][0])
        assert step["drawn"] in [outcome["value"] for outcome in step["outcomes"]]
        assert sum(outcome["probability"] for outcome in step["outcomes"]) == pytest.approx(1 - step["rest"])
    assert found["orders"]["observables"] == ["H", "left"]
    assert 0 < found["orders"]["distance"] <= 1


def test_seed_choice_and_runs(run):
    """The same seed gives the same output; a chosen outcome is taken; runs are counted whole."""
    first = run("measure", "-e", WALLS, "s", "H", "left", "--seed", "4", "--runs", "200", "--json")
    assert first.out == run("measure", "-e", WALLS, "s", "H", "left", "--seed", "4", "--runs", "200", "--json").out
    assert sum(joint["count"] for joint in json.loads(first.out)["joint"]) == 200
    chosen = data(run, "measure", "-e", WALLS, "s", "H", "left", "--choose", "20,0", "--seed", "1")
    assert chosen["steps"][0]["drawn"] == pytest.approx(19.7392088, abs=1e-6)
    assert chosen["steps"][1]["drawn"] == 0


def test_free_evolution_between(run):
    """A level does not move: the place after any time is distributed as before."""
    words = ("measure", "-e", WALLS, "level(0)", "H", "x", "--seed", "0", "--bin-width", "0.1")
    now, later = data(run, *words), data(run, *words, "--after", "3.7")
    for a, b in zip(now["steps"][1]["outcomes"], later["steps"][1]["outcomes"], strict=True):
        assert a["probability"] == pytest.approx(b["probability"], abs=1e-9)


def test_text_and_csv(run):
    """Text marks the outcome drawn and tells both orders; CSV has a row for each outcome."""
    text = run("measure", "-e", WALLS, "s", "H", "left", "--seed", "4", "--glyphs", "ascii")
    assert "\n> " in text.out
    assert "before" in text.out
    assert text.out.isascii()
    rows = list(csv.DictReader(io.StringIO(run("measure", "-e", WALLS, "s", "H", "--seed", "4", "--csv").out)))
    assert [row["drawn"] for row in rows].count("1") == 1


@pytest.mark.parametrize(("words", "status", "said"), [
    (("s", "p"), 1, "self-adjoint"),
    (("s", "x*p"), 1, "Hermitian"),
    (("absent", "x"), 2, "no state"),
    (("s", "x", "--choose", "a"), 2, "--choose"),
    (("s", "x", "--bin-width", "0"), 2, "not above 0"),
    (("s",), 2, "OBSERVABLE"),
])  # fmt: skip
def test_refusals(run, words, status, said):
    """What cannot be measured is told with the exit status of its kind."""
    ran = run("measure", "-e", WALLS, *words)
    assert ran.status == status
    assert said in ran.err


def test_three_words_with_a_sheet_in_place(run):
    """With -e the first word is the state, also before several observables."""
    assert [step["observable"] for step in data(run, "measure", "-e", WALLS, "s", "H", "H", "H")["steps"]] == ["H"] * 3


def test_captured_share(run):
    """`weights --captured` computes levels until they hold the share, and says so where they never do."""
    found = data(run, "weights", "-e", TRAP, "s", "--captured", "0.9999999")
    assert found["captured"] >= 0.9999999
    well = "H = p^2 - 1.5/cosh(x)^2; x in (-inf, inf); state s = exp(-(x/4)^2)"
    ran = run("weights", "-e", well, "s", "--captured", "0.9999")
    assert "asked for" in ran.err


@pytest.mark.parametrize("words", [
    ("expectation", "-e", TRAP, "x", "--matrix"),
    ("transitions", "-e", TRAP, "--from", "1"),
    ("evolve", "-e", TRAP, "s", "--times", "0:6:13", "--density"),
])  # fmt: skip
def test_figures_are_text(run, words):
    """Figures come in the size asked for, in ASCII where that is asked for."""
    ran = run(*words, "--width", "60", "--height", "10", "--glyphs", "ascii")
    assert ran.status == 0
    assert ran.out.isascii()
    assert max(len(line) for line in ran.out.splitlines()) <= 110


def test_two_observables(run):
    """`--with` gives the product of spreads, its bound and the commutator."""
    pair = data(run, "expectation", "-e", TRAP, "x", "--with", "p", "--state", "s")["pair"]
    assert pair["product"] == pytest.approx(0.5, abs=1e-9)
    assert pair["bound"] == pytest.approx(0.5, abs=1e-12)
    assert pair["commutator"] == "i"
    assert not pair["commutes"]


def test_lines_into_another_sheet(run, tmp_path):
    """`--into` gives Franck-Condon factors as weights that sum to 1 (closure)."""
    (tmp_path / "low.sheet").write_text("H = p^2/2 + x^2/2\nx in (-inf, inf)\n")
    (tmp_path / "high.sheet").write_text("H = p^2/2 + (x - 1)^2/2\nx in (-inf, inf)\n")
    found = data(run, "transitions", tmp_path / "low.sheet", "--into", "high.sheet", "-n", "20")
    assert sum(line["weight"] for line in found["transitions"]) == pytest.approx(1, abs=1e-10)
    assert run("transitions", tmp_path / "low.sheet", "--into", "absent.sheet").status == 2


FEW = "d = 3; H = p^2/2 - d*exp(-x^2/2); x in (-inf, inf); state s = exp(-x^2 + 2*i*x)"


def test_results_beyond_are_counted(run):
    """What lies in the continuum is a result without value: in the counts, in the record, and as a line of the text."""
    found = data(run, "measure", "-e", FEW, "s", "H", "H", "--runs", "1000", "--seed", "5")
    lost = next(joint for joint in found["joint"] if joint["values"] == [None, None])
    assert lost["probability"] == pytest.approx(found["steps"][0]["rest"])
    assert abs(lost["count"] - 1000 * lost["probability"]) < 4 * 16
    assert found["steps"][0]["beyond"] == (found["steps"][0]["drawn"] is None)
    text = run("measure", "-e", FEW, "s", "H", "H", "--runs", "1000", "--seed", "5").out
    assert "beyond what was computed" in text
    assert any(line.split()[:2] == ["beyond", "-"] for line in text.splitlines())
    rows = list(csv.DictReader(io.StringIO(run("measure", "-e", FEW, "s", "H", "--seed", "5", "--csv").out)))
    assert rows[-1]["value"] == ""


def test_means_that_are_not_known(run):
    """Means of a state held in part carry their errors, and text shows no digit that is not sure."""
    found = data(run, "evolve", "-e", FEW, "s", "--times", "0,5", "-n", "3")
    assert found["mean_error"][0] > 1
    text = run("evolve", "-e", FEW, "s", "--times", "0,5", "-n", "3").out
    assert [line.split()[-2:] for line in text.splitlines()[2:4]] == [["-", "-"], ["-", "-"]]
    assert "mean of the captured part" in run("weights", "-e", FEW, "s").out


def test_lines_from_a_level_to_itself(run):
    """CSV holds the lines between different levels, JSON all; why there are no strengths is said by the commutator."""
    found = data(run, "transitions", "-e", TRAP, "-n", "4")
    assert [(line["from"], line["to"]) for line in found["transitions"]] == [(0, 0), (0, 1), (0, 2), (0, 3)]
    ran = run("transitions", "-e", TRAP, "-n", "4", "--dipole", "1", "--csv")
    assert all(line.split(",")[:2] == ["0", str(to)] for to, line in enumerate(ran.out.splitlines()[1:], 1))
    assert "[d,[H,d]], which scales them, is 0" in ran.err


def test_units_of_elements_and_means(run):
    """Means, matrix elements, dipoles and evolutions name their unit; momenta are in hbar over the length."""
    sheet = "units: energy meV, length nm, mass m_e; H = p^2/(2*m); x in (0, 10); m = 0.1; T = p^2/(2*m); F = 2 [kV/cm]"
    assert "meV" in run("expectation", "-e", sheet, "T").out
    assert "meV/(nm e)" in run("expectation", "-e", sheet, "F").out
    assert "hbar" in run("expectation", "-e", sheet, "(x*p + p*x)/2").out
    assert "<a|p|b> (hbar/nm)" in run("expectation", "-e", sheet, "p", "--matrix", "-n", "3").out
    assert "dipole (nm)" in run("transitions", "-e", sheet, "-n", "3").out
    assert "<x> (nm)" in run("evolve", "-e", sheet + "; state s = level(0) + level(1)", "s", "--times", "0,1").out


RING = "H = p^2/2; x in ring(0, 2*pi); state s = exp(i*x) + 0.2*exp(-i*x)"


def test_a_choice_that_is_not_to_be_had_is_told(run):
    """A value that is no outcome is replaced by the nearest one, and the note says so; one typed to six digits is not."""
    words = ("measure", "-e", TRAP, "s", "H")
    assert "no outcome of `H` is 7.7: the nearest one, 7.5" in run(*words, "--choose", "7.7").err
    assert "the nearest one" not in run(*words, "--choose", "7.500001").err
    assert "the nearest one" not in run("measure", "-e", WALLS, "s", "x", "--choose", "0.512").err


def test_a_level_within_its_error_of_nothing_is_0(run):
    """The lowest level of a free ring is 0 (closed form), and the outcome does not print the rounding."""
    found = data(run, "measure", "-e", RING + "; state flat = exp(cos(x))", "flat", "H", "--choose", "0")
    assert found["steps"][0]["outcomes"][0]["value"] == 0


def test_weights_of_levels_that_cannot_be_told_apart(run):
    """A pair of equal levels on a ring holds the whole state: errors let each of the two hold all of it, and a note says so."""
    ran = run("weights", "-e", RING, "s", "-n", "7", "--json")
    found = {weight["index"]: weight for weight in json.loads(ran.out)["weights"]}
    for one, other in ((1, 2), (2, 1)):
        assert found[one]["weight"] + found[one]["error"] >= 1 - 1e-9
        assert found[one]["weight"] - found[one]["error"] <= 1e-9
        assert found[one]["weight"] + found[other]["weight"] == pytest.approx(1, abs=1e-12)
    assert "levels 1 and 2 are too near to be told apart" in ran.err
