"""Every view as text, at both sizes, in colour and without: what a change of looks must show in a diff.

After a change that is wanted: SPECTERM_SNAPSHOTS=write python -m pytest tests/tui/test_snapshots.py, and look at the diff.
"""

import os
import re
from pathlib import Path

import pytest
from fake import lines, settled

from specterm.session import presets
from specterm.tui.app import make_app
from specterm.tui.options import Options

FOLDER = Path(__file__).parent / "snapshots"
VIEWS = {
    "figure": [], "density": ["v"], "levels": ["v", "v"], "momenta": ["v", "v", "v"], "weights": ["s"], "means": ["2"],
    "matrix": ["3"], "lines": ["4"], "time": ["s", "5"], "notebook": ["s", "6"], "slopes": ["7"], "sweep": ["8"], "fit": ["K"],
    "help": ["?"], "editing": ["e"], "ascii": ["g", "g"],
}  # fmt: skip
SIZES = {"80x24": (80, 24), "120x40": (120, 40)}


def steady(text):
    """Return a screen without what differs between machines: times, and the last digits of values and errors."""
    text = re.sub(r"unknowns .*", "unknowns", text)
    text = re.sub(r"(-?\d+\.\d{5})\d*(\(\d\))?(e-?\d+)?", r"\1", text)
    text = re.sub(r"error <= \S+", "error <= E", text)
    text = re.sub(r"0\(\d\)(e-\d+)?", "0", text)
    return "\n".join(re.sub(r" +", " ", line).rstrip() for line in text.split("\n"))


async def screen(view, size):
    """Return the steady text of a view of a preset, and the styles in it."""
    preset = presets.find("double-well")
    app = make_app(preset.path.read_text(), None, Options(glyphs="braille", folder=preset.path.parent))
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        if VIEWS[view]:
            await pilot.press(*("question_mark" if key == "?" else key for key in VIEWS[view]))
            await settled(pilot)
        return steady("\n".join(lines(pilot)))


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("view", VIEWS)
async def test_view_is_as_kept(view, size):
    """The text of each view is the one kept."""
    file = FOLDER / f"{view}-{size}.txt"
    text = await screen(view, SIZES[size])
    if os.environ.get("SPECTERM_SNAPSHOTS") == "write":
        file.write_text(text + "\n")
    assert text + "\n" == file.read_text()


@pytest.mark.parametrize("view", ["figure", "weights", "means", "lines", "time", "notebook"])
async def test_no_colour_says_the_same(view, monkeypatch):
    """Without colour the text of a view is the same: nothing is told by colour alone."""
    monkeypatch.setenv("NO_COLOR", "1")
    assert await screen(view, (80, 24)) + "\n" == (FOLDER / f"{view}-80x24.txt").read_text()
