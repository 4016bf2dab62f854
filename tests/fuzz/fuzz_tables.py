"""Tables, observed lines, journals of sweeps and parts of session files, good and damaged."""

from __future__ import annotations

import json
from random import Random

from fuzz_mutation import ROOT, damaged, mutated_data
from fuzz_words import CHARACTERS, PATHS, hostile_number

GOOD = "x,V\n" + "".join(f"{k / 4 - 8},{(k / 4 - 8) ** 2 / 2}\n" for k in range(65))
LINES = "from,to,value,uncertainty,unit\n0,1,2.0,0.1,\n1,2,2.1,0.1,\n0,2,4.0,0.2,\n"
LEVELS = "level,value\n0,1.0\n1,3.0\n2,5.1\n"
SETTINGS = "from,to,value,k,from.k\n0,1,2.0,1,\n,2,2.1,1,2\n"
POINT = {
    "index": 1, "levels": [1.0, 3.0], "errors": [1e-9, None], "kinds": ["bound", "unresolved"], "numbers": [0, 1],
    "complete": True,
    "links": [[0, 1, 0.5, 0.5]], "quantity": [], "quantity_errors": [], "problem": "",
}  # fmt: skip
PIN = {"name": "first", "text": "H = p^2 + x^2\nx in (-inf, inf)", "folder": ".", "count": 3, "near": None, "tolerance": 1e-8}
ENTRY = {
    "kind": "measured", "text": "x", "value": 1.0, "low": 0.5, "high": None, "probability": 0.3, "unit": "nm", "levels": [1, 2],
    "chosen": False, "sheet": "a.sheet", "digest": "00",
}  # fmt: skip
SESSION = {
    "specterm": 1, "text": PIN["text"], "path": None, "saved": None, "title": "untitled", "folder": "/", "past": ["H = p^2"],
    "pins": [PIN], "notebook": {"seed": 7, "entries": [ENTRY]}, "view": {"a": 1}, "near": None, "tolerance": 1e-8,
    "closed": False,
}  # fmt: skip
NOTEBOOK = {"seed": 7, "entries": [ENTRY, {**ENTRY, "kind": "prepared"}, {**ENTRY, "kind": "waited"}]}


def table(random: Random) -> bytes:
    """Return the bytes of a table: a good one damaged, or a strange one made."""
    presets = [path.read_bytes() for path in sorted((ROOT / "presets").glob("*.csv"))]
    roll = random.random()
    if roll < 0.55:
        return damaged(random.choice((GOOD.encode(), GOOD.replace(",", " ").encode(), *presets)), random)
    if roll < 0.97:
        return _made(random).encode("utf-8", "surrogatepass")
    return random.choice(
        (
            b"", b"\n" * 100_000, b"\0" * 1000, b"\xff\xfe" + GOOD.encode("utf-16-le"), b"1" * 100_000, b"1," * 100_000,
            b'"' * 100_000,
            b"\n".join(b"%d,%d" % (k, k % 7) for k in range(20_000)), b"\n".join(b"%d 1" % (k % 50) for k in range(20_000)),
            b"x,V\n" * 1000, b"0,0\n1e-320,1\n1,1e308\n2,-1e308", b"\xef\xbb\xbf0 0\n1 1", b"0,1\r1,2\r2,3",
            b"# " + b"x" * 200_000,
        )
    )


def _made(random: Random) -> str:
    """Return a table of odd numbers with odd separators."""
    separator = random.choice((",", ";", "\t", " ", ", ", "  ", "|"))
    header = random.choice(("", "x,V", '"x [nm]","V (meV)"', "x", "V,x", "x,x", random.choice(CHARACTERS) + ",V", "# x V"))
    rows = []
    for k in range(random.choice((0, 1, 2, 3, 8, 60))):
        x = hostile_number(random) if random.random() < 0.05 else f"{k * random.choice((1, 1, 1, 0.1, -1)):g}"
        odd = random.random() < 0.1
        y = hostile_number(random) if odd else f"{random.choice((0, 1, 1e300, -1e300, 1e-300, k * k, 5e-324)):g}"
        rows.append(separator.join([x, y, "0"][: random.choice((1, 2, 2, 2, 2, 2, 2, 3))]))
    return random.choice(("\n", "\n", "\r\n")).join(([header] if header else []) + rows)


def table_sheet(random: Random) -> str:
    """Return a sheet that reads `table.csv`."""
    columns = random.choice(("", "", ', "x", "V"', ", 1, 2", ", 2, 1", ', "x" [nm], "V" [meV]', ", 1, 2, 3", ', "\u0301", 2'))
    how = random.choice(("", ", hold", ", hold", ", extend", ", linear, hold", ", linear, extend"))
    domain = random.choice(("(-8, 8)", "(-8, 8)", "(-inf, inf)", "(0, 1)", "ring(0, 3)", "(1, 2), free", "(0, inf)"))
    units = "units: energy meV, length nm, mass m_e\n" if "[" in columns or random.random() < 0.1 else ""
    mass = random.choice(("p^2/2", "p^2/2", "p^2/2", "p*V*p", "p*(1/V)*p"))
    return f'{units}H = {mass} + V\nV = table("table.csv"{columns}{how})\nx in {domain}'


def observed(random: Random) -> bytes:
    """Return the bytes of a file of observed lines."""
    text = random.choice((LINES, LEVELS, SETTINGS))
    if random.random() < 0.5:
        cells = text.split(",")
        cells[random.randrange(len(cells))] = random.choice(
            (
                hostile_number(random), random.choice(CHARACTERS), "from.k", "to", "unit", "meV", "[9^9]", "1e5", "-3", '"',
                "x" * 10_000,
            )
        )
        return ",".join(cells).encode("utf-8", "surrogatepass")
    return damaged(text.encode(), random)


def journal(header: bytes, random: Random) -> bytes:
    """Return a journal of a sweep: good lines, one of them changed."""
    lines = [json.dumps({**POINT, "index": k}).encode() for k in range(3)]
    roll = random.random()
    if roll < 0.5:
        changed = json.dumps(mutated_data(POINT, random)).encode()
        return b"\n".join([header.strip(), lines[0], changed, lines[1], b""])
    whole = b"\n".join([header.strip(), *lines, b""])
    return damaged(whole, random) if roll < 0.9 else b"[" * random.choice((10, 100_000)) + b"\n" + whole


def plain(random: Random) -> tuple[str, object]:
    """Return the name of a part of a session file and data for it."""
    if random.random() < 0.3:
        return "pin", mutated_data(PIN, random)
    if random.random() < 0.6:
        return "session", mutated_data(SESSION, random)
    return "notebook", mutated_data(NOTEBOOK, random)


def path_text(random: Random) -> str:
    """Return a path a hostile file might name."""
    return random.choice(PATHS)
