"""Every verb as text, what may replace a sheet, options, exit statuses."""

import json
import re

import pytest
from command_line import COHERENT, QUARTIC

from specterm.cli.arguments import VERBS


def levels(run, *words):
    """Return the values of `levels --json`."""
    ran = run("levels", *words, "--json")
    assert ran.status == 0, ran.err
    return [level["value"] for level in json.loads(ran.out)["levels"]]


def test_levels_text(run):
    """`levels` prints the operator, a row a level, and how far it can be trusted."""
    ran = run("levels", "-e", QUARTIC, "-n", 3)
    lines = ran.out.splitlines()
    assert ran.status == 0
    assert lines[0] == "H = p^2 + x^4"
    assert len(lines) == 6
    assert "complete" in lines[-1]


@pytest.mark.parametrize("sheet", [QUARTIC, "H = p^2 + x^2 + 1e6; x in (-inf, inf)", "H = p^2 - 2/x; x in (0, inf)"])
def test_only_sure_digits(run, sheet):
    """Text shows a value and the error of its last digit: never less than the engine's error, and no digit beyond it."""
    text = run("levels", "-e", sheet, "-n", 4).out
    shown = re.findall(r"^\s*\d+\s+(-?[\d.]+)\((\d)\)", text, flags=re.MULTILINE)
    exact = json.loads(run("levels", "-e", sheet, "-n", 4, "--json").out)["levels"]
    assert len(shown) == 4
    for (digits, last), level in zip(shown, exact, strict=True):
        unit = 10.0 ** -len(digits.partition(".")[2])
        assert abs(float(digits) - level["value"]) + level["error"] <= int(last) * unit * (1 + 1e-6) + 1e-16 * abs(
            level["value"]
        )
        assert level["error"] > 0.05 * unit


def test_box_levels_have_no_sure_digits(run):
    """A box level is marked as of unknown error."""
    text = run("levels", "-e", "H = p^2 - 2/cosh(x)^2; x in (-inf, inf)", "-n", 2).out
    assert re.search(r"^\s*1\s+~[\d.]+e?-?\d*\s+box", text, flags=re.MULTILINE)


def test_weights_text(run):
    """`weights` prints a bar a level and what is captured."""
    ran = run("weights", "-e", COHERENT, "s", "-n", 3)
    assert ran.status == 0
    assert "60.65%" in ran.out
    assert "captured 0.98561" in ran.out


def test_weights_of_a_level(run):
    """A level stands for a state, and as many levels are computed as it needs."""
    assert "100" in run("weights", "-e", QUARTIC, "level(2)").out
    assert run("weights", "-e", f"{QUARTIC}; state s = level(14)", "s").status == 0


def test_figure(run):
    """`figure` prints rows no wider than asked for, as many as asked for, in the glyphs asked for."""
    ran = run("figure", "-e", QUARTIC, "--width", 60, "--height", 14, "--glyphs", "ascii", "-n", 3)
    lines = ran.out.splitlines()
    assert ran.status == 0
    assert max(map(len, lines)) <= 60
    assert len(lines) <= 14
    assert ran.out.isascii()
    assert not run("figure", "-e", QUARTIC, "--glyphs", "braille").out.isascii()


@pytest.mark.parametrize("more", [("--levels", "0,2"), ("--state", "s"), ("--view", "density"), ("--view", "levels")])
def test_figure_options(run, more):
    """What is drawn can be chosen, and changes the figure."""
    plain = run("figure", "-e", COHERENT, "--glyphs", "ascii", "-n", 4)
    chosen = run("figure", "-e", COHERENT, "--glyphs", "ascii", "-n", 4, *more)
    assert chosen.status == 0
    assert chosen.out != plain.out


def test_check(run):
    """`check` says ok, or tells the first problem with its place."""
    assert run("check", "-e", QUARTIC).out == "-e: ok\n"
    ran = run("check", "-e", "H = p^2 + q; x in (0, 1)")
    assert ran.status == 2
    assert ran.out.startswith("-e:1:11: `q` is not defined")
    assert run("check", "-e", "H = p^2 - x^4; x in (-inf, inf)").status == 1


def test_presets(run):
    """`presets` prints one a line, and every name works as a sheet."""
    ran = run("presets")
    names = [line.split()[0] for line in ran.out.splitlines()]
    assert len(names) == len(set(names)) > 3
    assert run("levels", names[0], "-n", 2).status == 0


@pytest.mark.parametrize("words", [("--help",), ("-h",), *((verb, "--help") for verb in VERBS), ("--version",)])
def test_help(run, words):
    """Help and version go to standard output: exit 0."""
    ran = run(*words)
    assert ran.status == 0
    assert "specterm" in ran.out
    assert ran.err == ""


def test_file_and_folder(run, tmp_path):
    """A sheet is a file; tables in it are found beside it."""
    (tmp_path / "v.csv").write_text("x,v\n" + "".join(f"{k / 10},{(k / 10) ** 2}\n" for k in range(-50, 51)))
    (tmp_path / "a.sheet").write_text('V = table("v.csv", "x", "v")\nH = p^2 + V\nx in (-5, 5)\n')
    assert levels(run, tmp_path / "a.sheet", "-n", 2)[0] == pytest.approx(1, abs=1e-3)


def test_standard_input(run):
    """`-` reads the sheet from standard input."""
    ran = run("levels", "-", "-n", 1, "--json", stdin=QUARTIC.encode())
    assert json.loads(ran.out)["levels"][0]["value"] == pytest.approx(1.0603620904841828, rel=1e-13)


def test_set(run):
    """`--set` replaces definitions, any number of them, by expressions."""
    text = "a = 1; b = 0; H = p^2 + a^2*x^2 + b; x in (-inf, inf)"
    assert levels(run, "-e", text, "--set", "a=3", "-n", 1) == pytest.approx([3], rel=1e-12)
    assert levels(run, "-e", text, "--set", "a = 2", "--set", "b=a+1", "-n", 1) == pytest.approx([5], rel=1e-12)
    ran = run("levels", "-e", text, "--set", "c=3")
    assert ran.status == 2
    assert "c" in ran.err


def test_count_near_and_tolerance(run):
    """`-n`, `--near` and `--tol` reach the engine."""
    text = "H = p^2 + x^2; x in (-inf, inf)"
    assert len(levels(run, "-e", text, "-n", 7)) == 7
    assert levels(run, "-e", text, "-n", 1, "--near", 40.7) == pytest.approx([41], rel=1e-12)
    assert levels(run, "-e", text, "-n", 1, "--near", "-5") == pytest.approx([1], rel=1e-12)
    assert json.loads(run("levels", "-e", text, "--tol", "1e-4", "--json").out)["tolerance"] == 1e-4


STATUSES = [
    (("levels", "-e", QUARTIC), 0, ""),
    (("levels", "-e", "H = p^2 + exp(-x^2); x in (-inf, inf)"), 0, "no level is bound"),
    (("levels", "-e", QUARTIC, "--tol", "1e-17"), 1, "unresolved"),
    (("levels", "-e", "H = x*p; x in (-inf, inf)"), 1, "(x*p + p*x)/2"),
    (("levels", "-e", "H = p^2 - x^4; x in (-inf, inf)"), 1, "not bounded below"),
    (("levels", "-e", "H = p; x in (0, inf)"), 1, "self-adjoint"),
    (("levels", "-e", "H = p^2 + kap; x in (0, 1)"), 2, "kap"),
    (("levels", "-e", ""), 2, ""),
    (("levels",), 2, "no sheet is given"),
    (("levels", "no-such-preset"), 2, "no-such-preset"),
    (("levels", "no/such/file.sheet"), 2, "no/such/file.sheet"),
    (("weights", "-e", QUARTIC, "nobody"), 2, "nobody"),
    (("figure", "-e", QUARTIC, "--state", "nobody"), 2, "nobody"),
]


@pytest.mark.parametrize(("words", "status", "told"), STATUSES)
def test_exit_status(run, words, status, told):
    """0 done, 1 the physics says no, 2 bad input; the reason on standard error, and no result beside an error."""
    ran = run(*words)
    assert ran.status == status
    assert told in ran.err
    if status == 2:
        assert ran.out == ""
        assert ran.err


def test_text_figure_without_a_terminal(run):
    """A sheet alone, with no terminal, prints levels and figure and says why there is no screen."""
    ran = run("-e", QUARTIC)
    assert ran.status == 0
    assert "1.06036209048418" in ran.out
    assert ran.out.count("\n") > 30
    assert "no terminal" in ran.err
