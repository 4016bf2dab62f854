"""Text -> sheet. Nothing here evaluates anything: a sheet is data."""

from specterm.language.entry import decode, parse, parse_expression

__all__ = ["decode", "parse", "parse_expression"]
