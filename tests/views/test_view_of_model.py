"""Figures straight from a sheet."""

import pytest

from specterm.analysis import project, solve
from specterm.language import parse
from specterm.model import build
from specterm.views.level_table import text_table
from specterm.views.of_model import axes_of, figure_text, source_of, units_of, weighing_of
from specterm.views.scene import Axes

SHEET = """units: energy meV, length nm, mass m_e
H = p^2/(2*m) + V
m = 0.067
V = where(abs(x) < 5, 0, 300)
x in (-inf, 40)
state packet = exp(-(x-2)^2/8)
"""


@pytest.fixture(scope="module")
def well():
    """Return the model of a square well and its spectrum."""
    model = build(parse(SHEET))
    return model, solve(model)


def test_names_and_ends(well):
    """Axes and units carry the sheet's names; the open end stays open, the finite one is a wall."""
    model, _ = well
    assert axes_of(model) == Axes("x", "nm", "meV", -float("inf"), 40.0, "open", "wall")
    assert units_of(model).momentum == "hbar/nm"


def test_the_window_is_the_well(well):
    """The states of a 10 nm well fill the figure, whatever the domain computed on."""
    model, spectrum = well
    assert source_of(model, spectrum).found.min() > -20
    assert source_of(model, spectrum).found.max() < 20


@pytest.mark.parametrize("size", [(70, 24), (20, 8)])
def test_figure_as_text(well, size):
    """The exported figure has its size at most, its names, and the levels asked for."""
    model, spectrum = well
    text = figure_text(model, spectrum, *size, only=(1, 0), glyphs="ascii")
    assert text.isascii()
    assert len(text.split("\n")) == size[1]
    assert max(len(line) for line in text.split("\n")) <= size[0]
    assert "psi, level 1" in text
    assert "x (nm)" in text


def test_weights_in_table_and_figure(well):
    """A prepared state has its bars in the table and its curve in the figure."""
    model, spectrum = well
    weights = project(model, spectrum, "packet")
    table = text_table(spectrum.levels, "meV", weighing_of(weights))
    assert "packet" in table.split("\n")[0]
    assert "█" in table
    assert figure_text(model, spectrum, 70, 24, weights=weights) != figure_text(model, spectrum, 70, 24)
