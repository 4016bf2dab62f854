"""What the figure's place can show instead of the figure: one file a page."""

from specterm.tui.pages.registry import NAMES, PAGES, page_of

__all__ = ["NAMES", "PAGES", "page_of"]
