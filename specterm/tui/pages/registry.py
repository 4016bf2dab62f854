"""All pages, by name, in the order of the keys that show them."""

from __future__ import annotations

from specterm.tui.look import Look
from specterm.tui.pages.fit import FIT
from specterm.tui.pages.lines import LINES
from specterm.tui.pages.matrix import MATRIX
from specterm.tui.pages.means import MEANS
from specterm.tui.pages.momentum import MOMENTUM
from specterm.tui.pages.notebook import NOTEBOOK
from specterm.tui.pages.page import Page
from specterm.tui.pages.slopes import SLOPES
from specterm.tui.pages.sweep import SWEEP
from specterm.tui.pages.time import TIME

FIGURE = "figure"
PAGES = (MEANS, MATRIX, LINES, TIME, NOTEBOOK, SLOPES, SWEEP, FIT)
NAMES = (FIGURE, *(page.name for page in PAGES))
LETTERS = {FIT.name: "K"}
"""The keys of the pages that have no digit."""
_BY_NAME = {page.name: page for page in PAGES}


def page_of(look: Look) -> Page | None:
    """Return the page shown, None for the figure itself."""
    if look.page == FIGURE:
        return MOMENTUM if look.mode == MOMENTUM.name else None
    return _BY_NAME[look.page]
