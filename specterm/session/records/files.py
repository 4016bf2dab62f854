"""Results as the bytes of a file, in the form its name ends with."""

from __future__ import annotations

import io
from typing import Any

from specterm.errors import SheetError
from specterm.session.records.record import Record
from specterm.session.records.states import StatesRecord


def exported(data: Any, suffix: str) -> bytes:  # noqa: ANN401 - a Record or a StatesRecord
    """Return the bytes of a file whose name ends with `suffix`; SheetError for a form the data do not come in."""
    if isinstance(data, StatesRecord):
        if suffix == ".npz":
            return _packed(data)
        data = data.table()
    if isinstance(data, Record) and suffix == ".csv":
        return (data.csv() + "\n").encode("utf-8")
    if isinstance(data, Record) and suffix == ".json":
        return (data.json() + "\n").encode("utf-8")
    words = f"a file that ends with {suffix!r} is not known here"
    raise SheetError(words, mend="end it with .csv or .json; states with .csv or .npz")


def _packed(data: StatesRecord) -> bytes:
    """Return the arrays of states as an uncompressed archive of numpy arrays, without any object in it."""
    import numpy as np  # noqa: PLC0415 - it has been loaded by whoever made the data

    file = io.BytesIO()
    np.savez(file, allow_pickle=False, **data.arrays())
    return file.getvalue()
