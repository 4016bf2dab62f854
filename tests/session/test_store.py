"""Sessions as data and on the disk."""

import json
import os

import pytest

from specterm.errors import SheetError
from specterm.session.document import Document
from specterm.session.notebook import Entry, Notebook
from specterm.session.pins import Pin
from specterm.session.saved import LARGEST_PAST, MOST_PAST, Saved, kept_past, saved_from, text_of
from specterm.session.store import Store, left_behind, sessions


@pytest.fixture(autouse=True)
def _own_state(tmp_path, monkeypatch):
    """Keep the sessions of the tests away from the user's."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))


def session(tmp_path, text="new", **more):
    """Return a session with something of everything."""
    pin = Pin("a", "H = p^2\n", tmp_path, 3, None, 1e-8)
    book = Notebook((Entry("prepared", "s"), Entry("measured", "x", 1.0, 0.5, 1.5, 0.25, "nm")), 7)
    document = Document(text, tmp_path / "a.sheet", "old")
    return Saved(document, tmp_path, ("old",), (pin,), book, {"chosen": 2}, 1.5, 1e-6, **more)


def test_a_session_comes_back_from_its_text(tmp_path):
    """What is written is what is read, nan of an entry included."""
    saved = session(tmp_path)
    again = saved_from(text_of(saved))
    assert text_of(again) == text_of(saved)
    assert again.document == saved.document
    assert again.notebook == saved.notebook


@pytest.mark.parametrize("name", ["text", "saved", "past", "pins", "notebook", "tolerance", "near", "closed", "folder"])
@pytest.mark.parametrize("value", [7, "\x1b[2J", [["\x1b"]], {"a": 1}, None, 1e999])
def test_broken_sessions_are_refused_or_harmless(tmp_path, name, value):
    """Whatever stands in a session's file, it is refused, or what comes out holds no control character."""
    data = json.loads(text_of(session(tmp_path)))
    data[name] = value
    try:
        saved = saved_from(json.dumps(data))
    except SheetError:
        return
    texts = [saved.document.text, *saved.past, *(pin.text for pin in saved.pins)]
    assert all("\x1b" not in text for text in texts)


@pytest.mark.parametrize("text", ["", "[", "[" * 10_000, "{}", "null", '{"text": 1e999}', '{"text": NaN}'])
def test_what_is_no_session_is_refused(text):
    """Broken JSON, deep nesting and other data are refused with words."""
    with pytest.raises(SheetError, match="no session"):
        saved_from(text)


def test_the_past_is_bounded():
    """The newest texts are kept, as many as may be."""
    assert len(kept_past([str(n) for n in range(1000)])) == MOST_PAST
    assert kept_past(["a" * LARGEST_PAST, "b" * LARGEST_PAST]) == ("b" * LARGEST_PAST,)


def test_a_running_session_is_not_offered(tmp_path):
    """While the lock is held the file belongs to the running session; once it is let go it is found, the newest first."""
    one, two = Store(), Store()
    assert one.keep(session(tmp_path))
    assert two.keep(session(tmp_path, "newer"))
    path = tmp_path / "a.sheet"
    assert left_behind(path) == ()
    one.leave()
    (left,) = left_behind(path)
    assert left.saved.document.text == "new"
    os.utime(left.file, (1, 1))
    two.leave()
    assert [one.saved.document.text for one in left_behind(path)] == ["newer", "new"]
    assert left_behind(tmp_path / "b.sheet") == ()
    left.remove()
    assert len(left_behind(path)) == 1


def test_nothing_worth_keeping_leaves_nothing(tmp_path):
    """A session without unsaved text, pins and notebook has no file; a saved one loses it."""
    store = Store()
    path = tmp_path / "a.sheet"
    assert store.keep(Saved(Document("same", path, "same"), tmp_path))
    assert not sessions().exists()
    assert store.keep(Saved(Document("other", path, "same"), tmp_path))
    assert len(list(sessions().glob("*.json"))) == 1
    assert store.keep(Saved(Document("same", path, "same"), tmp_path))
    assert list(sessions().iterdir()) == []


def test_a_session_moves_with_its_document(tmp_path):
    """Saved under another name, a session is found under that one."""
    store = Store()
    saved = session(tmp_path)
    store.keep(saved)
    moved = Saved(Document("new", tmp_path / "b.sheet", "old"), tmp_path)
    store.keep(moved)
    store.leave()
    assert left_behind(tmp_path / "a.sheet") == ()
    assert len(left_behind(tmp_path / "b.sheet")) == 1


def test_a_disk_that_refuses_is_told_not_raised(tmp_path, monkeypatch):
    """Where nothing can be written `keep` says so, and nothing is found."""
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    assert not Store().keep(session(tmp_path))
    assert left_behind(tmp_path / "a.sheet") == ()
