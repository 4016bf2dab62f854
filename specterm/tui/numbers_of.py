"""The plain numbers of a sheet's text, kept, as every redraw asks for them."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

from specterm.errors import SpectermError

if TYPE_CHECKING:
    from specterm.language.edits import NumberPlace


@lru_cache(maxsize=8)
def numbers_of(text: str) -> dict[str, NumberPlace]:
    """Return the plain numbers of a text by name, none where it cannot be read."""
    from specterm.language.edits import plain_numbers  # noqa: PLC0415 - heavy

    try:
        return plain_numbers(text)
    except SpectermError:
        return {}
