"""Mutations of texts that are known to be good: sheets, tables and plain data."""

from __future__ import annotations

import json
import re
from functools import cache
from pathlib import Path
from random import Random
from typing import Any

from fuzz_words import CHARACTERS, FUNCTIONS, NAMES, UNITS, hostile_number

ROOT = Path(__file__).resolve().parents[2]
_PIECE = re.compile(r"[0-9.]+(?:[eE][+-]?[0-9]+)?|\w+|\s+|.", re.DOTALL)


@cache
def known_sheets() -> tuple[str, ...]:
    """Return the presets, the sheets of the reference cases, and the corpus."""
    found = [path.read_text() for path in sorted((ROOT / "presets").glob("*.sheet"))]
    for path in sorted((ROOT / "tests/reference/cases").glob("*.json")):
        found += [case["sheet"] for case in json.loads(path.read_text())]
    return tuple(found)


def mutated_sheet(random: Random) -> str:
    """Return a known sheet with some pieces changed."""
    pieces = _PIECE.findall(random.choice(known_sheets()))
    numbers = [k for k, piece in enumerate(pieces) if piece[:1].isdigit()]
    if numbers and random.random() < 0.5:
        for _ in range(random.choice((1, 1, 2, 5))):
            at = random.choice(numbers)
            pieces[at] = f"({hostile_number(random)})" if pieces[at - 1 : at] not in ([" "], ["["]) else hostile_number(random)
        return "".join(pieces)
    for _ in range(random.choice((1, 1, 2, 3, 8))):
        _change(pieces, random)
    return "".join(pieces)


def _change(pieces: list[str], random: Random) -> None:
    """Change one piece, or a stretch of them."""
    at = random.randrange(len(pieces) or 1)
    numbers = [k for k, piece in enumerate(pieces) if piece[:1].isdigit()]
    match random.randrange(10):
        case 0 | 1 | 2 if numbers:
            pieces[random.choice(numbers)] = hostile_number(random)
        case 3:
            del pieces[at : at + random.choice((1, 1, 2, 10))]
        case 4:
            pieces.insert(at, random.choice(CHARACTERS))
        case 5:
            pieces[at:at] = pieces[at : at + random.choice((1, 3, 20))] * random.choice((1, 2, 50))
        case 6 if len(pieces) > 1:
            other = random.randrange(len(pieces))
            pieces[at], pieces[other] = pieces[other], pieces[at]
        case 7:
            words = (random.choice(NAMES), random.choice(FUNCTIONS) + "(x)", "*", "^", "/", "-", "[m]")
            pieces[at : at + 1] = [random.choice(words)]
        case 8:
            other_sheet = _PIECE.findall(random.choice(known_sheets()))
            start = random.randrange(len(other_sheet))
            pieces[at : at + 5] = other_sheet[start : start + random.choice((3, 15, 60))]
        case _:
            pieces.insert(at, random.choice((" ", "\n", f"[{random.choice(UNITS)}]", "(", ")", "p", "*x", "^2", "\n    ")))


def damaged(data: bytes, random: Random) -> bytes:
    """Return bytes with some of them changed, taken out, repeated or put in, whatever they mean."""
    work = bytearray(data)
    for _ in range(random.choice((1, 1, 2, 5, 30))):
        at = random.randrange(len(work) + 1)
        match random.randrange(5):
            case 0:
                work[at : at + 1] = bytes([random.randrange(256)])
            case 1:
                del work[at : at + random.choice((1, 1, 5, 100))]
            case 2:
                work[at:at] = work[at : at + random.choice((1, 10, 200))] * random.choice((1, 1, 20))
            case 3:
                work[at:at] = random.choice(CHARACTERS).encode("utf-8", "surrogatepass")
            case _:
                work[at:at] = random.choice((b",", b"\n", b";", b"\t", b"\"", b"-", b"e", b"nan", b"inf", b"1e999", b"#", b" "))
    return bytes(work)


def mutated_data(value: Any, random: Random) -> Any:
    """Return plain data with one part of it replaced by something else."""
    if isinstance(value, dict) and value and random.random() < 0.85:
        key = random.choice(list(value))
        if random.random() < 0.1:
            return {k: v for k, v in value.items() if k != key}
        return {**value, key: mutated_data(value[key], random)}
    if isinstance(value, list) and value and random.random() < 0.8:
        at = random.randrange(len(value))
        return [*value[:at], mutated_data(value[at], random), *value[at + 1 :]]
    deep: Any = "x"
    for _ in range(random.choice((3, 900))):
        deep = [deep] if random.random() < 0.5 else {"a": deep}
    return random.choice(
        (
            None, True, False, 0, -1, 1, 10**30, -(10**400), 1.5, 1e308, float("nan"), float("inf"), "", "x", "\x1b[2J",
            "\u202e",
            "\ud800", "\0", "a" * 100_000, [], {}, [1, 2], {"a": 1}, deep, "1e999", "9" * 5000, [[0, 0, 0.5, 0.5]],
            [None] * 1000,
        )
    )
