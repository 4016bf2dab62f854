"""Saving, opening, presets and leaving, by key."""

import pytest
from fake import SHEET, app, lines, pressed, settled

from specterm.session import presets
from specterm.session.document import Document
from specterm.session.place import folder
from specterm.session.saved import Saved
from specterm.session.store import Store, left_behind


async def named(pilot, key, path):
    """Press the key that asks for a name, put `path` there and take it."""
    await pressed(pilot, key)
    pilot.app.screen.field.value = str(path)
    await pressed(pilot, "enter")


@pytest.fixture
def sheet(tmp_path):
    """Return the path of a sheet."""
    path = tmp_path / "well.sheet"
    path.write_text(SHEET)
    return path


@pytest.mark.parametrize("keys", [["tab", "w"], ["ctrl+s"]])
async def test_saving_to_its_file(sheet, keys):
    """w, or ctrl+s while typing, writes the file; the heading then no longer says unsaved."""
    async with app(SHEET, sheet).run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        assert lines(pilot)[0].startswith(" well.sheet ")
        await pressed(pilot, "e", *"# ")
        assert "well.sheet  unsaved" in lines(pilot)[0]
        await pressed(pilot, *keys)
        assert sheet.read_text() == "# " + SHEET
        assert "unsaved" not in lines(pilot)[0]
        assert "saved " in "\n".join(lines(pilot))


async def test_saving_under_a_new_name(tmp_path):
    """A sheet without a file asks for a name; an existing file is asked about before it is replaced."""
    target = tmp_path / "new.sheet"
    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await named(pilot, "w", target)
        assert target.read_text() == SHEET
        assert pilot.app.document.path == target
        other = tmp_path / "other.sheet"
        other.write_text("mine")
        await named(pilot, "a", other)
        assert "Replace it?" in "\n".join(lines(pilot))
        await pressed(pilot, "n")
        assert other.read_text() == "mine"
        await named(pilot, "a", other)
        await pressed(pilot, "y")
        assert other.read_text() == SHEET


async def test_a_save_that_fails_says_why(tmp_path):
    """A folder that is not there is named; the text stays unsaved."""
    async with app().run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await named(pilot, "w", tmp_path / "no" / "a")
        assert "cannot write" in "\n".join(lines(pilot))


async def test_tables_left_behind_are_named(tmp_path):
    """A sheet saved away from its table says which file is missing beside it and where it lies."""
    (tmp_path / "scan.csv").write_text("x,V\n0,0\n")
    (tmp_path / "new").mkdir()
    sheet = tmp_path / "a.sheet"
    sheet.write_text('V = table("scan.csv", "x", "V")\n' + SHEET)
    async with app(sheet.read_text(), sheet).run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await named(pilot, "a", tmp_path / "new" / "a.sheet")
        assert "saved, but scan.csv is not beside it" in "\n".join(lines(pilot))


async def test_opening_another_sheet(sheet, tmp_path):
    """The key o lists the sheets of the folder, typing narrows the list, Enter opens; Tab goes back without."""
    (tmp_path / "trap.sheet").write_text("# A trap\nH = p^2\n")
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "o")
        text = "\n".join(lines(pilot))
        assert "trap.sheet" in text
        assert "well.sheet" in text
        await pressed(pilot, "tab", "o", *"trap", "enter")
        assert pilot.app.document.name == "trap.sheet"
        assert pilot.app.engine.solved[-1][0] == "# A trap\nH = p^2\n"


async def test_opening_what_is_no_sheet(sheet):
    """A missing file is named in the message line and nothing changes."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "o", *"./nowhere", "enter")
        assert "cannot read" in "\n".join(lines(pilot))
        assert pilot.app.document.path == sheet


async def test_starting_from_a_preset(tmp_path, monkeypatch):
    """The key n lists the presets with their titles; the chosen one's text becomes a new sheet without a file."""
    text = "# Bench well (invented)\nH = p^2\n"
    (tmp_path / "bench.sheet").write_text(text)
    monkeypatch.setattr(presets, "folder", lambda: tmp_path)
    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "n")
        assert "Bench well (invented)" in "\n".join(lines(pilot))
        await pressed(pilot, "enter")
        assert pilot.app.document == Document(text, None, text, "bench")
        assert pilot.app.folder == tmp_path


async def test_copying_the_screen():
    """The key y writes all levels, the lines and the figure as text to a file, and says where it is."""
    async with app().run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "up", "s", "y")
        assert "written to " in "\n".join(lines(pilot))
        text = (folder() / "copied.txt").read_text()
    for words in ("level 1  1.500000000000(4) meV", "error <= 3e-12 meV", "5.500000000000(4) bound", "30.33%", "psi, level 1"):
        assert words in text


@pytest.mark.parametrize("key", ["q", "ctrl+q"])
async def test_leaving_at_once_when_saved(key):
    """Without unsaved text q leaves."""
    async with app().run_test() as pilot:
        await settled(pilot)
        await pilot.press(key)
    assert pilot.app.return_value == 0


async def test_a_file_changed_by_somebody_else_is_asked_about(sheet):
    """Where the file holds a text that this session has not seen, saving asks first; n leaves it, w writes over it."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        sheet.write_text("# theirs\n" + SHEET)
        await pressed(pilot, "e", "#", "tab", "w")
        assert "by somebody else" in "\n".join(lines(pilot))
        await pressed(pilot, "n")
        assert sheet.read_text() == "# theirs\n" + SHEET
        await pressed(pilot, "w", "w")
        assert sheet.read_text() == "#" + SHEET


async def test_a_session_that_cannot_be_kept_says_so_all_the_time(sheet, tmp_path, monkeypatch):
    """Where the state folder cannot be written the screen says so for as long as it is so."""
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "e", "#", "tab")
        for _ in range(100):
            if pilot.app.keeping.failing:
                break
            await pilot.pause(0.02)
        await pressed(pilot, "up", "down")
        assert "NOT KEPT for a crash" in "\n".join(lines(pilot))


async def test_leaving_asks_when_unsaved(sheet):
    """With unsaved text q asks: n goes back, w saves and leaves."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "e", "#", "tab", "q")
        assert "well.sheet has unsaved text." in "\n".join(lines(pilot))
        await pressed(pilot, "n")
        assert "psi, level 0" in "\n".join(lines(pilot))
        await pressed(pilot, "q", "left")
        assert "psi, level 0" in "\n".join(lines(pilot))
        await pilot.press("q", "w")
    assert pilot.app.return_value == 0
    assert sheet.read_text() == "#" + SHEET


async def test_dropping_changes(sheet):
    """The key d leaves without saving, and what was kept for a crash goes too."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "e", "#", "tab")
        await kept(pilot)
        assert pilot.app.keeping.store.file is not None
        assert pilot.app.keeping.store.file.exists()
        await pilot.press("q", "d")
    assert sheet.read_text() == SHEET
    assert left_behind(sheet) == ()


def broken_off(document, folder_, **more):
    """Leave a session behind as a kill does."""
    store = Store()
    assert store.keep(Saved(document, folder_, **more))
    store.leave()


async def test_a_session_that_broke_off_is_offered(sheet):
    """Text of a session that broke off is offered, taken as an edit; undo goes on into the past of that session."""
    broken_off(Document("# third\n", sheet, SHEET), sheet.parent, past=(SHEET, "# second\n"))
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        assert "was kept earlier" in "\n".join(lines(pilot))
        assert len(left_behind(sheet)) == 1
        await pressed(pilot, "r")
        assert pilot.app.document.text == "# third\n"
        assert pilot.app.document.changed
        assert left_behind(sheet) == ()
        await pressed(pilot, "u")
        assert pilot.app.document.text == "# second\n"
        await pressed(pilot, "u")
        assert pilot.app.document.text == SHEET


async def test_not_now_offers_it_again(sheet):
    """Not now leaves the broken session where it is; dropping it removes it."""
    broken_off(Document("# other\n", sheet, SHEET), sheet.parent)
    for key, count in (("n", 1), ("d", 0)):
        async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
            await settled(pilot)
            await pressed(pilot, key)
            await pilot.press("q")
        assert len(left_behind(sheet)) == count


async def test_pins_notebook_and_view_come_back(sheet):
    """After leaving in order with a pin, the next session for the same sheet has pin and view again without a question."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pressed(pilot, "P", "up", "v")
        await pilot.press("q")
    async with app(SHEET, sheet).run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        assert [one.pin.text for one in pilot.app.pins] == [SHEET]
        assert pilot.app.pins[0].outcome.spectrum is not None
        assert (pilot.app.shown.look.chosen, pilot.app.shown.look.mode) == (1, "density")
        assert "pins and notebook of the last session are back" in "\n".join(lines(pilot))


async def test_two_instances_keep_apart(sheet):
    """Two sessions on one sheet have files of their own, and neither is offered the other's while it runs."""
    async with app(SHEET, sheet).run_test(size=(80, 24)) as one:
        await settled(one)
        await pressed(one, "e", "1", "tab")
        await kept(one)
        async with app(SHEET, sheet).run_test(size=(80, 24)) as other:
            await settled(other)
            assert len(other.app.screen_stack) == 1
            await pressed(other, "e", "2", "tab")
            await kept(other)
            files = {pilot.app.keeping.store.file for pilot in (one, other)}
            assert len(files) == 2
            assert all(file.exists() for file in files)


async def kept(pilot):
    """Wait until the session has been written."""
    for _ in range(200):
        await pilot.pause(0.02)
        if pilot.app.keeping.settled:
            return
