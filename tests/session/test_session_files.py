"""Documents and their files: nothing half written, nothing special read."""

import os
import stat

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specterm.errors import SheetError
from specterm.session import presets
from specterm.session.document import LARGEST, Document, checked, load, save


def test_load_and_save_keep_the_text(tmp_path):
    """What is saved is what is loaded, comments, tabs and Greek letters included."""
    path = tmp_path / "a.sheet"
    text = "# ψ\nH = p^2 + x^2\n\tx in (-inf, inf)"
    saved = save(Document(text), path)
    assert load(path) == saved == Document(text, path, text)
    assert not saved.changed
    assert saved.edited(text + " ").changed


def test_save_keeps_the_mode_and_leaves_no_rest(tmp_path):
    """An existing file keeps its permissions, and no other file stays behind."""
    path = tmp_path / "a.sheet"
    path.write_text("old")
    path.chmod(0o640)
    save(Document("new"), path)
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == ["a.sheet"]


def test_save_goes_through_a_link(tmp_path):
    """Saving through a symbolic link replaces what it points to, not the link."""
    (tmp_path / "real.sheet").write_text("old")
    (tmp_path / "link.sheet").symlink_to("real.sheet")
    save(Document("new"), tmp_path / "link.sheet")
    assert (tmp_path / "real.sheet").read_text() == "new"
    assert (tmp_path / "link.sheet").is_symlink()


def test_a_failed_save_leaves_the_old_file(tmp_path, monkeypatch):
    """When the disk is full the old text stays, the new file is gone, and the error says why."""
    path = tmp_path / "a.sheet"
    path.write_text("old")

    def full(_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(SheetError, match="no space left"):
        save(Document("new"), path)
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["a.sheet"]


def test_save_needs_a_regular_target(tmp_path):
    """No file yet, a folder, a missing folder: each is refused with words."""
    with pytest.raises(SheetError, match="no file yet"):
        save(Document("x"))
    with pytest.raises(SheetError, match="not a regular file"):
        save(Document("x"), tmp_path)
    with pytest.raises(SheetError, match="cannot write"):
        save(Document("x"), tmp_path / "no" / "a.sheet")


def test_special_files_are_refused(tmp_path):
    """A pipe, a folder, a device and a missing file are refused at once instead of waited for."""
    os.mkfifo(tmp_path / "pipe")
    for path in (tmp_path / "pipe", tmp_path, "/dev/zero"):
        with pytest.raises(SheetError, match=r"not a regular file"):
            load(tmp_path / path)
    with pytest.raises(SheetError, match=r"cannot read .*no such file"):
        load(tmp_path / "missing")


def test_large_and_odd_texts_are_refused(tmp_path):
    """More than 1 MB, bytes that are not UTF-8 and control characters are refused; Windows line ends are taken."""
    path = tmp_path / "a.sheet"
    refused = ((b"#" * (LARGEST + 1), "larger than 1 MB"), (b"\xff\xfe", "not UTF-8"), (b"a\n\x1b[2J", "line 2, code 27"))
    for data, words in refused:
        path.write_bytes(data)
        with pytest.raises(SheetError, match=words):
            load(path)
    path.write_bytes(b"#" * LARGEST)
    assert len(load(path).text) == LARGEST
    path.write_bytes(b"\xef\xbb\xbfa\r\nb")
    assert load(path).text == "a\nb"


@given(st.text())
def test_checked_text_cannot_steer_a_terminal(text):
    """Text with an escape, a carriage return or a C1 control is refused; what passes is unchanged."""
    if any((ord(c) < 32 and c not in "\n\t") or 127 <= ord(c) < 160 for c in text):
        with pytest.raises(SheetError, match="control character"):
            checked(text, "it")
    elif text.isascii():
        assert checked(text, "it") == text


def test_presets_by_name(tmp_path):
    """Presets are listed by name with their first comment line, found by name, and a wrong name lists them."""
    (tmp_path / "b-well.sheet").write_text("\n# A well (invented)\nH = p^2\n")
    (tmp_path / "a-trap.sheet").write_text("H = p^2\n")
    (tmp_path / "data.csv").write_text("1,2")
    assert presets.names(tmp_path) == (("a-trap", ""), ("b-well", "A well (invented)"))
    assert presets.read("b-well", tmp_path).startswith("\n# A well")
    with pytest.raises(SheetError, match="no preset called 'c'") as caught:
        presets.find("c", tmp_path)
    assert "a-trap, b-well" in caught.value.mend


def test_presets_have_a_place():
    """The presets lie in the package or beside it."""
    assert presets.folder().name == "presets"
