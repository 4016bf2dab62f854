"""The type of values on the way through an expression."""

from typing import Any

Values = Any
"""An array with one value for each place, or a number where nothing depends on the place; real or complex."""
