"""The keys of the screen, as data: one table for bindings, the bottom line, the help and the command list."""

from __future__ import annotations

from dataclasses import dataclass

CONTROL = ".control"
"""What the id of a binding to control keys ends with."""


@dataclass(frozen=True, slots=True)
class Key:
    """One action: `id` for key maps, `keys` separated by commas, the action's name, where it belongs, what it does.

    `short` stands in the bottom line, "" leaves it out there; `shown` is how the keys are written for a reader.
    """

    id: str
    keys: str
    action: str
    area: str
    verb: str
    tooltip: str
    short: str = ""
    shown: str = ""

    @property
    def bound(self) -> tuple[tuple[str, str, str], ...]:
        """Bindings: keys, action, id. Plain keys act on the levels only, control keys while typing too."""
        control = [name for name in self.keys.split(",") if name.startswith("ctrl+")]
        plain = [name for name in self.keys.split(",") if name not in control]
        made = ((",".join(plain), self.action, self.id), (",".join(control), f"also({self.action!r})", self.id + CONTROL))
        return tuple(binding for binding in made if binding[0])


KEYS = (
    Key("level.up", "up,k", "step(1)", "level", "Next higher", "Choose the next level up in energy", "up/down level", "up k"),
    Key("level.down", "down,j", "step(-1)", "level", "Next lower", "Choose the next level down in energy", "", "down j"),
    Key("level.jump_up", "pageup", "step(5)", "level", "Five higher", "Go five levels up", "", "page up"),
    Key("level.jump_down", "pagedown", "step(-5)", "level", "Five lower", "Go five levels down", "", "page down"),
    Key("level.first", "home,0", "end(-1)", "level", "Lowest", "Choose the lowest level in energy", "", "home 0"),
    Key("level.last", "end,9", "end(1)", "level", "Highest", "Choose the highest level in energy", "", "end 9"),
    Key("level.more", "plus,equals_sign", "count(1)", "level", "More", "Compute more levels", "+/- count", "+ ="),
    Key("level.fewer", "minus", "count(-1)", "level", "Fewer", "Compute fewer levels", "", "-"),
    Key("level.moments", "m", "moments", "level", "Moments", "Show or hide means and spreads of place and momentum", "", "m"),
    Key("figure.view", "v", "view", "figure", "Next view", "psi, |psi|^2, or level lines only", "v view", "v"),
    Key("figure.glyphs", "g", "glyphs", "figure", "Next glyphs", "Braille, block or plain ASCII characters", "", "g"),
    Key("figure.copy", "y", "copy", "figure", "Copy", "Levels and figure as text to a file and the clipboard", "", "y"),
    Key("level.near", "f", "near", "level", "Near an energy", "Find the levels nearest to an energy", "", "f"),
    Key("level.tolerance", "t", "tolerance", "level", "Tolerance", "Ask for another relative error", "", "t"),
    Key("level.details", "i", "details", "level", "In full", "All that the lines below say, unabridged", "", "i"),
    Key("weights.state", "s", "weigh", "weights", "Next state", "Weights of a prepared state, the level, none", "s state", "s"),
    Key("weights.any", "S", "weigh_any", "weights", "Any state", "Weights of a prepared state or a level from a list", "", "S"),
    Key("sheet.edit", "e,enter", "edit", "sheet", "Edit", "Type in the sheet; Tab comes back", "e edit", "e enter"),
    Key("sheet.undo", "u", "undo", "sheet", "Undo", "Take back the last edit of the sheet", "", "u"),
    Key("sheet.save", "w,ctrl+s", "save", "sheet", "Save", "Write the sheet to its file", "w save", "w ctrl+s"),
    Key("sheet.save_as", "a", "save_as", "sheet", "Save as", "Write the sheet to another file", "", "a"),
    Key("sheet.open", "o", "open", "sheet", "Open", "Open another sheet", "o open", "o"),
    Key("sheet.preset", "n", "preset", "sheet", "New from preset", "Start from a sheet that comes with specterm", "n new", "n"),
    Key("work.stop", "x", "stop", "work", "Stop", "Stop the computation that is running", "", "x"),
    Key("work.again", "r", "again", "work", "Compute again", "Compute the levels again", "", "r"),
    Key("app.commands", "slash,colon,ctrl+p", "commands", "app", "Commands", "Find any action by its name", "", "/ :"),
    Key("app.help", "question_mark,h", "help", "app", "Help", "List the keys", "? help", "? h"),
    Key("app.suspend", "ctrl+z", "suspend", "app", "Suspend", "Back to the shell for now; fg comes back", "", "ctrl+z"),
    Key("app.quit", "q,ctrl+q", "leave", "app", "Quit", "Leave; asks when there is unsaved text", "q quit", "q ctrl+q"),
)
TYPING = (
    Key("typing.done", "tab,shift+tab", "done", "typing", "Back", "Leave the sheet", "Tab back to the levels", "tab"),
    Key("typing.save", "ctrl+s", "save", "typing", "Save", "Write the sheet to its file", "ctrl+s save", "ctrl+s"),
    Key("typing.undo", "ctrl+z", "undo", "typing", "Undo", "Take back the last edit", "ctrl+z undo", "ctrl+z"),
)


ACTIONS = frozenset(key.action.partition("(")[0] for key in KEYS)


def bottom(keys: tuple[Key, ...]) -> tuple[str, ...]:
    """Return what the bottom line says, most important first."""
    named = {key.id: key.short for key in keys if key.short}
    last = [named.pop(name) for name in ("app.help", "app.quit") if name in named]
    return (*named.values(), *last)
