"""Every key of the screen does what its line in the help says, at both sizes."""

import pytest
from fake import SHEET, app, lines, pressed, settled

from specterm.tui.keys import KEYS, TYPING, bottom


async def test_first_screen_shows_everything(size):
    """Without a key pressed there are the levels, the figure with its axes, both lines and the way to help and out."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        text = "\n".join(lines(pilot))
        for words in ("value (meV)", ">0 0.500000000000(4) bound", "energy (meV)", "x (nm)", "psi, level 0", "level 0  0.5000"):
            assert words in text
        for words in ("error <= 3e-12 meV", "6 levels, complete", "up/down level", "e edit", "? help", "q quit"):
            assert words in text
        assert ("H = p^2/2" in text) == (size[0] >= 100)


async def test_up_and_down_step_through_the_levels(size):
    """Up goes up in energy, down goes down, both stop at the ends; letters and page keys do the same."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        for keys, place in (
            (["up"], 1), (["k"], 2), (["down"], 1), (["j", "j", "j"], 0), (["pageup"], 5), (["up"], 5), (["pagedown"], 0),
            (["end"], 5), (["home"], 0), (["9"], 5), (["0"], 0),
        ):
            await pressed(pilot, *keys)
            assert pilot.app.shown.look.chosen == place
            text = "\n".join(lines(pilot))
            assert f"psi, level {place}" in text
            assert f">{place} {place}.5" in text
            assert f" level {place}  {place}.5" in text


async def test_highest_level_stands_on_top(size):
    """The table has energies up, as the figure."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        rows = [line[1] for line in lines(pilot) if line[4:].startswith(".500000000000(4)")]
        assert rows == list("543210")


async def test_v_changes_the_view(size):
    """The key v goes from psi to |psi|^2 to level lines, to momenta (which this engine does not know), and back."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        for words in ("|psi|^2, level 0", "levels"):
            await pressed(pilot, "v")
            assert any(line.rstrip().endswith(words) for line in lines(pilot))
        await pressed(pilot, "v")
        for words in ("psi, level 0",):
            await pressed(pilot, "v")
            assert any(line.rstrip().endswith(words) for line in lines(pilot))


async def test_g_changes_the_glyphs(size):
    """The key g goes through block and ascii; in ascii nothing else is on the screen."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "g")
        assert "█" in "".join(lines(pilot)) or "▀" in "".join(lines(pilot))
        await pressed(pilot, "g")
        assert "".join(lines(pilot)).isascii()
        await pressed(pilot, "g")
        assert pilot.app.shown.look.glyphs == "braille"


async def test_plus_and_minus_change_the_count(size):
    """+ and = ask for more levels, - for fewer; the chosen level stays or is the highest left."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        for key, count in (("plus", 7), ("equals_sign", 8), ("minus", 7)):
            await pressed(pilot, key)
            assert len(pilot.app.shown.outcome.spectrum.levels) == count
        await pressed(pilot, "end", *["minus"] * 8)
        assert len(pilot.app.shown.outcome.spectrum.levels) == 1
        assert pilot.app.shown.look.chosen == 0
        assert "1 level, complete" in "\n".join(lines(pilot))


async def test_s_shows_the_weights(size):
    """The key s weighs the sheet's state: bars in the rows, the captured part and the mean; then the level's own, then none."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "s")
        text = "\n".join(lines(pilot))
        assert ("packet 100.00%" if size[0] >= 100 else "100.00% pa…") in text
        for words in ("60.65%", "30.33%", "its mean 1 meV  spread 0.7 meV"):
            assert words in text
        await pressed(pilot, "k", "s")
        assert "state level(1)  captured" in "\n".join(lines(pilot))
        await pressed(pilot, "s")
        assert "100.00%" not in "\n".join(lines(pilot))


async def test_any_state_or_level_can_be_weighed(size):
    """The key S lists the states of the sheet, every level and none."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "S", *"level(4)", "enter")
        assert "state level(4)  captured" in "\n".join(lines(pilot))
        await pressed(pilot, "S", *"none", "enter")
        assert pilot.app.shown.look.state is None


async def test_levels_near_an_energy(size):
    """The key f asks for an energy, in the unit of the sheet; nothing goes back to the lowest levels, words change nothing."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "f")
        assert "Levels near the energy (meV)" in "\n".join(lines(pilot))
        await pressed(pilot, *"7.5", "enter")
        assert pilot.app.shown.outcome.request.near == 7.5
        assert pilot.app.shown.look.chosen == 5
        await pressed(pilot, "f", *"x", "enter")
        assert "does not do here" in "\n".join(lines(pilot))
        await pressed(pilot, "f", *["backspace"] * 5, "enter")
        assert pilot.app.shown.outcome.request.near is None


async def test_the_tolerance_is_a_key(size):
    """The key t asks for the tolerance."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "t", *["backspace"] * 9, *"1e-6", "enter")
        assert pilot.app.shown.outcome.request.tolerance == 1e-6


async def test_the_lines_in_full():
    """What the narrow lines leave out is shown whole by i: basis, units, moments."""
    async with app().run_test(size=(60, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "i")
        text = "\n".join(lines(pilot))
        for words in ("elements of order 14", "x -9..9 nm", "<p> 0 spread 1.414 hbar/nm", "error <= 3e-12 meV"):
            assert words in text
        await pressed(pilot, "q")
        assert "elements" not in "\n".join(lines(pilot))


async def test_no_sheet_offers_the_presets():
    """A session without a sheet starts with the list of presets; Tab leaves an empty sheet, Enter takes one."""
    async with app("").run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        assert "Start from a preset, or Tab for an empty sheet" in "\n".join(lines(pilot))
        await pressed(pilot, *"double-well", "enter")
        assert "double-well" in lines(pilot)[0]


async def test_the_table_gives_its_room_to_the_sheet():
    """In a wide screen few levels take few rows, and the sheet has the others."""
    async with app().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        assert pilot.app.query_one("#levels").size.height == 8
        await pressed(pilot, *["plus"] * 9)
        assert pilot.app.query_one("#levels").size.height == 18


async def test_s_without_a_state_says_how_to_have_one(size):
    """A sheet without a prepared state gets a word on how to write one."""
    async with app("H = p^2").run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "s")
        assert "the sheet has no prepared state" in "\n".join(lines(pilot))


async def test_m_hides_and_shows_the_moments(size):
    """The moments are there until m hides them."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        words = "<x> 0 spread 0.7071 nm  <p> 0 spread 1.414 hbar/nm"
        assert words in "\n".join(lines(pilot))
        await pressed(pilot, "m")
        assert words not in "\n".join(lines(pilot))
        await pressed(pilot, "m")
        assert words in "\n".join(lines(pilot))


@pytest.mark.parametrize("key", ["e", "enter"])
async def test_typing_and_coming_back(size, key):
    """The key e or Enter goes into the sheet, letters are text there, Tab comes back, and the levels follow the text."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, key)
        text = "\n".join(lines(pilot))
        assert "H = p^2/2" in text
        assert "Tab back to the levels" in text
        await pressed(pilot, *["down"] * 4, *"q=3", "enter")
        assert pilot.app.document.text == SHEET + "q=3\n"
        assert pilot.app.engine.solved[-1][0] == SHEET + "q=3\n"
        await pressed(pilot, "tab")
        assert not pilot.app.typing
        await pressed(pilot, "up")
        assert pilot.app.shown.look.chosen == 1
        assert "psi, level 1" in "\n".join(lines(pilot))


async def test_errors_are_marked_where_they_are(size):
    """A mistake is underlined, named with line and column, and told how to mend; the levels say that they are old."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "e", *["down"] * 4, *"y=bad")
        text = "\n".join(lines(pilot))
        for words in ("line 5, column 3: unknown name 'bad'", "define it", "are those of an earlier text", ">0 0.5000"):
            assert words in text
        assert pilot.app.sheet.text._marks == {4: (2, 5)}
        assert text.count("unknown name") == 1
        strip = pilot.app.sheet.text.render_line(4)
        assert any(segment.text == "bad" and segment.style.underline for segment in strip)
        await pressed(pilot, "tab")
        assert "unknown name 'bad'" in "\n".join(lines(pilot))
        pilot.app.sheet.text.move_cursor((0, 0))
        await pressed(pilot, "e")
        assert pilot.app.sheet.text.cursor_location == (4, 2)
        await pressed(pilot, "end", *["backspace"] * 5)
        text = "\n".join(lines(pilot))
        assert "unknown name" not in text
        assert "error <= 3e-12" in text
        assert pilot.app.sheet.text._marks == {}


async def test_physics_that_says_no(size):
    """Where there are no levels the reason stands there, and the figure shows the potential alone."""
    async with app("# unphysical\nH = p^2").run_test(size=size) as pilot:
        await settled(pilot)
        text = "\n".join(lines(pilot))
        assert "H has no lowest level" in text
        assert "no level" in text
        await pressed(pilot, "up", "v", "s", "end")


async def test_a_defect_below_does_not_end_the_session(size):
    """An exception that is nobody's message is shown as a defect, without a traceback."""
    async with app("# crash\nH = p^2").run_test(size=size) as pilot:
        await settled(pilot)
        assert "specterm failed here (ZeroDivisionError: by zero)" in " ".join("\n".join(lines(pilot)).split())


async def test_u_takes_an_edit_back(size):
    """The key u undoes the last edit without going into the sheet."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "e", "x", "tab", "u")
        assert pilot.app.document.text == SHEET
        assert not pilot.app.document.changed


async def test_r_computes_again_and_x_has_nothing_to_stop(size):
    """The key r computes the same text again; x says when nothing runs."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, "r")
        assert len(pilot.app.engine.solved) == 2
        await pressed(pilot, "x")
        assert "nothing is running" in "\n".join(lines(pilot))


@pytest.mark.parametrize(
    ("keys", "leave"), [(["question_mark"], "q"), (["h"], "left"), (["slash", *"app: help", "enter"], "enter")]
)
async def test_help_lists_the_live_keys(size, keys, leave):
    """The help has a line for every key, scrolls, and is left with a letter, an arrow or Enter."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, *keys)
        seen = "\n".join(lines(pilot))
        for _ in range(7):
            await pressed(pilot, "pagedown")
            seen += "\n".join(lines(pilot))
        assert all(key.tooltip in seen for key in KEYS + TYPING)
        assert "goes back" in seen
        await pressed(pilot, leave)
        assert "psi, level 0" in "\n".join(lines(pilot))


@pytest.mark.parametrize("key", ["slash", "colon", "ctrl+p"])
async def test_commands_by_name(size, key):
    """The command list finds an action by part of its name, Enter does it, Tab leaves it."""
    async with app().run_test(size=size) as pilot:
        await settled(pilot)
        await pressed(pilot, key, *"next view", "enter")
        assert "|psi|^2, level 0" in "\n".join(lines(pilot))
        await pressed(pilot, key, "tab")
        await pressed(pilot, "up")
        assert pilot.app.shown.look.chosen == 1


def test_bottom_line_ends_with_help_and_quit():
    """The bottom line's last words are help and quit, whatever is left out before them."""
    assert bottom(KEYS)[-2:] == ("? help", "q quit")


def test_keys_are_sound():
    """Every key is bound once, every id is unique; only suspending needs Ctrl, nothing Alt, Escape or a function key."""
    names = [name for key in KEYS for name in key.keys.split(",")]
    assert len(names) == len(set(names))
    assert len({key.id for key in KEYS + TYPING}) == len(KEYS) + len(TYPING)
    assert not any(name.startswith(("alt", "escape", "f1")) for name in names)
    assert all(any(not name.startswith("ctrl") for name in key.keys.split(",")) for key in KEYS if key.action != "suspend")
    assert all(action in ("done",) or key.area for key in TYPING for action in (key.action,))


async def test_panes_follow_the_size():
    """After one change of size the panes stand as that size wants, down to where there is only a word about it, and back."""
    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        for size, kinds in (((20, 5), {"tiny"}), ((1, 1), {"tiny"}), ((200, 60), {"wide"}), ((80, 24), {"narrow", "apart"})):
            await pilot.resize_terminal(*size)
            await settled(pilot)
            assert pilot.app.screen.classes >= kinds
            assert ("too small" in "\n".join(lines(pilot))) == (size == (20, 5))
            assert ("psi, level 0" in "\n".join(lines(pilot))) == ("tiny" not in kinds)
