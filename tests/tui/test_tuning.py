"""Numbers nudged in their place, pins with shifts, slopes and sweeps on the screen, with the real engine."""

import pytest
from fake import lines, pressed, settled, typed, words

from specterm.session.pins import pin_from, unused_name
from specterm.tui.app import make_app
from specterm.tui.options import Options

SHEET = "# two wells (invented)\nL = 2.50   # width\nH = p^2/2\nx in (0, L)\nstate low = sin(x)\n"


def level(number, width):
    """Return a level of the infinite well: (n + 1)^2 pi^2/(2 L^2)."""
    return (number + 1) ** 2 * 3.141592653589793**2 / (2 * width**2)


def wells(text=SHEET):
    """Return an app on an infinite well of width L."""
    return make_app(text, None, Options(glyphs="braille"))


async def test_a_number_is_picked_by_name_and_nudged_in_place(size):
    """Key p picks by name; ] and [ step by the last digit written; } and { scale the step; comments stay; u undoes."""
    async with wells().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "p")
        await typed(pilot, "L")
        assert "L = 2.50, step 0.01" in words(pilot)
        await pressed(pilot, "right_square_bracket")
        assert pilot.app.document.text == SHEET.replace("2.50", "2.51")
        assert pilot.app.shown.outcome.spectrum.levels[0].value == pytest.approx(level(0, 2.51), rel=1e-10)
        await pressed(pilot, "right_curly_bracket", "left_square_bracket")
        assert pilot.app.document.text == SHEET.replace("2.50", "2.41")
        await pressed(pilot, "u")
        assert pilot.app.document.text == SHEET.replace("2.50", "2.51")
        await pressed(pilot, "u")
        assert pilot.app.document.text == SHEET
        await pressed(pilot, "left_curly_bracket", "left_curly_bracket", "right_square_bracket")
        assert pilot.app.document.text == SHEET.replace("2.50", "2.501")


async def test_a_held_key_ends_at_the_last_state():
    """Many nudges in a row end with the levels of the last one, and never stop showing some on the way."""
    async with wells().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "p")
        await typed(pilot, "L")
        await pilot.press(*["right_square_bracket"] * 25)
        await settled(pilot)
        assert pilot.app.shown.outcome.request.text == SHEET.replace("2.50", "2.75")
        assert pilot.app.shown.outcome.spectrum.levels[0].value == pytest.approx(level(0, 2.75), rel=1e-10)


async def test_nothing_to_nudge_is_said():
    """A sheet without plain numbers says what one looks like; nudging without a pick asks for one."""
    async with wells("H = p^2/2 + x^2/2\nx in (-inf, inf)\n").run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "right_square_bracket")
        assert "no plain number such as" in words(pilot)


async def test_a_pin_stands_beside_with_shifts(size):
    """P keeps the spectrum; after a nudge the table has the shifts, those of the closed form; V changes the column."""
    async with wells().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "p")
        await typed(pilot, "L")
        await pressed(pilot, "P", "right_square_bracket")
        assert "shift" in words(pilot)
        assert f"{level(0, 2.51) - level(0, 2.50):.8f}"[:8] in words(pilot)
        assert pilot.app.painter.complete().moved[0].shift == pytest.approx(level(0, 2.51) - level(0, 2.50), abs=1e-10)
        await pressed(pilot, "V", "V")
        assert "dE/dL" in words(pilot)
        assert f"{-2 * level(0, 2.51) / 2.51:.4f}"[:6] in words(pilot)


async def test_pins_are_renamed_swapped_and_dropped():
    """B lists the pins: r renames, s makes the pin the sheet and the sheet a pin, d drops it."""
    async with wells().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "P")
        await pressed(pilot, "B", "enter", "r", "ctrl+u")
        await typed(pilot, "first")
        assert pilot.app.pins[0].pin.name == "first"
        await pressed(pilot, "p")
        await typed(pilot, "L")
        await pressed(pilot, "right_square_bracket", "B", "enter", "s")
        assert pilot.app.document.text == SHEET
        assert pilot.app.pins[0].pin.text == SHEET.replace("2.50", "2.51")
        await pressed(pilot, "B", "enter", "d")
        assert pilot.app.pins == ()
        await pressed(pilot, "B")
        assert "nothing is pinned" in words(pilot)


async def test_a_crossing_is_seen_as_one():
    """Even and odd levels of an oscillator with a barrier cannot cross, but a level that takes another number says which."""
    ring = "a = 0.30\nH = p^2\nx in ring(0, 2*pi), phase a\n"
    async with wells(ring).run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "P", "p")
        await typed(pilot, "a")
        await pressed(pilot, "right_curly_bracket", "right_square_bracket", "right_square_bracket", "right_square_bracket")
        # at phase 0.6 the plane wave with k = 0.6, level 0 at 0.3, has become level 1: 0.36 against 0.16
        moved = pilot.app.painter.complete().moved
        assert (moved[1].before, moved[0].before) == (0, 1)
        assert "was 0" in words(pilot)


async def test_slopes_page(size):
    """The page of slopes has -2 E/L for the width of a well, and lines with z."""
    async with wells().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "7")
        assert f"{-2 * level(0, 2.5) / 2.5:.5f}"[:7] in words(pilot)
        await pressed(pilot, "z")
        assert "0-1" in words(pilot)


async def test_sweep_page(size):
    """Key l asks for a range; the cursor moves along it; T writes its value into the sheet; x and r stop and go on."""
    async with wells().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "8")
        assert "no sweep yet" in words(pilot)
        await pressed(pilot, "l")
        await typed(pilot, "L=2:3:5")
        assert "L = 2" in words(pilot)
        assert f"{level(0, 2):.6f}"[:7] in words(pilot)
        await pressed(pilot, "right", "right", "right")
        assert "L = 2.75" in words(pilot)
        assert f"{level(0, 2.75):.6f}"[:7] in words(pilot)
        await pressed(pilot, "T")
        assert pilot.app.document.text == SHEET.replace("2.50", "2.75")
        await pressed(pilot, "l", "ctrl+u")
        await typed(pilot, "L=nonsense")
        assert "range" in "\n".join(lines(pilot))


async def test_fit_page(size, tmp_path):
    """Lines of a well fit its width: matches are shown for approval, the result is written into the sheet on request."""
    (tmp_path / "seen.csv").write_text(
        "from,to,value,uncertainty\n" + "".join(f",,{level(n, 2.52) - level(0, 2.52):.8f},1e-6\n" for n in (1, 2))
    )
    async with make_app(SHEET, None, Options(glyphs="braille", folder=tmp_path)).run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "K")
        assert "no fit yet" in words(pilot)
        await pressed(pilot, "F")
        await typed(pilot, "seen")
        await typed(pilot, "L")
        assert "z approves" in words(pilot)
        await pressed(pilot, "z")
        assert "2.520000" in words(pilot)
        await pressed(pilot, "T")
        written = pilot.app.document.text.split("L = ")[1].split()[0]
        assert float(written) == pytest.approx(2.52, abs=1e-7)
        await pressed(pilot, "u")
        assert pilot.app.document.text == SHEET


async def test_levels_to_first_order_stand_in(monkeypatch):
    """While a slow solution runs, the table has the levels to first order, marked; then the new ones."""
    monkeypatch.setattr("specterm.tui.table_columns.SLOW", 0.0)
    async with wells().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "p")
        await typed(pilot, "L")
        app = pilot.app
        app.work.busy = True
        app.document = app.document.edited(SHEET.replace("2.50", "2.51"))
        app.redraw()
        await pilot.pause()
        await pilot.pause()
        text = words(pilot)
        assert "to 1st order" in text
        assert f"~{level(0, 2.5) * (1 - 2 * 0.01 / 2.5):.7g}"[:8] in text
        app.work.busy = False


def test_pins_from_data():
    """A pin comes back from plain data; what is no pin is refused; a name is used once."""
    data = {"name": "a", "text": SHEET, "folder": "/tmp", "count": 5, "near": None, "tolerance": 1e-8}
    pin = pin_from(data)
    assert pin.data() == data
    assert unused_name([pin], "a") == "a (2)"
    for broken in (None, {}, {**data, "count": "x"}, {**data, "near": []}, []):
        with pytest.raises(Exception, match="no pin"):
            pin_from(broken)
