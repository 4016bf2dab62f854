"""The level figure: what it shows, where, and at any size."""

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from standin import AXES, potential, spectrum

from specterm.views.cells import plain, row_width
from specterm.views.level_export import export
from specterm.views.level_figure import draw
from specterm.views.scene import MODES, Axes, Prepared, scene, source
from specterm.views.window import energy_window, extents

OSCILLATOR = source(spectrum(5), potential, Axes("x", "nm", "meV"))


def test_the_window_holds_the_states():
    """The places shown reach a little beyond the last turning point of the highest state, not to the end of the domain."""
    shown = scene(OSCILLATOR, 2)
    turning = np.sqrt(2 * 4.5)  # classical turning point of level 4, x^2/2 = 9/2
    assert -9.0 < shown.window[0] < -turning
    assert turning < shown.window[1] < 9.0
    assert shown.energies[0] < 0.0
    assert 4.5 < shown.energies[1] < 7.0


def test_a_long_tail_is_not_shown():
    """A state of size 1 in a domain computed on of size 1e9 fills the figure."""
    far = source(spectrum(1, reach=1e9), potential, AXES)
    low, high = scene(far, 0).window
    assert -8 < low < -2
    assert 2 < high < 8


def test_crowded_levels_are_zoomed_to():
    """Among levels that crowd under a threshold the figure shows those around the chosen one; all of them without zoom."""
    values = [-1 / n**2 for n in range(1, 21)]
    crowd = source(spectrum(20, values=values), lambda x: -1 / (1 + np.abs(x)), AXES)
    low, high = scene(crowd, 9).energies
    assert low < values[9] < high < 0.05
    assert low > -0.05
    assert scene(crowd, 9, zoom=False).energies[0] < -1
    assert scene(crowd, 0).energies[0] < -1


def test_box_levels_do_not_widen_the_window():
    """States that fill the box only because there is one do not decide what is shown, unless one of them is chosen."""
    data = spectrum(3)
    levels = (data.levels[0], *(dataclasses.replace(level, kind="box", error=None) for level in data.levels[1:]))
    boxed = source(dataclasses.replace(data, levels=levels), potential, AXES)
    alone = scene(source(spectrum(1), potential, AXES), 0).window
    assert scene(boxed, 0).window == pytest.approx(alone, rel=0.02)
    assert scene(boxed, 2).window[1] > 1.2 * alone[1]


def test_extents_hold_all_but_a_thousandth():
    """The interval of the oscillator's ground state has 99.9 % of exp(-x^2)/sqrt(pi) (erfinv(0.999) from memory)."""
    (low, high), = extents(lambda x: np.exp(-(x[None, :] ** 2)) / np.sqrt(np.pi), -40.0, 40.0)
    assert low == pytest.approx(-2.3268, abs=0.2)
    assert high == pytest.approx(2.3268, abs=0.2)


def test_a_coulomb_bottom_is_cut():
    """A potential without a lowest point is shown from a place below the lowest level on."""
    x = np.linspace(-10, 10, 4001)[1::2]
    low, high = energy_window(np.array([-0.5, -0.125]), -1 / np.abs(x), 0.0)
    assert -3 < low < -0.5
    assert 0.0 < high < 0.3


def test_from_top_is_upside_down():
    """With levels counted from the top the potential's highest point takes the part of the lowest."""
    values = np.array([-1.0, -3.0])
    ground = -np.linspace(-3, 3, 50) ** 2
    low, high = energy_window(values, ground, None, from_top=True)
    mirrored = energy_window(-values, -ground, None)
    assert (low, high) == (-mirrored[1], -mirrored[0])


def test_the_chosen_state_stands_out_without_colour():
    """The chosen state is hatched in the allowed part, its number is marked, and every style has its name."""
    rows = draw(scene(OSCILLATOR, 2), 60, 24)
    text = plain(rows)
    assert "psi, level 2" in text
    assert "energy (meV)" in text
    assert "x (nm)" in text
    assert any(line.rstrip().endswith("<2") for line in text.split("\n"))
    styles = {style for row in rows for _, style in row}
    assert {"axis", "title", "chosen", "other", "potential", "forbidden"} <= styles


def test_levels_mode_has_lines_only():
    """Stacked levels show a line each and its number."""
    text = plain(draw(scene(OSCILLATOR, 0), 50, 20, mode="levels", glyphs="ascii"))
    assert text.isascii()
    ends = [line.rstrip()[-1] for line in text.split("\n")[1:-2]]
    assert [end for end in ends if end.isdigit()] == ["4", "3", "2", "1", "0"]


def test_small_figure_exactly():
    """One level in 16 x 4 ascii cells, as it stands (looked at by eye)."""
    text = plain(draw(scene(source(spectrum(1), potential, AXES), 0), 16, 4, glyphs="ascii", mode="levels"))
    assert text == ".  :|...|:  .<0\n    |   |\n    '| |'\n     |-|"


def test_complex_states_say_so():
    """Complex states show |psi| hatched with Re psi as the line, and say so; their densities need no word."""
    ring = source(spectrum(3, phase=2.0), potential, AXES)
    assert "|psi| hatched, Re psi, level 1" in plain(draw(scene(ring, 1), 70, 20))
    assert "|psi|^2, level 1" in plain(draw(scene(ring, 1), 70, 20, mode="density"))


def test_threshold_walls_and_prepared_state_are_drawn():
    """A threshold, both walls and a prepared state each have their style in the figure."""
    walled = Axes("R", "angstrom", "cm^-1", -3.0, 3.0, "wall", "free")
    data = dataclasses.replace(spectrum(3, threshold=3.0), left=-3.0, right=3.0)
    prepared = Prepared("packet", 2.0, lambda x: np.exp(-((x - 1) ** 2)) + 0j)
    styles = {s for row in draw(scene(source(data, potential, walled), 0, prepared=prepared), 60, 20) for _, s in row}
    assert {"threshold", "wall", "weight"} <= styles


def test_no_level_says_so():
    """Without a spectrum, or with an empty one, the potential is drawn and the title says that there is no level."""
    for data in (None, spectrum(0)):
        assert "no level" in plain(draw(scene(source(data, potential, AXES), None), 40, 12))


def test_close_levels_share_a_row():
    """Levels 1e-12 apart stand in one row, which shows the chosen one and that there are more."""
    data = spectrum(3, values=[1.0, 1.0 + 1e-12, 1.0 + 2e-12])
    assert "<1+" in plain(draw(scene(source(data, potential, AXES), 1), 60, 20))


def test_only_keeps_the_levels_asked_for():
    """Levels not asked for are left out, the chosen one stays."""
    shown = scene(OSCILLATOR, 2, only=(0, 4))
    assert [level.index for level in shown.levels] == [0, 2, 4]
    assert shown.levels[shown.chosen].index == 2


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("size", [(0, 0), (1, 1), (4, 6), (20, 5), (80, 24), (200, 60)])
def test_every_size_is_exact(mode, size):
    """The figure fills exactly the cells it is given, from none to very many."""
    for glyphs in ("braille", "block", "ascii"):
        rows = draw(scene(OSCILLATOR, 3), *size, mode=mode, glyphs=glyphs)
        assert [row_width(row) for row in rows] == [size[0]] * size[1]


_WILD = st.one_of(st.floats(), st.sampled_from([0.0, 1e300, -1e300, float("nan"), float("inf"), -float("inf")]))


@settings(max_examples=80, deadline=None)
@given(
    st.lists(_WILD, min_size=1, max_size=4), st.lists(_WILD, min_size=1, max_size=5), st.sampled_from(MODES),
    st.one_of(st.none(), _WILD),
)
def test_wild_numbers_draw(values, heights, mode, threshold):
    """Levels, potentials and thresholds of any floats give a figure of the right size, on screen and as export."""
    data = spectrum(len(values), values=values, threshold=threshold)
    shown = scene(source(data, lambda x: np.resize(np.array(heights), len(x)), AXES), 0)
    assert [row_width(row) for row in draw(shown, 40, 12, mode=mode)] == [40] * 12
    assert [row_width(row) for row in export(shown, 40, 12, mode=mode)] == [40] * 12


def test_export_has_ticks_and_names():
    """The exported figure has framed axes with names, and the number of every level."""
    text = plain(export(scene(OSCILLATOR, 2), 70, 24))
    assert "x (nm)" in text
    assert "energy (meV)" in text
    assert all(f"{index}│" in text for index in range(5))
