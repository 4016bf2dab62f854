"""The longer run: `python tests/fuzz/run.py --sheets 100000 --tables 10000 --seed N` tries that many hostile inputs.

It prints how many crashed, hung, wrote a file, ran code or passed a control character through, and each of them with its
number; `--sheet K` or `--table K` with the same seed shows one of them again. Seconds are those of the processor.
"""

from __future__ import annotations

import argparse
import importlib
import os
import sys
import tempfile
import time
import warnings
from collections import Counter
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from multiprocessing import get_context
from pathlib import Path
from typing import Any

for _name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_name, "1")
ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(Path(__file__).parent), str(ROOT)]

from fuzz_inputs import Trial, kept_trials, sheet_trial, table_trial, try_sheet, try_table  # noqa: E402 - by the path above
from fuzz_trial import Verdict, bounded, faults, fixtures, judged, prepare  # noqa: E402

SORTS = ("crash", "hang", "slow", "late", "written", "code", "control")
FOREIGN = ("scipy.linalg", "scipy.optimize", "scipy.special", "scipy.sparse.linalg", "encodings.ascii", "encodings.idna")
STUCK = 90.0
"""Seconds without a new input after which a child counts as hanging inside compiled code, and is ended."""
MEMORY = 3_000_000_000
KINDS: dict[str, tuple[Callable[[int, int], Trial], Callable[[Trial, Path], Verdict]]] = {
    "sheet": (sheet_trial, try_sheet),
    "table": (table_trial, try_table),
}


@dataclass
class Tally:
    """What a run found: faults as (kind, number, sort, what), ways taken, and times."""

    faults: list[tuple[str, int, str, str]] = field(default_factory=list)
    ways: Counter[str] = field(default_factory=Counter)
    building: list[float] = field(default_factory=list)
    seconds: list[float] = field(default_factory=list)

    def add(self, kind: str, number: int, verdict: Verdict) -> None:
        """Count one input."""
        self.ways.update({f"{kind}s", *verdict.ways})
        self.building.append(verdict.building)
        self.seconds.append(verdict.seconds)
        self.faults += [(kind, number, sort, what) for sort, what in verdict.faults]


def warmed(folder: Path) -> None:
    """Use every part once, so that nothing is imported later, under the guard."""
    from fuzz_mutation import known_sheets  # noqa: PLC0415

    own = [path.relative_to(ROOT).with_suffix("") for path in (ROOT / "specterm").rglob("*.py") if path.parent.name != "pages"]
    parts = [".".join(path.parts) for path in own if "tui" not in path.parts and path.name != "__main__"]
    for name in (*FOREIGN, *parts):
        importlib.import_module(name.removesuffix(".__init__"))
    sheet = known_sheets()[0]
    for words in (
        ["levels"], ["levels", "--json"], ["check"], ["figure"], ["expectation", "x"], ["weights", "level(0)"], ["transitions"],
        ["sensitivities"], ["evolve", "level(0)", "--times=0:1:2"], ["measure", "level(0)", "x"],
        ["figure", "--view", "momentum"],
        ["sweep", "F=1:2:2"], ["sweep", "F=1:2:2", "--csv"], ["levels", "--nosuch"],
    ):  # fmt: skip
        try_sheet(Trial(sheet, b"", ("command", words[0], "-e", "{sheet}", *words[1:])), folder)
    for text in known_sheets()[:40]:
        try_sheet(Trial(text, b"", ("solve",)), folder)
    for number in range(30):
        try_table(table_trial(0, number), folder)


def child(kind: str, numbers: range, seed: int, folder: str, now: Any, results: Any) -> None:
    """Try some inputs; `now` holds the number of the present one."""
    prepare()
    place = Path(folder)
    os.chdir(place)
    warmed(place)
    bounded(MEMORY)
    warnings.simplefilter("error")
    tally = Tally()
    made, tried = KINDS[kind]
    for number in numbers:
        now.value = number
        tally.add(kind, number, tried(made(seed, number), place))
    results.put(tally)


def pieces(kind: str, count: int, start: int, size: int = 2500) -> list[tuple[str, range]]:
    """Return the numbers of a run in pieces."""
    return [(kind, range(k, min(k + size, start + count))) for k in range(start, start + count, size)]


def run(work: list[tuple[str, range]], seed: int, processes: int) -> Tally:
    """Try all inputs in children; one that is stuck or dies is noted, and the rest of its piece goes on."""
    context = get_context("fork")
    whole, live = Tally(), []
    with tempfile.TemporaryDirectory() as place:
        while work or live:
            while work and len(live) < processes:
                kind, numbers = work.pop(0)
                folder = tempfile.mkdtemp(dir=place)
                fixtures(Path(folder))
                now, results = context.Value("q", numbers.start - 1), context.SimpleQueue()
                process = context.Process(target=child, args=(kind, numbers, seed, folder, now, results))
                process.start()
                live.append([process, kind, numbers, now, results, (-2, time.monotonic())])
            time.sleep(0.2)
            live = [one for one in live if not _finished(one, whole, work)]
    return whole


def _finished(one: list[Any], whole: Tally, work: list[tuple[str, range]]) -> bool:
    """Take in the results of a child that is done, and end one that is stuck; say whether it is gone."""
    process, kind, numbers, now, results, (last, since) = one
    if not results.empty():
        part = results.get()
        process.join()
        whole.faults += part.faults
        whole.ways += part.ways
        whole.building += part.building
        whole.seconds += part.seconds
        print(f"{kind}s {numbers.start} to {numbers.stop - 1}: {len(part.faults)} faults", file=sys.stderr, flush=True)
        return True
    if now.value != last:
        one[5] = (now.value, time.monotonic())
    stuck = now.value == last and time.monotonic() - since > STUCK
    if process.is_alive() and not stuck:
        return False
    if process.is_alive():
        process.kill()
    process.join()
    if not results.empty():
        return _finished(one, whole, work)
    why = f"stuck for {STUCK:g} s" if stuck else f"the process ended with {process.exitcode}"
    whole.faults.append((kind, now.value, "hang" if stuck else "crash", why))
    for rest in (range(numbers.start, now.value), range(now.value + 1, numbers.stop)):
        if rest:
            work.insert(0, (kind, rest))
    return True


def report(tally: Tally, seed: int) -> None:
    """Print the figures, and every fault once."""
    counts = Counter(sort for _, _, sort, _ in tally.faults)
    print(f"seed {seed}: {tally.ways['sheets']} sheets, {tally.ways['tables']} tables")
    print("ways: " + ", ".join(f"{name} {count}" for name, count in sorted(tally.ways.items())))
    words = {
        "crash": "crashes", "hang": "hangs over 2 s", "slow": "models over 1 s", "late": "stops later than 0.3 s",
        "written": "files written",
        "code": "code or processes run", "control": "control characters passed through",
    }  # fmt: skip
    for sort in SORTS:
        print(f"{words[sort]}: {counts[sort]}")
    for name, times in (("text to model", sorted(tally.building)), ("whole", sorted(tally.seconds))):
        if times:
            far = times[min(len(times) - 1, int(0.999 * len(times)))]
            middle = times[len(times) // 2]
            print(f"{name}: median {middle * 1e3:.2f} ms, 99.9 % {far * 1e3:.0f} ms, longest {times[-1] * 1e3:.0f} ms")
    for kind, number, sort, what in tally.faults:
        print(f"  --{kind} {number}: {sort}: {what}")


@contextmanager
def scratch() -> Iterator[Path]:
    """Yield a folder with the usual files, this process being ready to try inputs in it."""
    with tempfile.TemporaryDirectory() as folder:
        place = Path(folder)
        fixtures(place)
        os.chdir(place)
        prepare()
        warmed(place)
        bounded(MEMORY)
        warnings.simplefilter("error")
        try:
            yield place
        finally:
            os.chdir("/")


def kept() -> Tally:
    """Try everything in the corpus."""
    tally = Tally()
    with scratch() as place:
        for number, path in enumerate(sorted((Path(__file__).parent / "corpus").iterdir())):
            for trial in kept_trials(path):
                before = len(tally.faults)
                tally.add("kept", number, (try_sheet if path.suffix == ".sheet" else try_table)(trial, place))
                tally.faults[before:] = [(path.name, number, sort, what) for _, _, sort, what in tally.faults[before:]]
    return tally


def planted() -> Tally:
    """Do one of everything that is not to happen."""
    with scratch() as place:
        tally = Tally()
        for number, fault in enumerate(faults(place)):
            tally.add("planted", number, judged(fault))
    return tally


def again(kind: str, number: int, seed: int) -> None:
    """Show one input, and try it here."""
    trial = KINDS[kind][0](seed, number)
    print(repr(trial.words))
    print(trial.text[:3000] + ("..." if len(trial.text) > 3000 else ""))
    print(trial.data[:3000])
    with scratch() as place:
        verdict = KINDS[kind][1](trial, place)
    print(f"{verdict.seconds:.3f} s, model {verdict.building:.3f} s, {sorted(verdict.ways)}, {verdict.faults}")


def main() -> int:
    """Run what the command line asks for; 0 where nothing was found."""
    words = argparse.ArgumentParser(description=__doc__)
    words.add_argument("--sheets", type=int, default=1000)
    words.add_argument("--tables", type=int, default=200)
    words.add_argument("--seed", type=int, default=1)
    words.add_argument("--start", type=int, default=0, help="the number of the first input")
    words.add_argument("--processes", type=int, default=2)
    words.add_argument("--sheet", type=int, help="only this sheet, shown")
    words.add_argument("--table", type=int, help="only this table, shown")
    words.add_argument("--corpus", action="store_true", help="only the inputs that failed once")
    words.add_argument("--planted", action="store_true", help="only faults planted to see that they are found")
    given = words.parse_args()
    for kind, number in (("sheet", given.sheet), ("table", given.table)):
        if number is not None:
            again(kind, number, given.seed)
            return 0
    if given.corpus or given.planted:
        tally = kept() if given.corpus else planted()
        report(tally, given.seed)
        return int(bool(tally.faults))
    work = pieces("sheet", given.sheets, given.start) + pieces("table", given.tables, given.start)
    tally = run(work, given.seed, given.processes)
    report(tally, given.seed)
    return int(bool(tally.faults))


if __name__ == "__main__":
    sys.exit(main())
