"""Opening, saving and leaving: the dialogs around the document."""

from __future__ import annotations

import os
import re
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from specterm.errors import SheetError, SpectermError, printable
from specterm.session import presets
from specterm.session.document import Document, load, overwritten, save, shown, write_bytes, write_text
from specterm.session.place import folder as state_folder
from specterm.session.records.files import exported
from specterm.tui.dialogs import Chooser, Entry, Question

if TYPE_CHECKING:
    from specterm.tui.app import Specterm

_MOST = 500
_CLIPBOARD = 50_000


_NAMED = re.compile(r"\b(?:table|of)\s*\(?\s*\"([^\"]+)\"")


def _left_behind(text: str, old: Path, new: Path) -> tuple[str, Path] | None:
    """Return a file that the sheet names, found from the old folder on but not from the new one, and where it lies."""
    for name in _NAMED.findall(text):
        if (old / name).is_file() and not (new / name).exists():
            return printable(name), (old / name).resolve()
    return None


class Files:
    """The document's way in and out of one app."""

    def __init__(self, app: Specterm) -> None:
        """Serve `app`."""
        self.app = app

    def save(self, then: Callable[[], None] | None = None) -> None:
        """Write the document to its file, or ask for a name; `then` follows when it is written."""
        self.app.take_typed()
        if self.app.document.path is None:
            self.save_as(then)
            return
        path = self.app.document.path
        if not overwritten(self.app.document):
            self._write(path, then)
            return
        answers = {"w": "write over it", "a": "save under another name", "n": "go back"}

        def answered(letter: str | None) -> None:
            if letter == "w":
                self._write(path, then)
            elif letter == "a":
                self.save_as(then)

        words = f"{shown(path)} has been changed by somebody else since it was opened or saved here."
        self.app.ask(Question(words, answers), answered)

    def save_as(self, then: Callable[[], None] | None = None) -> None:
        """Ask for a name and write the document under it; an existing file of another name is asked about."""
        self.app.take_typed()
        path = self.app.document.path
        start = str(path) if path else f"{self.app.document.title}.sheet"

        def named(answer: str | None) -> None:
            if not answer:
                self.app.say("not saved", "warn")
                return
            target = Path(os.path.expanduser(answer))
            self._confirmed(target, lambda: self._write(target, then), known=target == path)

        self.app.ask(Chooser("Save the sheet as", (), free=True, text=start), named)

    def _confirmed(self, target: Path, go_on: Callable[[], None], *, known: bool = False) -> None:
        """Go on at once where nothing is at `target`, or what is there is `known`; else ask first."""
        if known or not target.exists():
            go_on()
            return
        question = Question(f"{shown(target)} exists. Replace it?", {"y": "replace it", "n": "keep it"})
        self.app.ask(question, lambda letter: go_on() if letter == "y" else None)

    def _write(self, path: Path, then: Callable[[], None] | None) -> None:
        """Write the document and say so."""
        try:
            document = save(self.app.document, path)
        except SheetError as error:
            self.app.say(f"{error.message}; {error.mend}", "warn")
            return
        left = _left_behind(document.text, self.app.folder, path.parent)
        self.app.adopt(document)
        if left:
            self.app.say(f"saved, but {left[0]} is not beside it: copy it from {shown(left[1])}", "warn")
        else:
            self.app.say(f"saved {shown(path)}", "good")
        if then is not None:
            then()

    def open(self) -> None:
        """Choose a sheet of the document's folder, or type a path, and open it."""
        folder = self.app.document.folder
        found = sorted(folder.glob("*.sheet"))[:_MOST]
        entries = [Entry(str(path), shown(Path(path.name))) for path in found]

        def chosen(answer: str | None) -> None:
            if answer is not None:
                path = Path(os.path.expanduser(answer))
                self._guarded(lambda: self._load(path if path.is_absolute() or path in found else folder / path))

        self.app.ask(Chooser(f"Open a sheet of {shown(folder.resolve())}, or type a path", entries, free=True), chosen)

    def _load(self, path: Path) -> None:
        """Open the sheet at `path`."""
        try:
            document = load(path)
        except SheetError as error:
            self.app.say(f"{error.message}; {error.mend}", "warn")
            return
        self.app.replace_document(document)

    def preset(self, words: str = "Start from a preset") -> None:
        """Choose a preset and start from its text; `words` stand over the list."""
        try:
            known = presets.presets()
        except SheetError as error:
            self.app.say(error.message, "warn")
            return
        if not known:
            self.app.say("there are no presets", "warn")
            return

        def chosen(answer: str | None) -> None:
            if answer is not None:
                self._guarded(lambda: self._start(answer))

        entries = [Entry(preset.name, preset.name, preset.title) for preset in known]
        self.app.ask(Chooser(words, entries), chosen)

    def _start(self, name: str) -> None:
        """Start from the preset called `name`, as a document without a file; tables beside the preset stay reachable."""
        try:
            preset = presets.find(name)
            text = load(preset.path).text
        except SheetError as error:
            self.app.say(error.message, "warn")
            return
        self.app.replace_document(Document(text, None, text, name), folder=preset.path.parent)

    def _guarded(self, go_on: Callable[[], None]) -> None:
        """Go on at once when all is saved, else ask first."""
        self.app.take_typed()
        if not self.app.document.changed:
            go_on()
            return
        answers = {"w": "save it first", "d": "drop the changes", "n": "go back"}

        def answered(letter: str | None) -> None:
            if letter == "w":
                self.save(go_on)
            elif letter == "d":
                go_on()

        self.app.ask(Question(f"{self.app.document.name} has unsaved text.", answers), answered)

    def copy(self, text: str) -> None:
        """Write `text` to a file, whose path is said, and send it to the terminal's clipboard, which may or may not take it."""
        if not text:
            self.app.say("there is nothing to copy", "warn")
            return
        path = state_folder() / "copied.txt"
        try:
            path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
            write_text(path, text)
        except (SheetError, OSError) as error:
            self.app.say(f"not written: {error}", "warn")
            return
        if len(text.encode()) > _CLIPBOARD:
            self.app.say(f"written to {shown(path)}; too long for a terminal's clipboard", "good")
            return
        self.app.copy_to_clipboard(text)
        self.app.say(f"written to {shown(path)}, and sent to the terminal's clipboard", "good")

    def export(self, what: str, make: Callable[[], Any]) -> None:
        """Ask for a file and write data to it, in the form that its name ends with; an existing file is asked about."""
        start = f"{Path(self.app.document.name).stem}-{what}.csv"

        def named(answer: str | None) -> None:
            if not answer:
                return
            target = Path(os.path.expanduser(answer))
            self._confirmed(target, lambda: self._export(target, make))

        self.app.ask(Chooser("Export to the file (.csv, .json or, for states, .npz)", (), free=True, text=start), named)

    def _export(self, path: Path, make: Callable[[], Any]) -> None:
        """Write the data and say so."""
        try:
            write_bytes(path, exported(make(), path.suffix))
        except SpectermError as error:
            self.app.say(f"{error.message}; {error.mend}", "warn")
            return
        self.app.say(f"written {shown(path)}", "good")

    def leave(self) -> None:
        """End the session; asks when there is unsaved text."""

        def go() -> None:
            self.app.work.stop()
            self.app.keeping.close()
            self.app.exit(0)

        self._guarded(go)
