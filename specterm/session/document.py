"""A sheet as a document: its text, its file, and whether the two agree."""

from __future__ import annotations

import contextlib
import os
import stat
import unicodedata
from dataclasses import dataclass, replace
from pathlib import Path

from specterm.errors import SheetError, printable
from specterm.regular import NotRegularError, TooLargeError, read_regular

LARGEST = 1_000_000
"""The largest sheet in bytes."""


@dataclass(frozen=True, slots=True)
class Document:
    """A sheet being worked on; `saved` is the text its file holds, or None while there is no file.

    `title` is what it is called without a file: the preset it started from.
    """

    text: str
    path: Path | None = None
    saved: str | None = None
    title: str = "untitled"

    @property
    def changed(self) -> bool:
        """Whether there is text that no file holds."""
        return self.text != (self.saved or "")

    @property
    def name(self) -> str:
        """Return the file's name, or the title."""
        return printable(self.path.name if self.path else self.title)

    @property
    def folder(self) -> Path:
        """Return the folder that relative paths in the sheet start from."""
        return self.path.parent if self.path else Path()

    def edited(self, text: str) -> Document:
        """Return the document with another text."""
        return replace(self, text=text)


def load(path: Path) -> Document:
    """Return the document held by the file at `path`.

    Raises SheetError when it cannot be read, is not a regular file, is larger than 1 MB, is not UTF-8 or holds control
    characters. Line ends become those of Unix.
    """
    text = read_text(path)
    return Document(text, path, text)


def read_text(path: Path, largest: int = LARGEST) -> str:
    """Return the text of a regular file of at most `largest` bytes; raises SheetError as `load` does."""
    try:
        data = read_regular(path, largest)
    except NotRegularError as error:
        raise SheetError(f"{shown(path)} is not a regular file", mend="give the path of a text file") from error
    except TooLargeError as error:
        words = f"{shown(path)} is larger than {largest // 1_000_000} MB"
        raise SheetError(words, mend="long tables belong in files of their own") from error
    except OSError as error:
        raise SheetError(f"cannot read {shown(path)}: {reason(error)}", mend="check the path and its permissions") from error
    try:
        text = data.decode("utf-8-sig").replace("\r\n", "\n")
    except UnicodeDecodeError as error:
        raise SheetError(f"{shown(path)} is not UTF-8 text (byte {error.start})", mend="save it as UTF-8") from error
    return checked(text, shown(path))


def checked(text: str, source: str) -> str:
    """Return the text; raises SheetError when it holds control characters other than tab and line end."""
    for place, character in enumerate(text):
        if not (character.isprintable() or character in "\n\t" or unicodedata.category(character) == "Zs"):
            row = text.count("\n", 0, place) + 1
            raise SheetError(f"{source} holds a control character (line {row}, code {ord(character)})", mend="remove it")
    return text


def overwritten(document: Document) -> bool:
    """Say whether the document's file holds a text that is neither the one last read or written here nor the present one."""
    if document.path is None or not document.path.exists():
        return False
    try:
        return read_text(document.path) not in (document.saved, document.text)
    except SheetError:
        return True


def save(document: Document, path: Path | None = None) -> Document:
    """Write the text to `path` (or to its own file) and return the document as saved.

    The file is replaced whole or not at all: the text goes to a new file beside it, is forced to the disk and takes the old
    one's place and mode. Raises SheetError when that fails; the old file is then untouched.
    """
    target = path or document.path
    if target is None:
        raise SheetError("the sheet has no file yet", mend="save it under a name")
    write_text(target, document.text)
    return Document(document.text, target, document.text)


def write_text(path: Path, text: str, *, durable: bool = True) -> None:
    """Replace the file at `path` by one that holds `text`, on the disk itself where `durable`; raises SheetError."""
    write_bytes(path, text.encode("utf-8"), durable=durable)


def write_bytes(path: Path, data: bytes, *, durable: bool = True) -> None:
    """Replace the file at `path` by one that holds `data`, on the disk itself where `durable`; raises SheetError."""
    try:
        real = Path(os.path.realpath(path))
        mode = _mode_of(real)
        _replace(real, data, mode, durable=durable)
    except (OSError, ValueError) as error:
        raise SheetError(f"cannot write {shown(path)}: {reason(error)}", mend="save under another name") from error


def _mode_of(path: Path) -> int | None:
    """Return the permissions of an existing regular file, or None; raises SheetError for anything that is not one."""
    try:
        found = path.stat()
    except FileNotFoundError:
        return None
    if not stat.S_ISREG(found.st_mode):
        raise SheetError(f"{shown(path)} is not a regular file", mend="save under another name")
    return stat.S_IMODE(found.st_mode)


def _replace(path: Path, data: bytes, mode: int | None, *, durable: bool) -> None:
    """Write a new file beside `path`, force it to the disk, and let it take the place of `path`."""
    fresh = path.with_name(f".{path.name[:100]}.{os.getpid()}.new")
    flags = os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_NOFOLLOW | os.O_CLOEXEC
    handle = os.open(fresh, flags, 0o666 if mode is None else mode)
    try:
        with os.fdopen(handle, "wb") as file:
            if mode is not None:
                os.fchmod(handle, mode)
            file.write(data)
            file.flush()
            if durable:
                os.fsync(handle)
        fresh.replace(path)
    except BaseException:
        with contextlib.suppress(OSError):
            fresh.unlink()
        raise
    if durable:
        _sync_folder(path.parent)


def _sync_folder(folder: Path) -> None:
    """Force a folder's entries to the disk where the system allows it."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY | os.O_CLOEXEC)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def shown(path: Path) -> str:
    """Return a path fit to be printed."""
    return printable(str(path)).replace("\n", "\N{REPLACEMENT CHARACTER}")


def reason(error: Exception) -> str:
    """Return why the system refused, in its own words."""
    return (getattr(error, "strerror", None) or str(error)).lower()
