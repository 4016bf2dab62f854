"""`fit`: keys of the contract, matches to be accepted, the sheet saved; levels of the oscillator (closed form)."""

import csv
import io
import json

import pytest

SHEET = "# a trap\nH = p^2/2 + w^2*x^2/2 + c\nw = 1.9   # stiffness\nc = 0.1\nx in (-inf, inf)\n"


@pytest.fixture
def files(tmp_path):
    """Write a sheet and lines of an oscillator with w = 2, c = 0.25."""
    (tmp_path / "trap.sheet").write_text(SHEET)
    (tmp_path / "levels.csv").write_text("level,value,uncertainty\n0,1.25,0.01\n1,3.25,0.01\n2,5.25,0.01\n")
    (tmp_path / "open.csv").write_text("from,to,value\n0,1,2\n,,4\n")
    return tmp_path


def test_keys_and_saved_sheet(run, files):
    """JSON has the fitted numbers with errors, residuals and chi-square; the saved sheet keeps its comments."""
    saved = files / "fitted.sheet"
    ran = run("fit", files / "trap.sheet", files / "levels.csv", "--vary", "w,c=0:1", "--save", saved, "--json")
    assert ran.status == 0, ran.err
    found = json.loads(ran.out)
    assert [one["name"] for one in found["parameters"]] == ["w", "c"]
    assert [one["value"] for one in found["parameters"]] == pytest.approx([2, 0.25])
    assert all(0 < one["error"] < 0.05 for one in found["parameters"])
    assert found["residuals"] == pytest.approx([0, 0, 0], abs=1e-8)
    assert found["chi2"] == pytest.approx(0, abs=1e-10)
    assert found["dof"] == 1
    text = saved.read_text()
    assert text.startswith("# a trap\nH = p^2/2 + w^2*x^2/2 + c\nw = 2.0")
    assert "# stiffness" in text
    assert (files / "trap.sheet").read_text() == SHEET


def test_matches_are_shown_first(run, files):
    """Lines without numbers: the matches are shown with status 1 and a plain sentence; --assign takes them."""
    ran = run("fit", files / "trap.sheet", files / "open.csv", "--vary", "w")
    assert ran.status == 1
    assert "accept them with --assign" in ran.err
    assert ran.out.splitlines()[1].split()[:3] == ["3", "0", "2"]
    proposed = json.loads(run("fit", files / "trap.sheet", files / "open.csv", "--vary", "w", "--json").out)["proposed"]
    assert (proposed[0]["from"], proposed[0]["to"]) == (0, 2)
    ran = run("fit", files / "trap.sheet", files / "open.csv", "--vary", "w", "--assign", "--json")
    assert ran.status == 0
    assert json.loads(ran.out)["parameters"][0]["value"] == pytest.approx(2)


def test_table_and_csv(run, files):
    """The text has the numbers with brackets, and the lines; CSV the fitted numbers."""
    ran = run("fit", files / "trap.sheet", files / "levels.csv", "--vary", "w", "--vary", "c")
    assert "chi-square" in ran.out
    assert "w          2.000(8)" in ran.out
    rows = list(csv.DictReader(io.StringIO(run("fit", files / "trap.sheet", files / "levels.csv", "--vary=w", "--csv").out)))
    assert rows[0]["name"] == "w"


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("--vary", "w=3"), "expected NAME or NAME=LO:HI"),
        (("--vary", "w=a:b"), "bounds are numbers"),
        (("--vary", "q"), "not a plain number"),
        ((), "--vary"),
        (("--vary", "w", "--set", "c=0", "--save", "x.sheet"), "--set cannot go along"),
    ],
)
def test_bad_requests(run, files, words, told):
    """Bad bounds, unknown names, nothing to vary, saving with --set: exit 2 with a plain sentence."""
    ran = run("fit", files / "trap.sheet", files / "levels.csv", *words)
    assert ran.status == 2
    assert told in ran.err


def test_mistakes_in_the_lines_name_their_file(run, files):
    """A bad cell is told with the name and the line of the file of lines, not those of the sheet."""
    (files / "bad.csv").write_text('level,value\n0,"29,5"\n')
    ran = run("fit", files / "trap.sheet", files / "bad.csv", "--vary", "w")
    assert ran.status == 2
    assert ran.err.startswith("bad.csv, line 2: `29,5` in the column `value` is no number")


def test_values_alone_are_open_lines(run, files):
    """A file of values alone is matched to transitions."""
    (files / "values.csv").write_text("value\n4\n2\n")
    ran = run("fit", files / "trap.sheet", files / "values.csv", "--vary", "w", "--json")
    assert ran.status == 1
    proposed = json.loads(ran.out)["proposed"]
    assert sorted(one["to"] - one["from"] for one in proposed) == [1, 2]


def test_missing_file(run, files):
    """A file of lines that is not there is exit 2."""
    ran = run("fit", files / "trap.sheet", files / "none.csv", "--vary", "w")
    assert ran.status == 2
    assert "there is no file none.csv" in ran.err
