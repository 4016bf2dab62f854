"""Computations behind the screen, sizes, and the pure steps from one look to the next."""

import random
import threading

import pytest
from fake import SHEET, FakeEngine, app, lines, settled
from standin import spectrum

from specterm.errors import SheetError, Span
from specterm.tui.cell_pane import changed_columns
from specterm.tui.complaint import complaint
from specterm.tui.keys import KEYS
from specterm.tui.look import Look, usual_glyphs
from specterm.tui.rows import Shown, bottom_row, chosen_row, drawn_safely, figure_rows, level_rows, message_row, trusted_row
from specterm.tui.sheet_pane import marks_of
from specterm.tui.solving import Request, compute, weigh
from specterm.views.cells import plain, row_width


async def test_the_newest_request_wins():
    """A computation that is overtaken is asked to stop, and its result is not shown."""
    view = app(SHEET + "# slow\n")
    view.engine.gate = threading.Event()
    async with view.run_test(size=(120, 40)) as pilot:
        await pilot.pause()
        assert view.work.busy
        view.take_text(SHEET)
        await settled(pilot)
        assert view.shown.outcome.request.text == SHEET
        assert not view.work.busy


async def test_x_stops_a_long_computation():
    """While a computation runs the screen answers; x stops it and says so."""
    view = app(SHEET + "# slow\n")
    view.engine.gate = threading.Event()
    async with view.run_test(size=(120, 40)) as pilot:
        await pilot.pause()
        await pilot.press("v")
        assert view.shown.look.mode == "density"
        await pilot.press("x")
        await settled(pilot)
        assert "stopped; r computes again" in "\n".join(lines(pilot))


async def test_a_long_computation_says_so():
    """After half a second the message line says that a computation runs and how to stop it."""
    view = app(SHEET + "# slow\n")
    view.engine.gate = threading.Event()
    async with view.run_test(size=(120, 40)) as pilot:
        await pilot.pause(0.8)
        assert "x stops it" in "\n".join(lines(pilot))
        await pilot.press("x")
        await settled(pilot)


@pytest.mark.parametrize("size", [(1, 1), (4, 6), (20, 5), (60, 20), (80, 24), (99, 30), (100, 30), (200, 60)])
async def test_every_size_is_whole(size):
    """From one cell to very many the screen is drawn, typing and back, and panes fill their places."""
    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.resize_terminal(*size)
        await settled(pilot)
        await pilot.press("up", "s", "e", "tab", "v")
        await settled(pilot)
        assert pilot.app.shown.look.chosen == 1
        for pane in pilot.app.query("CellPane"):
            if pane.display and pane.size.width and pane.rows and pane.id in ("figure", "levels"):
                assert [row_width(row) for row in pane.rows] == [pane.size.width] * pane.size.height


async def test_dialogs_fit_a_small_screen():
    """Help, commands and questions survive 20 x 5 cells."""
    async with app().run_test(size=(20, 5)) as pilot:
        await settled(pilot)
        for keys in (["question_mark", "down", "q"], ["slash", "down", "tab"], ["a", "tab"], ["e", "x", "tab", "q", "n"]):
            await pilot.press(*keys)
            await settled(pilot)


async def test_pasted_controls_stay_out():
    """Pasted escape sequences lose their control characters before they reach the text."""
    from textual import events  # noqa: PLC0415 - the environment is set by conftest first

    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("e")
        pilot.app.sheet.text.post_message(events.Paste("a\x1b[2Jb\r\nc\x07"))
        await settled(pilot)
        assert pilot.app.document.text == "a[2Jb\nc" + SHEET


def test_steps_stop_at_the_ends():
    """Steps go up in energy, which is down in number when levels are counted from the top, and stop at the ends."""
    levels = spectrum(4)
    assert Look(1).stepped(1, levels).chosen == 2
    assert Look(1).stepped(9, levels).chosen == 3
    assert Look(1).stepped(-9, levels).chosen == 0
    assert Look(1).stepped(1, None).chosen == 1
    import dataclasses  # noqa: PLC0415 - only here

    assert Look(1).stepped(1, dataclasses.replace(levels, from_top=True)).chosen == 0


def test_counts_grow_by_a_quarter():
    """More and fewer change the count by about a quarter, between 1 and 500."""
    assert Look(count=20).counted(1, None).count == 25
    assert Look(count=1).counted(-1, None).count == 1
    assert Look(count=499).counted(1, None).count == 500
    assert Look().counted(1, spectrum(3)).count == 4


def test_states_are_cycled():
    """Weighing goes through the states of the sheet and back to none; a state that is gone is forgotten."""
    look = Look()
    seen = []
    for _ in range(3):
        look = look.next_state(("a", "b"))
        seen.append(look.state)
    assert seen == ["a", "b", None]
    assert Look(state="gone").next_state(("a",)).state is None
    assert Look(state="gone", chosen=9).fitted(spectrum(3), ("a",)) == Look(state=None, chosen=2)


def test_glyphs_follow_the_locale():
    """UTF-8 has braille, other locales plain characters, the Linux console blocks."""
    assert usual_glyphs({"LANG": "en_GB.UTF-8", "TERM": "xterm"}) == "braille"
    assert usual_glyphs({"LC_ALL": "C", "LANG": "en_GB.UTF-8"}) == "ascii"
    assert usual_glyphs({"LANG": "de_DE.utf8", "TERM": "linux"}) == "block"
    assert usual_glyphs({}) == "braille"


def test_only_what_differs_is_sent():
    """The cells between the first and the last difference of a row are drawn anew, wide characters whole."""
    assert changed_columns((("abcdef", "plain"),), (("abXdYf", "plain"),)) == (2, 3)
    assert changed_columns((("ab", "x"), ("cd", "y")), (("abc", "x"), ("d", "y"))) == (2, 1)
    assert changed_columns((("能b", "x"),), (("量b", "x"),)) == (0, 2)
    assert changed_columns((("ab", "x"),), (("ab", "x"),)) is None
    assert changed_columns((("ab", "x"),), (("abc", "x"),)) == (0, 3)


def test_marks_cover_the_span():
    """The characters of an error are marked on every line they touch; an error at a line's end marks its last character."""
    assert marks_of("ab\ncde\nf", Span(1, 5)) == {0: (1, 2), 1: (0, 2)}
    assert marks_of("ab\ncd", Span(2, 2)) == {0: (1, 2)}
    assert marks_of("", Span(0, 0)) == {0: (0, 1)}
    assert marks_of("ab", None) == {}
    assert marks_of("ab\n", Span(3, 3)) == {1: (0, 1)}


def test_complaints_fit_their_rows():
    """What is wrong and how to mend it take at most six rows; what is cut leaves a mark."""
    error = SheetError("wrong " * 40, mend="mend " * 40, span=Span(0, 1))
    rows = complaint(error, "H = p", 30)
    assert len(rows) == 6
    assert all(row_width(row) == 30 for row in rows)
    assert "…" in plain(rows)
    assert plain(complaint(SheetError("a", mend="b"), "", 30)) == "a\nb"


def test_what_cannot_be_drawn_says_so():
    """A wave that cannot be evaluated leaves words in its pane and the right size."""

    def failing(*_):
        raise ValueError("no\x1b number")

    rows = drawn_safely(failing, Shown(Look()), 40, 3)
    assert plain(rows) == " cannot be drawn: no\N{REPLACEMENT CHARACTER} number\n\n"
    assert [row_width(row) for row in rows] == [40] * 3


def test_rows_without_an_outcome_are_blank():
    """Before the first result every pane has its size and nothing in it."""
    shown = Shown(Look())
    assert plain(level_rows(shown, 30, 4)).strip() == ""
    assert plain(figure_rows(shown, 30, 4)).strip() == ""
    for line in (chosen_row, trusted_row, message_row):
        assert row_width(line(shown, 30)) == 30


def test_long_tables_scroll_and_say_so():
    """A table with more levels than rows shows those around the chosen one and how many there are."""
    outcome = compute(FakeEngine(), Request(1, SHEET, count=40), lambda: False, lambda _: None)
    text = plain(level_rows(Shown(Look(chosen=20), outcome), 40, 10))
    assert ">20 20.5" in text
    assert "40 levels, rows " in text


def test_bottom_row_keeps_help_and_quit():
    """However narrow, help and quit stay as long as they fit."""
    row = plain([bottom_row(("up/down level", "v view", "? help", "q quit"), 24)])
    assert row == " ? help  q quit"


def test_weights_of_nothing():
    """Without a spectrum there are no weights and no error."""
    outcome = compute(FakeEngine(), Request(1, "# bad"), lambda: False, lambda _: None)
    assert outcome.error.message == "unknown name 'bad'"
    assert weigh(FakeEngine(), outcome, "packet").weighing is None


@pytest.mark.parametrize("seed", [1, 2])
async def test_any_keys_in_any_order(seed, tmp_path, monkeypatch):
    """Random keys and sizes, from a fixed seed, end neither the session nor its panes."""
    monkeypatch.chdir(tmp_path)
    chance = random.Random(seed)
    keys = [name for key in KEYS if key.action != "leave" for name in key.keys.split(",")]
    keys += ["tab", "left", "right", "b", "backspace", "space", "n", "delete", "ctrl+z"]
    async with app().run_test(size=(80, 24)) as pilot:
        for _ in range(60):
            if chance.random() < 0.06:
                await pilot.resize_terminal(chance.choice([1, 20, 60, 100, 140]), chance.choice([1, 5, 20, 40]))
            await pilot.press(chance.choice(keys))
        await settled(pilot)
        assert pilot.app.is_running
        assert pilot.app.shown.outcome is not None
