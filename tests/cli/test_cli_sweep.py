"""The verb `sweep`: data, table, figure, map, journal, refusals."""

import csv
import io
import json
from math import pi

import pytest
from command_line import steering

WELL = "H = p^2; L = 1; x in (0, L)"
WELLS = "H = p^2 + (x^2-4)^2/2 + F*x; F = 0; x in (-inf, inf); state s = exp(-(x-2)^2)"
UNITS = "units: energy meV, length nm, mass m_e; F = 20 [kV/cm]; H = p^2/(2*0.067) + e*F*x; x in (0, 10)"


def data(run, *words):
    """Return what the verb answers as JSON."""
    ran = run("sweep", *words, "--json")
    assert ran.status == 0, ran.err
    return json.loads(ran.out)


def test_keys_of_a_record(run):
    """The keys of the design, section 6, and what goes with them; levels of a well of width L are (n pi/L)^2 (closed form)."""
    found = data(run, "-e", WELL, "L=1:1.5:5", "-n", "2")
    assert found["parameter"] == "L"
    assert found["values"] == [1, 1.125, 1.25, 1.375, 1.5]
    for width, levels, errors in zip(found["values"], found["levels"], found["errors"], strict=True):
        for n, (value, error) in enumerate(zip(levels, errors, strict=True), 1):
            assert abs(value - (n * pi / width) ** 2) <= error
    assert found["gaps"] == []
    assert found["branches"] == [[0, 1]] * 5
    assert found["numbers"] == [0, 1]


def test_gaps_as_data(run):
    """A gap has its pair, its place, its size, and says whether levels cross."""
    (gap,) = data(run, "-e", WELLS, "F=-0.3:0.31:12", "-n", "2")["gaps"]
    assert gap["pair"] == [0, 1]
    assert gap["at"] == pytest.approx(0, abs=1e-9)
    assert gap["crossing"] is False
    assert data(run, "-e", WELLS, "F=-0.3:0.31:12", "-n", "2", "--no-gaps")["gaps"] == []


def test_units_are_those_written(run):
    """Values are in the unit that stands behind the number."""
    found = data(run, "-e", UNITS, "F=0,40", "-n", "1")
    assert (found["unit"], found["energy_unit"]) == ("kV/cm", "meV")
    there = json.loads(run("levels", "-e", UNITS, "--set", "F=40 [kV/cm]", "-n", "1", "--json").out)
    assert found["levels"][1][0] == pytest.approx(there["levels"][0]["value"], rel=1e-12)


def test_csv_is_wide(run):
    """CSV has a row for each point, numbers first, then the kinds; a point without levels has empty cells."""
    sheet = "H = p^2 + a*x^4; a = 1; x in (-inf, inf)"
    rows = list(csv.DictReader(io.StringIO(run("sweep", "-e", sheet, "a=-1,1,2", "-n", "2", "--csv").out)))
    assert list(rows[0]) == ["a", "level_0", "error_0", "level_1", "error_1", "kind_0", "kind_1"]
    assert rows[0] == dict.fromkeys(rows[0], "") | {"a": "-1.0"}
    assert (rows[1]["kind_0"], rows[2]["kind_1"]) == ("bound", "bound")
    assert float(rows[1]["level_0"]) == pytest.approx(1.0603620904841829, rel=1e-10)


def test_box_levels_are_told_in_csv(run):
    """Levels of the continuum have their kind beside them, as in JSON."""
    words = ("-e", "H = p^2/2 - V*sech(x)^2; V = 1; x in (-inf, inf)", "V=1,2", "-n", "3")
    rows = list(csv.DictReader(io.StringIO(run("sweep", *words, "--csv").out)))
    assert [[row[f"kind_{k}"] for k in range(3)] for row in rows] == data(run, *words)["kinds"]
    assert rows[0]["kind_2"] == "box"


@pytest.mark.parametrize(("quantity", "column"), [
    ("transitions", "transitions_1"), ("expectation=x", "expectation_1"), ("weights=s", "weights_1"),
    ("strengths", "strengths_1"),
])  # fmt: skip
def test_quantities(run, quantity, column):
    """Other quantities come with the levels, in JSON and in columns of their own."""
    words = ("-e", WELLS, "F=0.1,0.2", "-n", "3", "--quantity", quantity)
    found = data(run, *words)["quantity"]
    rows = list(csv.DictReader(io.StringIO(run("sweep", *words, "--csv").out)))
    assert float(rows[1][column]) == found["values"][1][1]
    assert run("sweep", *words, "--height", "8").status == 0


def test_text_has_figure_and_gaps(run):
    """Text shows both ends, the table of gaps, and the figure in the size asked for; in ASCII where that is asked for."""
    ran = run("sweep", "-e", WELLS, "F=-0.3:0.31:12", "-n", "4", "--level", "1", "--width", "60", "--height", "12",
              "--glyphs", "ascii")  # fmt: skip
    assert ran.status == 0
    assert ran.out.isascii()
    assert "smallest gaps" in ran.out
    assert "avoided" in ran.out
    figure = ran.out[ran.out.index("\n\n", ran.out.index("avoided")) + 2 :].splitlines()
    assert len(figure) == 12
    assert max(len(line) for line in figure) <= 60


def test_map(run):
    """Two ranges make a map: pairs of values as data, shades as text."""
    words = ("-e", "H = p^2/2 + w^2*x^2/2 + c; w = 1; c = 0; x in (-inf, inf)", "w=1:2:3", "c=0,1", "-n", "2")
    found = data(run, *words)
    assert found["parameter"] == ["w", "c"]
    assert found["values"][1] == [1, 1]
    assert found["levels"][1] == pytest.approx([1.5, 2.5])
    assert "rows: w = 1 ... 2" in run("sweep", *words, "--level", "1").out
    assert "no such level" in run("sweep", *words, "--level", "7").out


def test_journal_and_workers(run, tmp_path):
    """A journal is kept and gone on from; two processes give the same output as one."""
    words = ("-e", WELLS, "F=-0.3:0.31:12", "-n", "2", "--csv")
    alone = run("sweep", *words).out
    assert run("sweep", *words, "--journal", tmp_path / "j").out == alone
    lines = (tmp_path / "j").read_text().splitlines(keepends=True)
    (tmp_path / "j").write_text("".join(lines[:5]) + lines[5][:40])
    assert run("sweep", *words, "--journal", tmp_path / "j", "--workers", "2").out == alone


@pytest.mark.parametrize(("words", "status", "said"), [
    (("F=0:1",), 2, "NAME=A:B:COUNT"),
    (("G=0:1:3",), 2, "G"),
    (("F=0:1:3", "--quantity", "colour"), 2, "levels, transitions"),
    (("F=0:1:3", "--quantity", "weights"), 2, "state"),
    (("F=0:1:3", "--set", "F=2"), 2, "at once"),
    (("F=0:1:3", "--workers", "2", "--cluster", "tcp://a:1"), 2, "do not go together"),
    (("F=0:1:3", "--workers", "0"), 2, "whole number|not a number"),
    (("F=0:1:3", "F=0:1:3", "F=0:1:3"), 2, "two for a map"),
    ((), 2, "NAME"),
])  # fmt: skip
def test_refusals(run, words, status, said):
    """What cannot be swept is told, with the way out."""
    ran = run("sweep", "-e", WELLS, *words)
    assert ran.status == status
    assert any(part in ran.err for part in said.split("|")), ran.err


def test_nothing_steers_the_terminal(run, tmp_path):
    """Control characters in ranges and journals are shown harmlessly."""
    hostile = tmp_path / "j"
    hostile.write_text('{"\x1b[2J": 1}\n')
    for words in (("F=\x1b[2J:1:3",), ("F=0:1:3", "--journal", hostile), ("\x1b[2J=0:1:3",)):
        ran = run("sweep", "-e", WELLS, *words)
        assert ran.status == 2
        assert not steering(ran.out + ran.err)
