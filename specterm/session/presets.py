"""The sheets that come with specterm."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from specterm.errors import SheetError, printable
from specterm.session.document import read_text

_PACKAGE = Path(__file__).resolve().parent.parent


@dataclass(frozen=True, slots=True)
class Preset:
    """A preset: its name, its title (the first comment line of its sheet) and its file."""

    name: str
    title: str
    path: Path


def folder() -> Path:
    """Return where the presets lie: inside the installed package, or beside it in a working copy."""
    inside = _PACKAGE / "presets"
    return inside if inside.is_dir() else _PACKAGE.parent / "presets"


def presets(place: Path | None = None) -> tuple[Preset, ...]:
    """Return all presets in the order of their names; `place` is the folder to look in instead of the usual one."""
    return tuple(Preset(path.stem, title_of(read_text(path)), path) for path in sorted((place or folder()).glob("*.sheet")))


def names(place: Path | None = None) -> tuple[tuple[str, str], ...]:
    """Return (name, title) of all presets."""
    return tuple((preset.name, preset.title) for preset in presets(place))


def title_of(text: str) -> str:
    """Return the first comment line of a sheet without its mark, "" when it does not start with one."""
    for line in text.split("\n"):
        words = line.strip()
        if words:
            return printable(words.lstrip("#").strip()) if words.startswith("#") else ""
    return ""


def find(name: str, place: Path | None = None) -> Preset:
    """Return the preset called `name`; raises SheetError that names the presets there are."""
    known = presets(place)
    for preset in known:
        if preset.name == name:
            return preset
    listed = ", ".join(preset.name for preset in known) or "none"
    raise SheetError(f"there is no preset called {printable(name)!r}", mend=f"the presets are: {listed}")


def titled(text: str, place: Path) -> str:
    """Return the name of the preset in the folder `place` that has this text, or `untitled`; only presets are looked at."""
    if place != folder():
        return "untitled"
    return next((path.stem for path in sorted(place.glob("*.sheet")) if read_text(path) == text), "untitled")


def read(name: str, place: Path | None = None) -> str:
    """Return the text of the preset called `name`; raises SheetError."""
    return read_text(find(name, place).path)
