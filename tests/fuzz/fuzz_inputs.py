"""One numbered input after another: what it is, and the work that tries it."""

from __future__ import annotations

import json
import shlex
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from random import Random
from typing import Any

from fuzz_mutation import known_sheets, mutated_sheet
from fuzz_sheets import Sheets, giant
from fuzz_tables import journal, observed, plain, table, table_sheet
from fuzz_trial import Verdict, command, judged, refusals, shown
from fuzz_words import CHARACTERS, NAMES, hostile_number

GIANT, MUTATED = 0.004, 0.45
SOLVED, COMMANDED = 0.4, 0.08


@dataclass(frozen=True)
class Trial:
    """An input as it can be kept: its text, the file beside it, and the words of the command line (or of the way it took)."""

    text: str
    data: bytes = b""
    words: tuple[str, ...] = ()


def sheet_trial(seed: int, number: int) -> Trial:
    """Return the sheet of this number; the same seed and number give the same sheet."""
    random = Random(f"{seed}:sheet:{number}")
    roll = random.random()
    text = giant(random) if roll < GIANT else mutated_sheet(random) if roll < MUTATED else Sheets(random).sheet()
    if roll > 0.98:
        text = random.choice(known_sheets())
    return Trial(text, b"", _words(random) if random.random() < COMMANDED or roll > 0.98 else _way(random))


def _way(random: Random) -> tuple[str, ...]:
    """Return what is done with a sheet beyond building it, without the command line."""
    return ("solve",) if random.random() < SOLVED else ("build",)


def _words(random: Random) -> tuple[str, ...]:
    """Return a command line around a sheet."""
    name = random.choice((random.choice(NAMES), "k", "a", "m", "F", "V"))
    odd = random.choice(
        (hostile_number(random), "x", "p^2", "x^2 + p", "[", "x^x", random.choice(CHARACTERS), Sheets(random).expression(2))
    )
    whole = f"{hostile_number(random)}:{hostile_number(random)}:{random.choice(('3', '2', '1', '0', '-1', '10^9', '9' * 5000))}"
    ranges = ("0:1:3", "1,2", "log:1:2:3", "1:2", "::", "log:-1:1:3", "nan", "1e308:-1e308:3")
    given = whole if random.random() < 0.5 else random.choice(ranges)
    state = random.choice(("packet", "level(0)", "level(1)", "level(9" + "9" * 30 + ")", "f", odd, name))
    after = random.choice(
        (
            ["levels"], ["levels", "--near", random.choice(("0", "1e300", "nan", "-5", odd))],
            ["levels", "-n", random.choice(("3", "0", "9" * 5000, odd))],
            ["check"], ["figure", "--width", "60", "--glyphs", random.choice(("ascii", "braille"))],
            ["figure", "--state", state],
            ["expectation", odd], ["expectation", "x", "--state", state], ["weights", state],
            ["transitions", "--dipole", odd], ["transitions"],
            ["sensitivities"], ["sweep", f"{name}={given}", "--no-gaps"], ["evolve", state, f"--times={given}"],
            ["measure", state, odd],
            ["figure", "--view", "momentum"], ["levels", "--tol", odd], ["measure", state, "x", "p", "--seed", "1"],
            ["nosuch", odd],
        )
    )
    if random.random() < 0.3:
        after += [f"--set={name}={odd}"]
    if random.random() < 0.5 and after[0] != "check":
        after.append(random.choice(("--json", "--csv")))
    return ("command", *after[:1], "-e", "{sheet}", *after[1:])


def try_sheet(trial: Trial, folder: Path) -> Verdict:
    """Run what a trial asks for."""
    way, *words = trial.words
    if way == "command":
        filled = [trial.text if word == "{sheet}" else word for word in words]
        return judged(lambda verdict: command(verdict, filled))
    return judged(lambda verdict: _sheet(verdict, trial.text, folder, solving=way == "solve"))


def _sheet(verdict: Verdict, text: str, folder: Path, *, solving: bool) -> None:
    import time  # noqa: PLC0415

    from specterm.language import parse  # noqa: PLC0415
    from specterm.model import build  # noqa: PLC0415

    start = time.perf_counter()
    model = None
    with refusals(verdict, text):
        model = build(parse(text), folder=folder)
    verdict.building = time.perf_counter() - start
    if model is None:
        verdict.ways.add("refused")
        return
    verdict.ways.add("built")
    for warning in model.warnings:
        shown(verdict, warning, "a warning")
    if solving:
        with refusals(verdict, text):
            _solved(verdict, model, folder)


def _solved(verdict: Verdict, model: Any, folder: Path) -> None:
    """Solve, prepare the states, and write every form of the answer."""
    from specterm import spectrum  # noqa: PLC0415
    from specterm.analysis.prepared import prepare  # noqa: PLC0415
    from specterm.cli.verbs import levels_text  # noqa: PLC0415
    from specterm.errors import printable  # noqa: PLC0415
    from specterm.session.records.levels import levels_record  # noqa: PLC0415

    found = spectrum.solve(model, count=2)
    verdict.ways.add("solved")
    record = levels_record(model, found)
    for text in (levels_text(model, found), record.csv(), record.json(), *found.notes):
        shown(verdict, printable(text), "an answer")
    for name in list(model.states)[:3]:
        with refusals(verdict, ""):
            prepare(model, found, name, folder=folder)
            verdict.ways.add("prepared")


def table_trial(seed: int, number: int) -> Trial:
    """Return the table, file of lines, journal or piece of a session file of this number."""
    random = Random(f"{seed}:table:{number}")
    roll = random.random()
    if roll < 0.65:
        return Trial(table_sheet(random), table(random), ("table", "solve" if random.random() < 0.15 else "build"))
    if roll < 0.8:
        return Trial("", observed(random), ("observed",))
    if roll < 0.88:
        return Trial("", journal(_header(), random), ("journal",))
    part, data = plain(random)
    return Trial("", json.dumps(data).encode(), (part,))


def kept_trials(path: Path) -> list[Trial]:
    """Return what is tried with a file of the corpus: as its first line says, or every way in."""
    data = path.read_bytes()
    if path.suffix == ".sheet":
        text = data.decode("utf-8", "surrogateescape")
        first = text.split("\n", 1)[0]
        words = shlex.split(first.removeprefix("# words: ")) if first.startswith("# words: ") else []
        return [Trial(text, b"", ("command", *words) if words else ("solve",))]
    if path.name.startswith(("pin", "notebook", "session", "journal", "observed")):
        return [Trial("", data, (path.name.split("-")[0],))]
    ways = ("", ", linear, hold", ", extend", ", 2, 1, hold")
    return [Trial(f'H = p^2/2 + V\nV = table("table.csv"{how})\nx in (-1, 1)', data, ("table", "solve")) for how in ways]


def try_table(trial: Trial, folder: Path) -> Verdict:
    """Write the file (outside the guard) and read it as what it is."""
    file = folder / "table.csv"
    file.write_bytes(trial.data)
    ways: dict[str, Callable[[Verdict], None]] = {
        "table": lambda verdict: _sheet(verdict, trial.text, folder, solving=trial.words[-1] == "solve"),
        "observed": lambda verdict: _observed(verdict, file),
        "journal": lambda verdict: _journal(verdict, file),
        "pin": lambda verdict: _plain(verdict, trial.data, "pin"),
        "notebook": lambda verdict: _plain(verdict, trial.data, "notebook"),
        "session": lambda verdict: _session(verdict, trial.data),
    }
    kept = (str(file),) if trial.words[0] == "journal" else ()
    return judged(ways[trial.words[0]], *kept)


def _observed(verdict: Verdict, file: Path) -> None:
    from specterm.analysis.observed import read_observed  # noqa: PLC0415

    with refusals(verdict, ""):
        lines = read_observed(_observing(), file)
        verdict.ways.add("observed")
        for line in lines.lines:
            shown(verdict, line.upper.label, "a label")


def _observing() -> Any:
    from specterm.language import parse  # noqa: PLC0415
    from specterm.model import build  # noqa: PLC0415

    return build(parse("units: energy meV, length nm, mass m_e\nH = p^2/2 + k*x^2\nk = 1\nx in (-inf, inf)"))


def _request() -> Any:
    from specterm.analysis.sweep_request import SweepRequest, axis_of  # noqa: PLC0415

    return SweepRequest("H = p^2 + k*x^2\nk = 1\nx in (-inf, inf)", (axis_of("k=1:2:3"),))


def _header() -> bytes:
    from specterm.analysis.sweep_journal import FORMAT  # noqa: PLC0415
    from specterm.analysis.sweep_request import fingerprint  # noqa: PLC0415

    return json.dumps({"format": FORMAT, "request": fingerprint(_request())}).encode() + b"\n"


def _journal(verdict: Verdict, file: Path) -> None:
    from specterm.analysis.sweep_journal import open_journal  # noqa: PLC0415

    with refusals(verdict, ""), open_journal(file, _request()) as journal_of:
        verdict.ways.add("journal")
        for point in journal_of.points.values():
            shown(verdict, point.problem, "the problem of a point")


def _session(verdict: Verdict, data: bytes) -> None:
    from specterm.session.saved import saved_from, text_of  # noqa: PLC0415

    with refusals(verdict, ""):
        session = saved_from(data.decode())
        verdict.ways.add("session")
        shown(verdict, session.document.name, "the name of a session")
        text_of(session)


def _plain(verdict: Verdict, data: bytes, part: str) -> None:
    from specterm.language import parse  # noqa: PLC0415
    from specterm.model import build  # noqa: PLC0415
    from specterm.session.notebook import notebook_from  # noqa: PLC0415
    from specterm.session.pins import pin_from  # noqa: PLC0415

    try:
        found = json.loads(data)
    except (ValueError, RecursionError):
        return
    with refusals(verdict, ""):
        if part == "notebook":
            notebook = notebook_from(found)
            shown(verdict, "".join(entry.text + entry.sheet + entry.unit for entry in notebook.entries), "an entry")
            shown(verdict, notebook.record().csv(), "the notebook as a table")
        else:
            pin = pin_from(found)
            shown(verdict, pin.name, "the name of a pin")
            build(parse(pin.text), folder=pin.folder)
        verdict.ways.add(part)
