"""Results as data: what JSON and CSV hold, the same for the command line and for what the screen exports."""

from specterm.session.records.record import Record
from specterm.session.records.writing import to_csv, to_json

__all__ = ["Record", "to_csv", "to_json"]
