"""Where the panes stand: sheet over table beside the figure in a wide screen, table beside figure or sheet in a narrow one."""

from __future__ import annotations

WIDE = 100
"""From this width on the sheet has a place of its own."""

BESIDE = 130
"""From this width on means and spreads stand beside the level, below it on a line of their own."""

LOW = 16
"""Below this height there is no room for that line."""

SMALLEST = (40, 10)
"""Columns and rows below which the screen only says what it needs."""

CSS = """
Screen { layers: base top; background: ansi_default; overflow: hidden; }
#needs { display: none; layer: top; dock: top; width: 100%; height: 100%; background: ansi_default; }
.tiny #needs { display: block; }
#main { height: 1fr; width: 100%; }
.wide #main { layout: grid; grid-size: 2 2; grid-columns: 2fr 3fr; grid-rows: 1fr 1fr; grid-gutter: 0 1; }
.wide #figure { row-span: 2; }
.narrow #main { layout: horizontal; }
.narrow #levels { dock: left; width: 36; max-width: 50%; margin-right: 1; }
#moments { display: none; }
.apart #moments { display: block; }
#figure, #levels { height: 1fr; width: 1fr; }
"""
