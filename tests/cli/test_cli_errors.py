"""Errors: where, what, how to mend; nothing from a file or a name steers the terminal; never a traceback."""

import pytest
from command_line import QUARTIC, steering


def test_line_column_and_caret(run, tmp_path):
    """An error names file, line and column, shows the line, and points at the place."""
    path = tmp_path / "bad.sheet"
    path.write_text("# a comment\nx in (0, 1)\nH = p^2 + kappa*x^2\n")
    ran = run("levels", path)
    lines = ran.err.splitlines()
    assert ran.status == 2
    assert lines[0].startswith(f"{path}:3:11: ")
    assert lines[1] == "    H = p^2 + kappa*x^2"
    assert lines[2] == " " * 14 + "^^^^^"
    assert "kappa" in lines[3]


def test_carets_stay_under_wide_lines(run):
    """In a line of a thousand characters a window around the place is shown, the caret under it."""
    ran = run("levels", "-e", "H = p^2 + " + "0*x + " * 160 + "kappa + " + "0*x + " * 160 + "0; x in (0, 1)")
    shown, caret = ran.err.splitlines()[1:3]
    assert len(shown) <= 104
    assert shown[caret.index("^") :].startswith("kappa")


MALFORMED = [
    ("foo", "bar"),
    ("levels", "--nonsense"),
    ("levels", "-n"),
    ("levels", "-e"),
    ("levels", "-e", QUARTIC, "-n", "0"),
    ("levels", "-e", QUARTIC, "-n", "-3"),
    ("levels", "-e", QUARTIC, "-n", "ten"),
    ("levels", "-e", QUARTIC, "-n", "1e3"),
    ("levels", "-e", QUARTIC, "-n", "99999999999"),
    ("levels", "-e", QUARTIC, "--tol", "0"),
    ("levels", "-e", QUARTIC, "--tol", "2"),
    ("levels", "-e", QUARTIC, "--tol", "nan"),
    ("levels", "-e", QUARTIC, "--near", "inf"),
    ("levels", "-e", QUARTIC, "--near", "high"),
    ("levels", "-e", QUARTIC, "--set", "a"),
    ("levels", "-e", QUARTIC, "--set", "=3"),
    ("levels", "-e", QUARTIC, "--set", "a="),
    ("levels", "-e", QUARTIC, "--set", "H=("),
    ("levels", "-e", QUARTIC, "other.sheet"),
    ("levels", "-e", QUARTIC, "-o", ""),
    ("levels", "-e", QUARTIC, "-o", "/"),
    ("levels", "-e", QUARTIC, "-o", "/no/such/folder/out.txt"),
    ("levels", ""),
    ("levels", "."),
    ("levels", "/dev/null"),
    ("levels", "-e", "H = = 3"),
    ("levels", "-e", "((((((("),
    ("levels", "-e", "x in (1, 0); H = p^2"),
    ("levels", "-e", "H = p^2"),
    ("levels", "-e", "x in (0, 1)"),
    ("levels", "-e", "H = p^2 + x^400; x in (-inf, inf); state"),
    ("weights", "-e", QUARTIC),
    ("weights",),
    ("figure", "-e", QUARTIC, "--levels", "a,b"),
    ("figure", "-e", QUARTIC, "--levels", "0,,1"),
    ("figure", "-e", QUARTIC, "--width", "3"),
    ("figure", "-e", QUARTIC, "--height", "huge"),
    ("figure", "-e", QUARTIC, "--glyphs", "stars"),
    ("presets", "--near", "3"),
    ("check", "-n", "3", "-e", QUARTIC),
    ("sweep", "-e", QUARTIC, "a=0:1:3"),
    ("--version", "--nonsense"),
]


@pytest.mark.parametrize("words", MALFORMED, ids=" ".join)
def test_malformed(run, words):
    """A command line that makes no sense ends with exit 2 and a reason, never a traceback, and prints no result."""
    ran = run(*words)
    assert ran.status == 2
    assert ran.err.strip()
    assert ran.out == ""


STEERING = "\x1b[31mred\x07\x9b2J\x7f"


@pytest.mark.parametrize(
    "words",
    [
        ("levels", STEERING),
        ("levels", f"no/such/{STEERING}.sheet"),
        ("levels", "-e", f"H = p^2 + {STEERING}; x in (0, 1)"),
        ("check", "-e", f"H = p^2 + {STEERING}; x in (0, 1)"),
        ("check", "-e", f"H = p^2 + {STEERING}; x in (0, 1)", "--json"),
        ("levels", "-e", f"# {STEERING}\n{QUARTIC}"),
        ("levels", "-e", f'V = table("{STEERING}.csv", 1, 2); H = p^2 + V; x in (0, 1)'),
        ("levels", "-e", QUARTIC, "--set", f"a={STEERING}"),
        ("levels", "-e", QUARTIC, "--set", f"{STEERING}=3"),
        ("levels", "-e", QUARTIC, "--set", STEERING),
        ("levels", "-e", QUARTIC, "-n", STEERING),
        ("weights", "-e", QUARTIC, STEERING),
        ("figure", "-e", QUARTIC, "--state", STEERING),
        ("figure", "-e", QUARTIC, "--glyphs", STEERING),
        ("levels", "-e", QUARTIC, "-o", f"/no/such/{STEERING}"),
    ],
)
def test_nothing_steers_the_terminal(run, words):
    """Control characters in names, sheets and options never reach the output."""
    ran = run(*words)
    assert not steering(ran.out + ran.err)


@pytest.mark.parametrize("words", [("levels", "-e", QUARTIC, f"--{STEERING}"), ("check", "a", f"b{STEERING}")])
def test_unknown_options_do_not_steer_the_terminal(run, words):
    """Control characters in words no option knows do not reach the output either."""
    assert not steering(run(*words).err)


def test_control_characters_in_a_file(run, tmp_path):
    """A sheet's file with control characters, or a name with them, is told of without them."""
    path = tmp_path / "odd\x1b[2Jname.sheet"
    path.write_text("H = p^2 + kappa; x in (0, 1)\n")
    ran = run("levels", path)
    assert ran.status == 2
    assert not steering(ran.err)
    inside = tmp_path / "inside.sheet"
    inside.write_text("H = p^2 \x1b[31m; x in (0, 1)\n")
    ran = run("levels", inside)
    assert ran.status == 2
    assert not steering(ran.out + ran.err)


def test_files_that_are_no_sheets(run, tmp_path):
    """Binary data, other encodings and files beyond a megabyte are refused with the reason."""
    for name, data, words in (
        ("binary", b"\x7fELF\x00\x01", "control"),
        ("latin", "H = p^2 # \u00e4".encode("latin-1"), "UTF-8"),
        ("large", b"# " + b"x" * 1_100_000, "larger than 1 MB"),
    ):
        path = tmp_path / f"{name}.sheet"
        path.write_bytes(data)
        ran = run("levels", path)
        assert ran.status == 2
        assert words in ran.err


def test_standard_input_is_bounded(run):
    """Standard input beyond a megabyte, or not UTF-8, is refused."""
    assert run("levels", "-", stdin=b"#" * 1_100_000).status == 2
    assert run("levels", "-", stdin=b"\xff\xfe\x00").status == 2
    assert run("levels", "-", stdin=b"").status == 2
