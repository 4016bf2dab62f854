"""The keys of the screen, as data: one table for bindings, the bottom line, the help and the command list."""

from __future__ import annotations

from dataclasses import dataclass

ALWAYS = ("page.figure",)
"""Keys of pages that the bottom line names on every page."""

PAGED = ("page", "notebook")
"""Areas whose keys act on pages."""

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
    Key("figure.view", "v", "view", "figure", "Next view", "psi, |psi|^2, level lines only, or momenta", "v view", "v"),
    Key("figure.glyphs", "g", "glyphs", "figure", "Next glyphs", "Braille, block or plain ASCII characters", "", "g"),
    Key("figure.copy", "y", "copy", "figure", "Copy", "Levels and figure as text to a file and the clipboard", "", "y"),
    Key("level.near", "f", "near", "level", "Near an energy", "Find the levels nearest to an energy", "", "f"),
    Key("level.tolerance", "t", "tolerance", "level", "Tolerance", "Ask for another relative error", "", "t"),
    Key("level.details", "i", "details", "level", "In full", "All that the lines below say, unabridged", "", "i"),
    Key("weights.state", "s", "weigh", "weights", "Next state", "Weights of a prepared state, the level, none", "s state", "s"),
    Key("weights.any", "S", "weigh_any", "weights", "Any state", "Weights of a prepared state or a level from a list", "", "S"),
    Key("weights.share", "W", "share", "weights", "Hold a share", "As many levels as hold a share of the state", "", "W"),
    Key("page.figure", "1", "page('figure')", "page", "Figure", "Show the figure", "1-8 page", "1"),
    Key("page.means", "2", "page('means')", "page", "Means", "Means and spreads of the observables", "", "2"),
    Key("page.matrix", "3", "page('matrix')", "page", "Matrix elements", "An observable between levels: map, table", "", "3"),
    Key("page.lines", "4", "page('lines')", "page", "Lines", "Transitions, with strengths and a spectrum", "", "4"),
    Key("page.time", "5", "page('time')", "page", "Time", "What becomes of a state: survival, means, density", "", "5"),
    Key("page.notebook", "6", "page('notebook')", "page", "Notebook", "Measurements, one after the other", "", "6"),
    Key("page.slopes", "7", "page('slopes')", "page", "Slopes", "Derivatives of levels by the numbers of the sheet", "", "7"),
    Key("page.sweep", "8", "page('sweep')", "page", "Sweep", "Levels against a number of the sheet", "", "8"),
    Key("page.fit", "K", "page('fit')", "page", "Fit", "Numbers of the sheet that match observed lines", "", "K"),
    Key("page.next", "tab", "turn(1)", "page", "Next page", "Show the next page", "", "tab"),
    Key("page.back", "shift+tab", "turn(-1)", "page", "Page before", "Show the page before", "", "shift+tab"),
    Key("page.observable", "d", "observable", "page", "Observable", "The observable of the page", "d observable", "d"),
    Key("page.second", "D", "second", "page", "Second observable", "One more; in the notebook: both orders", "D second", "D"),
    Key("page.amount", "l", "amount", "page", "Range", "Times; temperature; sweep; logarithmic map", "l range", "l"),
    Key("page.breadth", "b", "breadth", "page", "Breadth", "Broadening of lines; bins in the notebook", "b breadth", "b"),
    Key("page.every", "z", "every", "page", "From all", "Lines from all levels; approve a match", "z from all", "z"),
    Key("page.into", "F", "into", "page", "Into a sheet", "Lines into another sheet; the lines to fit", "F into a sheet", "F"),
    Key("page.along", "right", "along(1)", "page", "Later", "Move the cursor along", "left/right cursor", "right"),
    Key("page.along_back", "left", "along(-1)", "page", "Earlier", "Move the cursor back", "", "left"),
    Key("page.along_far", "greater_than_sign", "along(10)", "page", "Ten later", "Ten steps along", "", ">"),
    Key("page.along_far_back", "less_than_sign", "along(-10)", "page", "Ten earlier", "Ten steps back", "", "<"),
    Key("page.scroll", "full_stop", "scroll(1)", "page", "Scroll down", "Further down the page's table", "", "."),
    Key("page.scroll_back", "comma", "scroll(-1)", "page", "Scroll up", "Further up the page's table", "", ","),
    Key("page.export", "E", "export", "page", "Export", "Levels, weights, the page or the states to a file", "", "E"),
    Key("book.draw", "c", "draw", "notebook", "Draw", "Measure: an outcome is drawn", "c draw", "c"),
    Key("book.choose", "C", "choose", "notebook", "Choose", "Measure: choose the outcome", "C choose", "C"),
    Key("book.wait", "L", "wait", "notebook", "Wait", "Let time pass before the next measurement", "L wait", "L"),
    Key("book.prepare", "N", "prepare", "notebook", "Prepare", "Prepare a state anew", "N prepare", "N"),
    Key("book.runs", "R", "runs", "notebook", "Many runs", "Repeat all that was measured, and count", "R runs", "R"),
    Key("book.undo", "U", "undo_entry", "notebook", "Undo an entry", "Take back the last entry of the notebook", "U undo", "U"),
    Key("book.seed", "Z", "seed", "notebook", "Seed", "Set the seed of the draws", "", "Z"),
    Key("sheet.edit", "e,enter", "edit", "sheet", "Edit", "Type in the sheet; Tab comes back", "e edit", "e enter"),
    Key("sheet.undo", "u", "undo", "sheet", "Undo", "Take back the last edit of the sheet", "", "u"),
    Key("sheet.save", "w,ctrl+s", "save", "sheet", "Save", "Write the sheet to its file", "w save", "w ctrl+s"),
    Key("sheet.save_as", "a", "save_as", "sheet", "Save as", "Write the sheet to another file", "", "a"),
    Key("sheet.open", "o", "open", "sheet", "Open", "Open another sheet", "o open", "o"),
    Key("sheet.preset", "n", "preset", "sheet", "New from preset", "Start from a sheet that comes with specterm", "n new", "n"),
    Key("tune.pick", "p", "pick", "parameter", "Pick a number", "Pick the number of the sheet to nudge", "p pick", "p"),
    Key("tune.up", "right_square_bracket", "nudge(1)", "parameter", "Nudge up", "One step up", "[ ] nudge", "]"),
    Key("tune.down", "left_square_bracket", "nudge(-1)", "parameter", "Nudge down", "One step down", "", "["),
    Key("tune.coarser", "right_curly_bracket", "fineness(1)", "parameter", "Coarser", "Steps ten times as large", "", "}"),
    Key("tune.finer", "left_curly_bracket", "fineness(-1)", "parameter", "Finer", "Steps a tenth as large", "", "{"),
    Key("tune.take", "T", "take_value", "page", "Take", "Write what was found into the sheet", "T take", "T"),
    Key("tune.column", "V", "column", "parameter", "Column", "Table: nothing more, slopes, shifts from a pin", "", "V"),
    Key("pin.pin", "P", "pin", "pins", "Pin", "Keep this spectrum; it stands beside the next ones", "P pin", "P"),
    Key("pin.list", "B", "pins", "pins", "Pins", "Stand beside, swap, rename or drop a pin", "", "B"),
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


def bottom(keys: tuple[Key, ...], first: tuple[str | tuple[str, str], ...] = ()) -> tuple[str, ...]:
    """Return what the bottom line says, most important first: the keys whose ids are in `first`, then the usual ones.

    An id may come with other words than the usual ones.
    """
    said = dict(one for one in first if isinstance(one, tuple))
    first = tuple(one if isinstance(one, str) else one[0] for one in first)
    wanted = [key for key in keys if key.area not in PAGED or key.id in ALWAYS or key.id in first]
    named = {key.id: said.get(key.id, key.short) for key in wanted if key.short}
    named = {**{name: named[name] for name in first if name in named}, **named}
    last = [named.pop(name) for name in ("app.help", "app.quit") if name in named]
    return (*named.values(), *last)
