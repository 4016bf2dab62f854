"""Where the sheet comes from: a file, a preset, standard input, or the command line itself."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

from specterm.errors import SheetError
from specterm.language import decode
from specterm.session.document import LARGEST, read_text
from specterm.session.presets import find, presets


@dataclass(frozen=True)
class Source:
    """The sheet's text, the name errors give it, its file (or None), and the folder its relative paths start from."""

    text: str
    name: str
    path: Path | None
    folder: Path


def read_source(sheet: str | None, text: str | None) -> Source:
    """Return the sheet named on the command line, or given there; SheetError where there is none."""
    if text is not None:
        if sheet is not None:
            raise SheetError("both a sheet and -e are given", mend="give one of them")
        return Source(text, "-e", None, Path())
    if sheet is None:
        raise SheetError("no sheet is given", mend="name a file or a preset, or write -e 'H = p^2 + x^4; x in (-inf, inf)'")
    if sheet == "-":
        if sys.stdin is None:
            raise SheetError("standard input is closed", mend="name a file, or write the sheet behind -e")
        data = sys.stdin.buffer.read(LARGEST + 1)
        if len(data) > LARGEST:
            raise SheetError("standard input is too large: a sheet holds at most 1 MB", mend="take data out into a table")
        return Source(decode(data), "standard input", None, Path())
    path = Path(sheet)
    known = [preset.name for preset in presets()]
    if path.suffix == "" and sheet in known and not path.exists():
        preset = find(sheet)
        return Source(read_text(preset.path), f"preset {sheet}", None, preset.path.parent)
    if not path.exists() and path.suffix == "" and path.parent == Path():
        raise SheetError(f"there is neither a file nor a preset called {sheet}", mend=f"presets: {', '.join(known)}")
    return Source(read_text(path), sheet, path, path.parent)


def overrides(pairs: list[str]) -> dict[str, str]:
    """Return what `--set NAME=VALUE` asks for; SheetError where the sign is missing."""
    found = {}
    for pair in pairs:
        name, sign, value = pair.partition("=")
        if not sign or not name.strip() or not value.strip():
            raise SheetError(f"--set {pair}: expected NAME=VALUE", mend="for instance --set F=30")
        found[name.strip()] = value.strip()
    return found
