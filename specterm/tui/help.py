"""The help: the keys as they are bound now, grouped by what they act on."""

from __future__ import annotations

from collections.abc import Iterable

from textual.binding import Binding

from specterm.tui.keys import CONTROL, KEYS, TYPING, Key
from specterm.views.cells import Row, Rows, fit_row, pad

_AREAS = {
    "level": "Levels",
    "figure": "Figure",
    "weights": "Weights of a prepared state",
    "parameter": "Numbers of the sheet",
    "pins": "Pins",
    "page": "Pages",
    "notebook": "Notebook",
    "sheet": "Sheet",
    "work": "Computation",
    "app": "specterm",
    "typing": "While typing in the sheet",
}


def live(bindings: Iterable[Binding]) -> dict[str, str]:
    """Return the keys now bound to each binding id, written for a reader."""
    bound: dict[str, list[str]] = {}
    for binding in bindings:
        if binding.id:
            bound.setdefault(binding.id.removesuffix(CONTROL), []).append(readable(binding.key))
    return {name: " ".join(dict.fromkeys(keys)) for name, keys in bound.items()}


def readable(key: str) -> str:
    """Return a key's name as a reader knows it."""
    known = {
        "plus": "+", "equals_sign": "=", "minus": "-", "slash": "/", "colon": ":", "question_mark": "?", "pageup": "page up",
        "pagedown": "page down", "tab": "Tab", "enter": "Enter", "shift+tab": "shift+Tab", "right_square_bracket": "]",
        "left_square_bracket": "[", "right_curly_bracket": "}", "left_curly_bracket": "{", "full_stop": ".", "comma": ",",
        "greater_than_sign": ">", "less_than_sign": "<",
    }
    return known.get(key, key)


def lines(bound: dict[str, str], width: int) -> Rows:
    """Return the help in rows of `width` columns; `bound` maps binding ids to the keys that are live."""
    rows: list[Row] = []
    for area, heading in _AREAS.items():
        keys = [key for key in (*KEYS, *TYPING) if key.area == area and (key.id in bound or area == "typing")]
        if keys:
            rows += [((heading, "title"),), *(_line(key, bound.get(key.id, key.shown), width) for key in keys), ()]
    return tuple(fit_row(row, width) for row in rows[:-1])


def _line(key: Key, keys: str, width: int) -> Row:
    """Return the row of one action."""
    column = 18 if width < 70 else 22
    return (("  " + pad(keys, column - 2), "key"), (key.tooltip, "plain"))
