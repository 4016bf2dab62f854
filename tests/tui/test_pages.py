"""The pages in the figure's place, with the real engine: what they show, what their keys do, what they export."""

import json

import numpy as np
import pytest
from fake import pressed, settled, typed, words

from specterm.session import presets
from specterm.tui.app import make_app
from specterm.tui.options import Options
from specterm.tui.pages import LETTERS, NAMES

WELL = "H = p^2/2\nx in (0, pi)\nhalf = x < pi/2\nstate left = sin(x) + sin(2*x)\n"


def well(text=WELL, folder=None):
    """Return an app on the infinite well of width pi: levels n^2/2."""
    return make_app(text, None, Options(glyphs="braille", folder=folder))


async def test_every_page_has_a_key(size):
    """The digits show the pages, Tab goes through them and shift+Tab back; the figure is the first."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        for number, name in enumerate(NAMES, 1):
            key = LETTERS.get(name, str(number))
            await pressed(pilot, key)
            assert pilot.app.shown.look.page == name
            assert (f"{key} {name}" in words(pilot)) == (name != "figure") or size == (120, 40)
        for key, name in (("tab", "figure"), ("tab", "means"), ("shift+tab", "figure"), ("shift+tab", NAMES[-1])):
            await pressed(pilot, key)
            assert pilot.app.shown.look.page == name


async def test_means_follow_the_level_and_the_state(size):
    """The page of means shows the chosen level's, and the weighed state's beside them: <x> = pi/2, and 1/2 in the left half."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "2")
        assert "mean in level(0)" in words(pilot)
        assert "1.5707963" in words(pilot)
        await pressed(pilot, "up")
        assert "mean in level(1)" in words(pilot)
        await pressed(pilot, "s")
        assert "mean in left" in words(pilot) or size[0] < 100
        # half in sin x + sin 2x: 1/2 + 4/(3 pi), recomputed by hand
        assert f"{0.5 + 4 / (3 * np.pi):.6f}" in words(pilot)
        assert "product of the spreads" in words(pilot)


async def test_two_observables_are_chosen_by_name(size):
    """The keys d and D choose the two observables that stand beside each other; a commutator that vanishes is said to."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "2", "d")
        await typed(pilot, "x^2")
        await pressed(pilot, "D")
        await typed(pilot, "half")
        assert "[x^2,half] vanishes: they commute" in words(pilot)


async def test_matrix_page_shows_map_and_table(size):
    """The dipole between the lowest two levels of the well is -16/(9 pi) up to sign; l makes the map logarithmic."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "3")
        assert f"{16 / (9 * np.pi):.5f}" in words(pilot)
        await pressed(pilot, "l")
        assert "logarithmic" in words(pilot)


async def test_lines_page_follows_the_level(size):
    """Lines start from the chosen level, from all with z; energy 3/2 for 0 to 1; temperature and broadening are asked for."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "4")
        assert "dipole x   strengths from level 0 sum to 0.99" in words(pilot)
        assert "1.50000000000" in words(pilot)
        await pressed(pilot, "up")
        assert "strengths from level 1" in words(pilot)
        await pressed(pilot, "z")
        assert "strengths from level" not in words(pilot)
        await pressed(pilot, "l")
        await typed(pilot, "0.5")
        assert "at 0.5" in words(pilot)
        await pressed(pilot, "b")
        await typed(pilot, "-1")
        assert "a number above 0 is wanted" in words(pilot)


async def test_lines_into_another_sheet(size, tmp_path):
    """The key F shows the lines into the levels of another sheet of the folder: squares of overlaps."""
    (tmp_path / "wide.sheet").write_text("H = p^2/2\nx in (0, 2*pi)\n")
    async with well(folder=tmp_path).run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "4", "F")
        await typed(pilot, "wide")
        # <sin x on (0, pi) | sin(x/2) on (0, 2 pi)>^2 = 32/(9 pi^2), recomputed by hand
        assert "into wide.sheet" in words(pilot)
        assert f"{32 / (9 * np.pi**2):.6g}"[:7] in words(pilot)


async def test_time_page_has_a_cursor(size):
    """The two levels of the state beat with the period 4 pi/3: at half of it the survival is 0; the cursor goes there."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "5", "l")
        await typed(pilot, f"0:{4 * np.pi / 3:.15f}:5")
        assert "left at 0 " in words(pilot)
        await pressed(pilot, "right", "right")
        survival = words(pilot).split("survival ")[1].split()[0]
        assert "left at 2.0944" in words(pilot)
        assert survival.startswith("0") or survival.split("(")[0].endswith("0")
        await pressed(pilot, "greater_than_sign")
        assert "left at 4.18879" in words(pilot)
        await pressed(pilot, "l")
        await typed(pilot, "0:1")
        assert "first:last:how many" in words(pilot)


async def test_notebook_measures_and_undoes(size):
    """A drawn energy comes again with probability 1; a chosen half leaves the state there; U takes entries back."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "6")
        assert "nothing measured yet" in words(pilot)
        await pressed(pilot, "c")
        assert "prepared left" in words(pilot)
        assert "measured H: " in words(pilot)
        await pressed(pilot, "c")
        last = pilot.app.bench.notebook.entries[-1]
        assert last.probability == pytest.approx(1.0, abs=1e-9)
        await pressed(pilot, "U", "U", "d")
        await typed(pilot, "half")
        await pressed(pilot, "C")
        await typed(pilot, "1")
        entry = pilot.app.bench.notebook.entries[-1]
        assert (entry.text, entry.value, entry.chosen) == ("half", 1.0, True)
        assert entry.probability == pytest.approx(0.5 + 4 / (3 * np.pi), abs=1e-9)
        await pressed(pilot, "U", "U", "U")
        assert "the notebook is empty" in words(pilot)


async def test_notebook_waits_counts_and_compares_orders(size):
    """L lets time pass, R counts repeated runs beside their probabilities, D shows both orders, N prepares anew."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "6", "c", "R")
        await typed(pilot, "500")
        assert "500 runs of H" in words(pilot)
        await pressed(pilot, "D")
        await typed(pilot, "half")
        assert "H and half in both orders" in words(pilot)
        await pressed(pilot, "D", "L")
        await typed(pilot, "0.25")
        assert "waited 0.25" in words(pilot)
        await pressed(pilot, "N")
        await typed(pilot, "level(2)")
        assert "prepared level(2)" in words(pilot)
        assert len(pilot.app.bench.chain(pilot.app.shown.outcome)) == 1


async def test_levels_that_hold_a_share(size):
    """The key W asks for a share of the state weighed and computes as many levels as hold it; none weighed is said."""
    text = WELL + "state narrow = exp(-40*(x - 1)^2)\n"
    async with well(text).run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "W")
        assert "weigh a state first" in words(pilot)
        await pressed(pilot, "s", "s", "W", "ctrl+u")
        await typed(pilot, "0.99999")
        for _ in range(200):
            weighed = pilot.app.painter.complete().weighed
            if len(pilot.app.shown.outcome.spectrum.levels) > 10 and weighed is not None:
                break
            await settled(pilot)
        assert weighed.weighing.captured >= 0.99999


async def test_x_stops_a_page_and_r_goes_on():
    """A sweep that runs is stopped with x, says so, and r goes on to its end."""
    async with well().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        sheet = "L = 3.0\nH = p^2/2\nx in (0, L)\n"
        pilot.app.take_text(sheet)
        pilot.app.take_typed()
        await settled(pilot)
        await pressed(pilot, "8", "l", "ctrl+u")
        await pilot.press(*"L=1:3:400", "enter")
        await pilot.pause(0.3)
        await pilot.press("x")
        await settled(pilot)
        assert "stopped" in words(pilot)
        await pilot.press("r")
        for _ in range(100):
            await settled(pilot)
            if pilot.app.painter.complete().fresh:
                break
        assert pilot.app.painter.complete().answer.result.done.all()


@pytest.mark.parametrize("shape", [(80, 20), (60, 12), (41, 10)])
async def test_every_page_on_a_small_screen(shape):
    """No page fails for want of room."""
    async with well().run_test(size=shape) as pilot:
        await settled(pilot)
        for key in "12345678K":
            await pressed(pilot, key)
            assert "cannot be drawn" not in words(pilot), (key, words(pilot))


async def test_tables_scroll(size):
    """The keys . and , move the table of the page, and stop at its ends."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "plus", "plus", "plus", "plus", "plus", "plus", "4", "z")
        assert "rows 1-" in words(pilot)
        await pressed(pilot, "full_stop")
        assert "rows 6-" in words(pilot)
        await pressed(pilot, "comma", "comma")
        assert "rows 1-" in words(pilot)


async def test_bins_of_the_notebook(size):
    """The key b sets how finely a continuous observable is told apart: about as many outcomes as bins."""
    async with well().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "6", "d")
        await typed(pilot, "x")
        await pressed(pilot, "b", "ctrl+u")
        await typed(pilot, "4")
        outcomes = pilot.app.painter.complete().answer.result.step.outcomes
        assert 3 <= len(outcomes) <= 8
        await pressed(pilot, "b", "ctrl+u")
        await typed(pilot, "0")
        assert "whole number from 1 to 1000" in words(pilot)


async def test_same_seed_same_record():
    """Two sessions with the same seed draw the same outcomes."""
    records = []
    for _ in range(2):
        async with well().run_test(size=(80, 24)) as pilot:
            await settled(pilot)
            await pressed(pilot, "6", "Z")
            await typed(pilot, "7")
            await pressed(pilot, "c", "d")
            await typed(pilot, "x")
            await pressed(pilot, "c")
            records.append([entry.value for entry in pilot.app.bench.notebook.entries if entry.kind == "measured"])
    assert records[0] == records[1]


async def test_a_changed_sheet_ends_the_chain():
    """After an edit of the sheet the old entries stay in the notebook but nothing follows from them; undoing brings it back."""
    async with well().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "6", "c")
        assert len(pilot.app.bench.chain(pilot.app.shown.outcome)) == 2
        await pressed(pilot, "e", "space", "tab")
        assert pilot.app.bench.chain(pilot.app.shown.outcome) == ()
        await pressed(pilot, "u")
        assert len(pilot.app.bench.chain(pilot.app.shown.outcome)) == 2


async def test_exports(tmp_path, monkeypatch):
    """Levels, states, the page and the notebook go to files in the form their names end with."""
    monkeypatch.chdir(tmp_path)
    async with well().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        for keys, entry, name in (
            ("1", "levels", "a.csv"), ("1", "levels", "a.json"), ("1", "states", "a.npz"), ("1", "states", "b.csv"),
            ("4", "lines", "lines.csv"), ("3", "matrix", "m.json"), ("6", "notebook", "n.json"), ("5", "time", "t.csv"),
        ):
            await pressed(pilot, keys, "E")
            await typed(pilot, entry)
            await pilot.press("end", "ctrl+u")
            await typed(pilot, name)
            assert (tmp_path / name).exists(), words(pilot)
        await pressed(pilot, "1", "E")
        await typed(pilot, "levels")
        await pilot.press("end", "ctrl+u")
        await typed(pilot, "a.xls")
        assert "is not known here" in words(pilot)
    assert json.loads((tmp_path / "a.json").read_text())["levels"][1]["value"] == pytest.approx(2.0, rel=1e-10)
    with np.load(tmp_path / "a.npz") as arrays:
        x, psi = arrays["x"], arrays["psi"]
    assert psi[0] == pytest.approx(np.sqrt(2 / np.pi) * np.sin(x), abs=1e-9)


NARROW = [(name, (80, 24)) for name, _ in presets.names()]
WIDE = [(name, (120, 40)) for name in ("coupled-wells", "ring-current", "donor-radial")]


@pytest.mark.parametrize(("name", "shape"), NARROW + WIDE)
async def test_every_preset_opens_every_page(name, shape):
    """No page of any preset fails: no defect, no cut-off computation, for a level and for its first prepared state."""
    preset = presets.find(name)
    near = 0.0 if name == "edge-channel" else None
    count = 8 if name == "leaky-barrier" else None
    options = Options(glyphs="braille", folder=preset.path.parent, near=near, count=count)
    async with make_app(preset.path.read_text(), None, options).run_test(size=shape) as pilot:
        await settled(pilot)
        for _ in range(2):
            for key in ("1", "v", "v", "v", "v", "2", "3", "4", "5", "6"):
                await pressed(pilot, key)
                text = words(pilot)
                assert "failed here" not in text, text
                assert "cannot be drawn" not in text, text
                assert "computing" not in text, text
            await pressed(pilot, "1", "s")
