"""Fits: truth recovered, honest standard errors, what the data cannot tell, bounds, assignment, files of lines."""

import math
from pathlib import Path

import numpy as np
import pytest

from specterm.analysis.fit_levels import Solver
from specterm.analysis.fitting import fit, fitted_text, propose
from specterm.analysis.observed import End, Observation, Observed, read_observed
from specterm.errors import PhysicsError, SheetError, WorkStopped
from specterm.language import parse
from specterm.language.edits import plain_numbers
from specterm.model import build

MORSE = "H = p^2/2 + T0 + D0*(1 - exp(-a*x))^2; x in (-inf, inf); T0 = {T0}; D0 = {D0}; a = {a}"
TRUE = {"T0": 120.0, "D0": 40.0, "a": 0.9}
START = MORSE.format(T0=119, D0=43, a=0.86)
ANY = (-math.inf, math.inf)
FREE = dict.fromkeys(TRUE, ANY)


def morse(v):
    """Return level v of the true molecule (closed form, hbar and mass 1)."""
    a, D = TRUE["a"], TRUE["D0"]
    return TRUE["T0"] + a * math.sqrt(2 * D) * (v + 0.5) - a**2 * (v + 0.5) ** 2 / 2


def levels(noise=0.0, seed=0, uncertainty=0.02, count=7):
    """Return levels 0 ... of the true molecule with seeded noise."""
    shake = noise * np.random.default_rng(seed).standard_normal(count)
    lines = tuple(Observation(v + 2, None, End(v), morse(v) + float(shake[v]), uncertainty) for v in range(count))
    return Observed(lines, uncertainty is not None)


def lines(pairs, assigned=True):
    """Return transitions of the true molecule."""
    return Observed(
        tuple(
            Observation(k + 2, End(a if assigned else None), End(b if assigned else None), morse(b) - morse(a), 0.01)
            for k, (a, b) in enumerate(pairs)
        ),
        weighted=True,
    )


def test_exact_levels_give_the_true_numbers():
    """Without noise the true numbers come back, and chi-square is nothing."""
    found = fit(START, levels(), FREE, Solver())
    assert [one.value for one in found.parameters] == pytest.approx(list(TRUE.values()), rel=1e-9)
    assert found.chi2 < 1e-12
    assert found.dof == 4
    assert found.converged
    assert np.abs(found.residuals).max() < 1e-8


def test_standard_errors_are_those_of_linear_theory():
    """Errors and correlations are those of the Jacobian of the closed form (recomputed here by differences)."""
    found = fit(START, levels(), FREE, Solver())
    steps = {"T0": 1e-3, "D0": 1e-3, "a": 1e-5}
    columns = []
    for name, step in steps.items():
        old = TRUE[name]
        values = []
        for sign in (1, -1):
            TRUE[name] = old + sign * step
            values.append(np.array([morse(v) for v in range(7)]))
        TRUE[name] = old
        columns.append((values[0] - values[1]) / (2 * step) / 0.02)
    jacobian = np.array(columns).T
    covariance = np.linalg.inv(jacobian.T @ jacobian)
    errors = np.sqrt(np.diag(covariance))
    assert [one.error for one in found.parameters] == pytest.approx(errors, rel=1e-5)
    assert found.correlations == pytest.approx(covariance / np.outer(errors, errors), rel=1e-5)


def test_true_numbers_lie_within_two_errors():
    """In 12 seeded trials with noise at least 9 lie within 2 errors (fewer: once in 600); bench/fit_trials.py makes 100."""
    off = []
    for seed in range(12):
        found = fit(START, levels(0.02, seed), FREE, Solver())
        off.append([abs(one.value - TRUE[one.name]) / one.error for one in found.parameters])
    assert ((np.array(off) <= 2).sum(axis=0) >= 9).all()


def test_without_uncertainties_the_scatter_counts():
    """Unit weights are told, and the errors scale with the scatter of the lines."""
    some = levels(0.02, 3, None)
    found, weighted = fit(START, some, FREE, Solver()), fit(START, levels(0.02, 3, 1.0), FREE, Solver())
    assert any("all lines count alike" in note for note in found.notes)
    scatter = math.sqrt(weighted.chi2 / weighted.dof)
    for one, other in zip(found.parameters, weighted.parameters, strict=True):
        assert one.error == pytest.approx(scatter * other.error, rel=1e-6)


def test_bounds_hold():
    """A number that runs into its bound stays there, has no error, and it is said; the others are fitted."""
    found = fit(START, levels(), {"T0": ANY, "a": (0.5, 0.88), "D0": ANY}, Solver())
    known = {one.name: one for one in found.parameters}
    assert known["a"].value == pytest.approx(0.88, rel=1e-9)
    assert known["a"].error is None
    assert known["D0"].error is not None
    assert any("`a` ended at its bound" in note for note in found.notes)


def test_what_the_data_cannot_tell():
    """A number no line depends on, and two that act as one, are named and have no error."""
    text = "H = p^2/2 + w*v*x^2/2 + s; s = 1; w = 1.1; v = 1.2; x in (-inf, inf)"
    some = Observed(tuple(Observation(k, End(0), End(k), 1.3 * k, 0.01) for k in range(1, 4)), weighted=True)
    found = fit(text, some, {"s": ANY, "w": ANY, "v": ANY}, Solver())
    assert all(one.error is None for one in found.parameters)
    assert any("cannot tell `s`: no line depends on it" in note for note in found.notes)
    assert any("`w`" in note and "`v`" in note and "apart" in note for note in found.notes)
    values = {one.name: one.value for one in found.parameters}
    assert values["w"] * values["v"] == pytest.approx(1.69, rel=1e-7)


def test_open_lines_are_matched_to_the_nearest():
    """Lines without numbers get those of the nearest transitions, one each; lines with numbers keep theirs."""
    pairs = [(0, 1), (1, 2), (0, 2), (2, 3)]
    near = MORSE.format(T0=120, D0=40.2, a=0.9)
    matches = propose(near, lines(pairs, assigned=False), {"D0": ANY}, Solver(count=5))
    assert [(m.line.lower.level, m.line.upper.level) for m in matches] == pairs
    assert all(m.next_off > abs(m.computed - m.line.value) for m in matches)
    found = fit(near, lines(pairs, assigned=False), {"D0": ANY, "a": ANY}, Solver(count=5))
    assert [one.value for one in found.parameters] == pytest.approx([40, 0.9], rel=1e-8)
    assert len(found.matches) == 4


def test_what_the_lines_do_not_tell_ends_early():
    """A number that changes on and on for nothing ends the fit: told at the first step, not converged, each step bounded."""
    text = "H = p^2/2 + w^2*x^2/2 + 1/c; w = 1; c = 1.5; x in (-inf, inf)"
    some = Observed(tuple(Observation(v + 2, None, End(v), v - 2.5, 0.01) for v in range(4)), weighted=True)
    told = []
    found = fit(text, some, {"c": ANY}, Solver(progress=told.append))
    assert not found.converged
    assert found.steps < 30
    assert any("`c` changes on and on" in note for note in found.notes)
    assert any(note.startswith("not converged") for note in found.notes)
    assert any(words.startswith("step 3: chi-square") for words in told)


def test_numbers_that_start_at_nothing_or_far_off():
    """Bounded steps still reach numbers that start at 0, whatever its digits, and at a tenth of what they are."""
    text = "H = p^2/2 + w^2*x^2/2 + c; w = 0.1; c = 0.000; x in (-inf, inf)"
    some = Observed(tuple(Observation(v + 2, None, End(v), v + 5.5, 0.01) for v in range(3)), weighted=True)
    found = fit(text, some, {"w": ANY, "c": ANY}, Solver())
    assert found.converged
    assert [one.value for one in found.parameters] == pytest.approx([1, 5], rel=1e-8)


def test_a_fit_is_stopped():
    """`should_stop` ends a fit in the middle of its steps."""
    told = []
    with pytest.raises(WorkStopped):
        fit(START, levels(), FREE, Solver(should_stop=lambda: len(told) >= 2, progress=told.append))
    assert len(told) == 2


def test_no_transition_left():
    """More open lines than transitions: said, with the row."""
    some = lines([(0, 1)] * 3, assigned=False)
    with pytest.raises(PhysicsError, match="no transition is left for line"):
        propose(START, some, {"D0": ANY}, Solver(count=2))


def test_levels_that_are_not_bound():
    """A line to a level that the sheet does not bind is exit 1, with the level."""
    some = Observed((Observation(2, End(0), End(20), 30.0, 0.1),), weighted=True)
    with pytest.raises(PhysicsError, match="level 20 is not bound"):
        fit(START, some, {"D0": ANY}, Solver())


@pytest.mark.parametrize(
    ("vary", "words"),
    [
        ({"D1": ANY}, "`D1` is not a plain number"),
        ({"a": (1.0, 2.0)}, "the bounds 1:2 do not hold `a`, which is 0.86"),
        ({}, "no number is named"),
        (FREE, "2 lines cannot determine 3 numbers"),
    ],
)
def test_bad_requests(vary, words):
    """Unknown names, bounds beside the start, nothing to vary and too few lines are refused in plain words."""
    with pytest.raises(SheetError, match=words):
        fit(START, lines([(0, 1), (0, 2)]), vary, Solver())


def test_the_sheet_is_changed_in_place():
    """Comments and layout stay, the numbers are those of the fit to what the data know."""
    text = START.replace("; T0", "\n# deep\nT0").replace("; a", "  # depth\na")
    found = fit(text, levels(), FREE, Solver())
    written = fitted_text(text, found)
    assert written.count("# deep\n") == 1
    assert "  # depth\n" in written
    values = {name: place.value for name, place in plain_numbers(written).items()}
    assert values == pytest.approx(TRUE, rel=1e-4)
    assert all(abs(values[one.name] - one.value) <= 1e-3 * one.alone for one in found.parameters)


MODEL = build(parse("units: energy cm^-1, length angstrom, mass u; H = p^2/2 + J*x^2 + k*x^4; J = 1; k = 2; x in (-inf, inf)"))


def read(tmp_path, text):
    """Return what a file with this text is read as."""
    path = Path(tmp_path) / "lines.csv"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_observed(MODEL, path)


def test_lines_are_read_by_header(tmp_path):
    """Columns in any order, comments, settings for both ends or one, units, levels left open."""
    found = read(tmp_path, "# lines\nvalue,to,from,uncertainty,unit,J,to.J\n2,1,0,0.1,,3,4\n29979.2458,,0,10,MHz,,\n")
    first, second = found.lines
    assert first == Observation(3, End(0, (("J", 3.0),)), End(1, (("J", 4.0),)), 2.0, 0.1)
    assert second.lower == End(0)
    assert not second.assigned
    assert second.value == pytest.approx(1.0, rel=1e-12)  # 1 cm^-1 is 29979.2458 MHz, the speed of light
    assert second.uncertainty == pytest.approx(10 / 29979.2458)
    assert found.weighted
    assert found.set_names == ("J",)
    levels_only = read(tmp_path, "level,value\n0,1.5\n,2.5\n")
    assert levels_only.lines[0] == Observation(2, None, End(0), 1.5, None)
    assert not levels_only.weighted
    open_lines = read(tmp_path, "value,uncertainty,J\n1.5,0.1,2\n")
    assert open_lines.lines == (Observation(2, End(None, (("J", 2.0),)), End(None, (("J", 2.0),)), 1.5, 0.1),)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("from,value\n0,1\n", "must have the columns"),
        ("level,from,to,value\n0,0,1,1\n", "must have the columns"),
        ("1,2,3\n", "must have the columns"),
        ("to,value\n1,1\n", "none `from`"),
        ("level,value,Q\n0,1,1\n", "neither known nor a plain number"),
        ("level,value,to.J\n0,1,1\n", "neither known nor a plain number"),
        ("level,value,value\n0,1,1\n", "two columns of one name"),
        ("level,value\n", "holds no lines"),
        ("level,value\n0,abc\n", "is no number"),
        ("level,value\n0,\n", "there is no value"),
        ('from,to,value,uncertainty\n0,1,"29,5",0.1\n', "lines.csv, line 2: `29,5` in the column `value` is no number"),
        ("from,to,value,uncertainty\n0,1,29,5,0.1\n", "lines.csv, line 2 has 5 cells, but the header has 4"),
        ('from,to,value\n0,1,"29.5\n', "lines.csv, line 2: a quotation mark"),
        ("level,value\n0.5,1\n", "is no number of a level"),
        ("level,value\n-1,1\n", "line 2: `-1` is no number of a level"),
        ("level,value,uncertainty\n0,1,0\n", "must be above 0"),
        ("level,value,uncertainty\n0,1,0.1\n1,2,\n", "no uncertainty, but other lines"),
        ("level,value,unit\n0,1,nm\n", "no unit of energy"),
        ("level,value,unit\n0,1,blob\n", "blob"),
        (b"level,value\n0,\xff\n", "not UTF-8"),
        (b"level,value\n0,1\0\n", "not text"),
    ],
)
def test_bad_files(tmp_path, text, words):
    """Each mistake in a file of lines is refused in plain words, without control characters."""
    with pytest.raises(SheetError, match=words) as caught:
        read(tmp_path, text)
    assert caught.value.span is None
    assert caught.value.message.isprintable()


def test_lines_may_not_set_what_is_varied():
    """A column that sets a number to be varied is refused."""
    some = Observed((Observation(2, None, End(0, (("a", 1.0),)), 1.0, 0.1),), weighted=True)
    with pytest.raises(SheetError, match="the lines set `a`"):
        fit(START, some, {"a": ANY}, Solver())
