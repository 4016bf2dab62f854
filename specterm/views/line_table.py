"""The table of lines: energy, dipole, strength and what follows from them where there are units."""

from __future__ import annotations

import math
from collections.abc import Sequence

from specterm.analysis.lines import Line
from specterm.views.element_table import element_text
from specterm.views.numbers import short
from specterm.views.plain_table import bare, sure, text_columns


def line_table(lines: Sequence[Line], energy: str = "", length: str = "", dipole: tuple[float, str] = (1.0, "")) -> str:
    """Return lines as aligned plain text; see `line_columns`."""
    return text_columns(*line_columns(lines, energy, length, dipole))


def line_columns(
    lines: Sequence[Line], energy: str = "", length: str = "", dipole: tuple[float, str] = (1.0, "")
) -> tuple[list[str], list[list[str]]]:
    """Return headings and rows of a table of lines; columns that no line has a number for are left out.

    `energy` and `length` name units; dipoles are divided by the number in `dipole` and are then in the unit there.
    """
    by, own = dipole
    strengths = [line.strength for line in lines]
    columns: list[tuple[str, Sequence[str]]] = [
        ("from", [str(line.start) for line in lines]),
        ("to", [str(line.to) for line in lines]),
        (f"energy ({energy})" if energy else "energy", sure([i.energy for i in lines], [i.energy_error for i in lines])),
        (
            f"dipole ({own})" if own else "dipole",
            [element_text(i.dipole / by, math.inf if i.dipole_error is None else i.dipole_error / by) for i in lines],
        ),
        (
            "strength",
            ["-" if s is None else short(s) if _seen(line) else "0" for s, line in zip(strengths, lines, strict=True)],
        ),
        (f"wavelength ({length})" if length else "wavelength", bare([line.wavelength for line in lines])),
        ("|dipole|^2", [short(abs(line.dipole / by) ** 2) if _seen(line) else "0" for line in lines]),
        ("cm^-1", bare([line.wavenumber for line in lines])),
        ("THz", bare([line.frequency for line in lines])),
        ("A (1/s)", bare([line.einstein if _seen(line) else None for line in lines], 4)),
        ("population", bare([line.population if line.population != 1 else None for line in lines], 4)),
    ]
    kept = [(heading, texts) for heading, texts in columns if any(text != "-" for text in texts)]
    rows = [[texts[row] for _, texts in kept] for row in range(len(lines))]
    return [heading for heading, _ in kept], rows


def _seen(line: Line) -> bool:
    """Say whether the dipole is more than its own error."""
    return line.dipole_error is None or abs(line.dipole) > line.dipole_error
