"""Tables: reading, the spline against scipy.interpolate.CubicSpline 1.17, and what is refused."""

import math
import os

import numpy as np
import pytest
from model_making import model
from scipy.interpolate import CubicSpline

from specterm.errors import SheetError

X = np.array([0.0, 0.3, 1.0, 1.2, 2.0, 3.1, 3.5, 5.0])
Y = np.array([1.0, -0.4, 0.7, 2.2, -1.1, 0.0, 0.6, 0.5])
PLAIN = "".join(f"{x!r} {y!r}\n" for x, y in zip(X.tolist(), Y.tolist(), strict=True))


def table(folder, content, call='table("t.csv", 1, 2)', domain="x in (0, 5)", before=""):
    """Return the function of a table file with this content."""
    (folder / "t.csv").write_bytes(content if isinstance(content, bytes) else content.encode())
    return model(f"{before}\nV = {call}\n{domain}\nH = p^2 + V", folder=folder).functions["V"]


@pytest.mark.parametrize("count", [8, 5, 4, 3, 2])
def test_smooth_interpolation(tmp_path, count):
    """Values and two derivatives agree with the not-a-knot spline (a parabola through 3 points, a line through 2)."""
    content = "\n".join(PLAIN.splitlines()[:count])
    f = table(tmp_path, content, domain=f"x in (0, {X[count - 1]})")
    t = np.linspace(0, X[count - 1], 201)
    reference = CubicSpline(X[:count], Y[:count])
    for order in range(3):
        assert f(t) == pytest.approx(reference(t, order), rel=1e-11, abs=1e-11)
        f = f.derivative()


def test_smoothness(tmp_path):
    """A smooth table is C2: its third derivative has values, its fourth is an edge; a linear one is only continuous."""
    f = table(tmp_path, PLAIN)
    third = f.derivative().derivative().derivative()
    assert not third.has_edge
    assert third.derivative().has_edge
    g = table(tmp_path, PLAIN, 'table("t.csv", 1, 2, linear)')
    assert g(np.array([0.15, 4.25])) == pytest.approx([0.3, 0.55])
    assert not g.derivative().has_edge
    assert g.derivative().derivative().has_edge


def test_knots_and_edges(tmp_path):
    """Inner points are edges and are counted as knots."""
    f = table(tmp_path, PLAIN)
    assert f.knots() == 8
    assert list(f.edges(0, 5)) == list(X[1:-1])


def test_outside(tmp_path):
    """`hold` keeps the end values, `extend` lets the last piece go on; without either a wider domain is refused."""
    t = np.array([-1.0, 6.0])
    wide = "x in (-2, 7)"
    assert table(tmp_path, PLAIN, 'table("t.csv", 1, 2, hold)', wide)(t) == pytest.approx([1.0, 0.5], rel=1e-14)
    assert list(table(tmp_path, PLAIN, 'table("t.csv", 1, 2, hold)', wide).derivative()(t)) == [0.0, 0.0]
    extended = table(tmp_path, PLAIN, 'table("t.csv", 1, 2, extend)', wide)
    assert extended(t) == pytest.approx(CubicSpline(X, Y)(t))
    with pytest.raises(SheetError, match=r"covers 0 to 5, the domain is \(-2, 7\)"):
        table(tmp_path, PLAIN, domain=wide)


def test_rounding_covers_the_interpolation(tmp_path):
    """The rounding bound covers the distance to scipy's spline."""
    f = table(tmp_path, PLAIN)
    t = np.linspace(0.01, 4.99, 301)
    assert np.all(np.abs(f(t) - CubicSpline(X, Y)(t)) <= 8 * f.rounding(t))


FORMATS = [
    ("x,y\n0,1\n1,3\n5,4\n", 'table("t.csv", "x", "y")'),
    ('"R (angstrom)";"E [cm^-1]"\n0;1\n1;3\n5;4\n', 'table("t.csv", "R", "E")'),
    ("# comment\n! another\n%third\n\n  0   1 # end\n  1   3\n  5 4", 'table("t.csv")'),
    ("5\t4\r\n0\t1\r\n1\t3\r\n", 'table("t.csv", 1, 2)'),
    ("\ufeff1e0 3.0\n0 1\n0 1\n.5e1 4.\n", 'table("t.csv", 1, 2)'),
    ("a b c\n9 1 0\n9 3 1\n9 4 5\n", 'table("t.csv", "C", 2)'),
    ("1d0 3D0\n0 +1\n5 4", 'table("t.csv", 1, 2)'),
    ('"x, at rest" , "E ""low""", c\n"0","1",a # "\n"1" , 3,"b, c # d"\n5,4,\n', 'table("t.csv", 1, 2)'),
    ('"x, at rest" "E"\n"0" 1\n1 "3" # "end\n5 4\n', 'table("t.csv", "x, at rest", "E")'),
    ("x,y\n0,1\n1,3,,\n5,4,\n", 'table("t.csv", "x", "y")'),
]


@pytest.mark.parametrize(("content", "call"), FORMATS)
def test_formats(tmp_path, content, call):
    """Separators, comments, headers, units in headers, unsorted and repeated rows are understood."""
    f = table(tmp_path, content, call)
    assert f(np.array([0.0, 1.0, 5.0])) == pytest.approx([1, 3, 4])


def test_units(tmp_path):
    """Units behind the columns convert them."""
    units = "units: energy eV, length nm, mass m_e"
    call = 'table("t.csv", 1 [angstrom], 2 [meV], linear)'
    f = table(tmp_path, "0 1000\n50 2000\n", call, before=units)
    assert f(np.array([0.0, 2.5])) == pytest.approx([1, 1.5])


REFUSED = [
    ("0 1\n1 nan\n", "line 2"),
    ("0 1\n\n1 inf\n", "line 3"),
    ("0 1\n1\n", "line 2"),
    ("0 1\n1 2,5\n", "line 2, column 2: '2,5'"),
    ("x,y\n0,29,5\n1,30,5\n", "line 2 has 3 cells, but the header has 2"),
    ("0,1\n0,29,5\n", "line 2 has 3 cells, but the first row has 2"),
    ('x,y\n0,"29,5"\n1,2\n', "line 2, column 2: '29,5'"),
    ("0,5;29,5\n1;30\n2;31\n", "line 1, column 1: '0,5'"),
    ('x,y\n0,"1\n1,2\n', "line 2: a quotation mark"),
    ('x,y\n0,"1"2\n1,2\n', "line 2: a quotation mark"),
    ("0 1\n1 1e999\n", "line 2"),
    ("0 1\n1 \u0663\n", "line 2"),
    ("0 1\n", "1 points"),
    ("", "0 points"),
    ("# nothing\n", "0 points"),
    ("0 1\n1 2\n1 3\n", "lines 2 and 3"),
    (b"\xff\xfe0", "UTF-8"),
    ("0 1\0\n", "not text"),
]


@pytest.mark.parametrize(("content", "words"), REFUSED)
def test_refused_contents(tmp_path, content, words):
    """Cells that are no finite numbers, too few points and contradictions are refused, the line named."""
    with pytest.raises(SheetError, match=words):
        table(tmp_path, content)


def test_refused_columns(tmp_path):
    """A column that is not there is refused with the nearest name and the list."""
    with pytest.raises(SheetError, match="no column") as found:
        table(tmp_path, "dist,energy\n0,1\n1,2\n", 'table("t.csv", "dist", "enrgy")')
    assert "energy" in found.value.mend
    with pytest.raises(SheetError, match="no column 7"):
        table(tmp_path, PLAIN, 'table("t.csv", 1, 7)')


def test_special_files(tmp_path):
    """Missing files, folders, pipes, devices and files above 50 MB are refused before they are read."""
    os.mkfifo(tmp_path / "pipe")
    (tmp_path / "sub").mkdir()
    with open(tmp_path / "heavy", "wb") as file:
        file.truncate(50_000_001)
    for name, words in (
        ("none", "no file"),
        ("pipe", "regular"),
        ("sub", "regular"),
        ("/dev/zero", "regular"),
        ("heavy", "too large"),
    ):
        with pytest.raises(SheetError, match=words):
            table(tmp_path, PLAIN, f'table("{name}", 1, 2)')


def test_unreadable_names(tmp_path):
    """A name no file can have is refused like any other, and control characters do not come back."""
    with pytest.raises(SheetError, match=r"cannot be read|no file") as found:
        table(tmp_path, PLAIN, 'table("' + "a" * 5000 + '", 1, 2)')
    assert len(found.value.message) < 300


def test_long_tables_are_fast_enough(tmp_path):
    """100,000 points are read, interpolated and evaluated; the spline reproduces sin to 1e-12."""
    x = np.linspace(0, 5, 100_000)
    f = table(tmp_path, "".join(f"{a!r},{math.sin(a)!r}\n" for a in x.tolist()))
    t = np.linspace(0, 5, 1001)
    assert f(t) == pytest.approx(np.sin(t), abs=1e-12)
