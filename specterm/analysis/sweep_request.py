"""What a sweep is asked for: the sheet as text, the parameters and their values, the quantity."""

from __future__ import annotations

import hashlib
import json
import math
import re
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from decimal import Decimal, localcontext
from functools import lru_cache
from pathlib import Path

from specterm.analysis.observables import observable
from specterm.analysis.unit_names import unit_of
from specterm.errors import SheetError
from specterm.language import parse
from specterm.language.edits import plain_numbers
from specterm.language.nodes import Sheet
from specterm.model import Model, build
from specterm.regular import read_regular

MOST_POINTS = 1_000_000
PLACES = 40
"""Decimal places that values of a range are worked out with."""
QUANTITIES = ("levels", "transitions", "expectation", "weights", "strengths")
LARGEST_FILE = 200_000_000


@dataclass(frozen=True)
class Axis:
    """A parameter and its values, in the unit its number is written in."""

    name: str
    values: tuple[float, ...]


@dataclass(frozen=True)
class Quantity:
    """What is followed: a `kind` of `QUANTITIES`, with the observable, state or dipole it needs in `detail`.

    `start` is the level that transitions and strengths start from.
    """

    kind: str = "levels"
    detail: str = ""
    start: int = 0


@dataclass(frozen=True)
class SweepRequest:
    """A whole sweep in plain text and numbers, so that it can be sent to other processes and machines.

    One axis, or two for a map (the last one runs fastest). `folder` is where paths in the sheet start; `overrides` are pairs of
    name and expression; `count`, `near` and `tolerance` are those of `solve`.
    """

    text: str
    axes: tuple[Axis, ...]
    folder: str = ""
    overrides: tuple[tuple[str, str], ...] = ()
    count: int | None = None
    near: float | None = None
    tolerance: float = 1e-8
    quantity: Quantity = Quantity()

    @property
    def size(self) -> int:
        """The number of points."""
        return math.prod(len(axis.values) for axis in self.axes)

    @property
    def row(self) -> int:
        """The number of points along the axis that runs fastest."""
        return len(self.axes[-1].values)

    def place(self, index: int) -> tuple[float, ...]:
        """Return the values of the parameters at a point."""
        if len(self.axes) == 1:
            return (self.axes[0].values[index],)
        return self.axes[0].values[index // self.row], self.axes[1].values[index % self.row]


def axis_of(text: str) -> Axis:
    """Return the axis that `NAME=A:B:COUNT` (both ends included), `NAME=log:A:B:COUNT` or `NAME=A,B,C` asks for."""
    name, sign, span = (part.strip() for part in text.partition("="))
    if not sign or not name or not span:
        raise _unreadable(text)
    logarithmic = span.lower().startswith("log:")
    parts = (span[4:] if logarithmic else span).split(":")
    if len(parts) == 1 and not logarithmic:
        return Axis(name, tuple(_number(part, text) for part in parts[0].split(",")))
    if len(parts) != 3 or not re.fullmatch(r"\s*\d+\s*", parts[2], re.ASCII):
        raise _unreadable(text)
    first, last, wanted = _number(parts[0], text), _number(parts[1], text), parts[2].strip().lstrip("0") or "0"
    if len(wanted) > len(str(MOST_POINTS)) or int(wanted) > MOST_POINTS:
        raise SheetError(f"{text}: too many points (at most {MOST_POINTS})", mend="choose a smaller count")
    count = int(wanted)
    if count < 1:
        raise SheetError(f"{text}: a sweep has at least one point", mend="choose a larger count")
    return Axis(name, _logarithmic(first, last, count, text) if logarithmic else _linear(first, last, count))


def _linear(first: float, last: float, count: int) -> tuple[float, ...]:
    """Return evenly spaced values, worked out in decimal: those that a person would write."""
    with localcontext(prec=PLACES):
        low, width = Decimal(repr(first)), Decimal(repr(last)) - Decimal(repr(first))
        inner = tuple(float(low + width * k / (count - 1)) for k in range(1, count - 1))
    return (first, *inner, last) if count > 1 else (first,)


def _logarithmic(first: float, last: float, count: int, text: str) -> tuple[float, ...]:
    """Return values spaced by equal factors, worked out in decimal."""
    if not first * last > 0:
        raise SheetError(f"{text}: a logarithmic range needs ends of one sign, neither of them 0", mend="move the end off 0")
    with localcontext(prec=PLACES):
        low = Decimal(repr(first))
        ratio = (Decimal(repr(last)) / low).ln()
        inner = tuple(float(low * (ratio * k / (count - 1)).exp()) for k in range(1, count - 1))
    return (first, *inner, last) if count > 1 else (first,)


def _number(text: str, whole: str) -> float:
    try:
        value = float(text)
    except ValueError:
        raise _unreadable(whole) from None
    if not math.isfinite(value):
        raise SheetError(f"{whole}: {text.strip()} is not a finite number", mend="give finite ends")
    return value


def _unreadable(text: str) -> SheetError:
    return SheetError(f"cannot read the range `{text}`", mend="write NAME=A:B:COUNT, NAME=log:A:B:COUNT, or NAME=A,B,C")


def quantity_of(text: str, start: int = 0) -> Quantity:
    """Return the quantity that `levels`, `transitions`, `expectation=OBS`, `weights=STATE` or `strengths[=OBS]` asks for."""
    kind, sign, detail = (part.strip() for part in text.partition("="))
    if kind not in QUANTITIES:
        raise SheetError(f"a sweep knows no quantity `{kind}`", mend=f"choose one of {', '.join(QUANTITIES)}")
    if kind in ("expectation", "weights") and not detail:
        needed = "an observable: expectation=x" if kind == "expectation" else "a state: weights=NAME"
        raise SheetError(f"the quantity `{kind}` needs {needed}", mend="say which")
    if kind in ("levels", "transitions") and sign:
        raise SheetError(f"the quantity `{kind}` takes nothing behind it", mend=f"write {kind}")
    return Quantity(kind, detail, start)


@lru_cache(maxsize=4)
def sheet_of(text: str) -> Sheet:
    """Return the sheet of a text; the last few are kept."""
    return parse(text)


@lru_cache(maxsize=4)
def written_units(text: str) -> dict[str, str]:
    """Return the unit each plain number of the sheet is written in, "" without one."""
    return {name: place.unit for name, place in plain_numbers(sheet_of(text)).items()}


def model_at(request: SweepRequest, place: Sequence[float]) -> Model:
    """Return the model at values of the parameters; a number stands in the unit the sheet writes it in.

    Raises SheetError, PhysicsError as `build` does.
    """
    units = written_units(request.text)
    changes = dict(request.overrides)
    for axis, value in zip(request.axes, place, strict=True):
        unit = units.get(axis.name, "")
        changes[axis.name] = f"{value!r} [{unit}]" if unit else repr(value)
    return build(sheet_of(request.text), folder=Path(request.folder), overrides=changes)


def refuse_bad(request: SweepRequest) -> Model:
    """Return the model at the first point that has one; SheetError where the request does not fit the sheet."""
    if not 1 <= len(request.axes) <= 2 or not all(axis.values for axis in request.axes):
        raise SheetError("a sweep runs over one parameter, or over two for a map", mend="give one or two ranges")
    names = [axis.name for axis in request.axes]
    if len(set(names)) < len(names):
        raise SheetError(f"`{names[0]}` is swept twice", mend="give two different parameters")
    both = set(names) & {name for name, _ in request.overrides}
    if both:
        raise SheetError(f"`{min(both)}` is swept and set at once", mend="leave one of them out")
    if request.size > MOST_POINTS:
        raise SheetError(f"{request.size} points are more than the {MOST_POINTS} allowed", mend="choose smaller counts")
    written = build(sheet_of(request.text), folder=Path(request.folder), overrides=dict(request.overrides))
    strange = [name for name in names if name in written.operators or name in written.functions]
    if strange:
        raise SheetError(f"`{strange[0]}` is no parameter", mend=f"parameters: {', '.join(written.parameters) or 'none'}")
    model = _first_model(request, written)
    quantity = request.quantity
    if quantity.kind == "expectation" or (quantity.kind == "strengths" and quantity.detail):
        observable(model, quantity.detail)
    if quantity.kind == "weights" and quantity.detail not in model.states and not quantity.detail.startswith("level("):
        raise SheetError(
            f"the sheet has no state `{quantity.detail}`", mend=f"states of the sheet: {', '.join(model.states) or 'none'}"
        )
    return model


def _first_model(request: SweepRequest, written: Model) -> Model:
    """Return the model at the first point where the sheet is one; the error of the first point where none is."""
    refused: SheetError | None = None
    for index in range(request.size):
        try:
            return model_at(request, request.place(index))
        except SheetError as error:
            refused = refused or error
            if not all(axis.name in written.parameters for axis in request.axes):
                break
    assert refused is not None
    raise refused


def quantity_unit(model: Model, quantity: Quantity) -> str:
    """Return the name of the unit a quantity is in, "" for pure numbers."""
    if quantity.kind in ("levels", "transitions"):
        return model.units.energy
    return unit_of(model, quantity.detail) if quantity.kind == "expectation" else ""


def fingerprint(request: SweepRequest) -> str:
    """Return a hash of the sheet, the files it names and all that is asked for; where the files lie does not count."""
    parts = asdict(request)
    del parts["folder"]
    hashed = hashlib.sha256(json.dumps(parts, sort_keys=True).encode())
    for path in sorted(set(re.findall(r'"([^"\n]{1,500})"', request.text))):
        place = Path(request.folder) / path
        try:
            hashed.update(path.encode() + read_regular(place, LARGEST_FILE))
        except (OSError, ValueError):
            continue
    return hashed.hexdigest()
