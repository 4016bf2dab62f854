"""What the figure's place can show instead of the figure: one file a page."""

from specterm.tui.pages.registry import LETTERS, NAMES, PAGES, page_of

__all__ = ["LETTERS", "NAMES", "PAGES", "page_of"]
