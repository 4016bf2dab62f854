"""Sweeps against closed forms; branches; executors; stop and resume."""

from concurrent.futures import ThreadPoolExecutor
from math import pi

import numpy as np
import pytest
from sweep_making import ANHARMONIC, RING, request

from specterm.analysis.sweep import assemble, sweep
from specterm.analysis.sweep_crews import processes
from specterm.analysis.sweep_request import Quantity, axis_of, quantity_of
from specterm.analysis.sweep_work import Crew
from specterm.errors import PhysicsError, SheetError, WorkStopped
from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve


def assert_within_errors(found, expected):
    """Assert that all levels are as expected within their errors."""
    off = np.abs(found.levels - expected)
    assert (off <= found.errors).all(), f"off by {off.max():.1e} where {found.errors.flat[int(off.argmax())]:.1e} is claimed"


def test_width_of_a_well():
    """Levels of a well of width L are (n pi/L)^2 at every point (closed form), though its end moves."""
    found = sweep(request("H = p^2; L = 1; x in (0, L)", "L=0.5:3:11", count=4))
    n = np.arange(1, 5)
    assert_within_errors(found, (n * pi / np.linspace(0.5, 3, 11)[:, None]) ** 2)
    assert not found.gaps


def test_frequency_of_an_oscillator():
    """Levels of an oscillator are w (n + 1/2) (closed form), each point started from the one before."""
    found = sweep(request("H = p^2/2 + w^2*x^2/2; w = 1; x in (-inf, inf)", "w=log:0.1:10:41", count=6))
    assert_within_errors(found, np.geomspace(0.1, 10, 41)[:, None] * (np.arange(6) + 0.5))
    assert found.complete
    assert (found.branches == np.arange(6)).all()


def test_a_started_solve_is_a_solve():
    """Levels found from a neighbour's mesh agree with those found anew within the errors of both."""
    found = sweep(request(ANHARMONIC, "lam=0.1:0.9:9", count=12))
    for place, levels, errors in zip(found.places[:, 0], found.levels, found.errors, strict=True):
        anew = solve(build(parse(ANHARMONIC), overrides={"lam": repr(float(place))}), count=12)
        for level, value, error in zip(anew.levels, levels, errors, strict=True):
            assert abs(level.value - value) <= level.error + error


def test_numbers_stand_in_the_unit_of_the_sheet():
    """A swept number is in the unit the sheet writes behind it."""
    text = "units: energy meV, length nm, mass m_e\nF = 20 [kV/cm]\nH = p^2/(2*0.067) + e*F*x\nx in (0, 10)\n"
    found = sweep(request(text, "F=0:40:3", count=2))
    there = solve(build(parse(text), overrides={"F": "40 [kV/cm]"}), count=2)
    assert found.units == ("kV/cm",)
    assert found.levels[2] == pytest.approx([level.value for level in there.levels], rel=1e-12)


def test_a_definition_that_is_no_plain_number_is_replaced_whole():
    """A parameter defined by others is swept too."""
    found = sweep(request("H = p^2; a = 2; L = a^2; x in (0, L)", "L=1,2", count=1))
    assert found.levels[:, 0] == pytest.approx([pi**2, pi**2 / 4], rel=1e-12)


@pytest.mark.parametrize(("text", "values"), [
    ("a=0:1:5", (0, 0.25, 0.5, 0.75, 1)),
    ("a = log:0.01:100:5", (0.01, 0.1, 1, 10, 100)),
    ("a=log:-1:-4:3", (-1, -2, -4)),
    ("a=3,1,2", (3, 1, 2)),
    ("a=2:9:1", (2,)),
])  # fmt: skip
def test_ranges(text, values):
    """Both ends are included, exactly; logarithmic ranges go by equal factors; lists are taken as they are."""
    axis = axis_of(text)
    assert axis.name == "a"
    assert axis.values == pytest.approx(values, rel=1e-14)
    assert (axis.values[0], axis.values[-1]) == (values[0], values[-1])


def test_ranges_have_the_values_a_person_would_write():
    """No rounding shows in the values of a range: each is the double nearest to the decimal."""
    assert axis_of("a=-200:200:41").values == tuple(float(v) for v in range(-200, 201, 10))
    assert axis_of("a=0:1:11").values == (0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0)
    assert axis_of("a=log:1e-3:1e3:7").values == (1e-3, 1e-2, 1e-1, 1.0, 10.0, 100.0, 1000.0)
    assert len(axis_of("a=-1e300:1e300:100000").values) == 100000


@pytest.mark.parametrize("count", ["1000001", "9999999999", "9" * 5000])
def test_too_many_points(count):
    """A count above the limit is told as such, however long it is."""
    with pytest.raises(SheetError, match="too many points"):
        axis_of(f"a=1:2:{count}")


@pytest.mark.parametrize("text", ["a", "a=", "=1:2:3", "a=1:2", "a=1:2:3:4", "a=1:2:0", "a=1:2:9999999", "a=log:0:1:5",
                                  "a=log:-1:1:5", "a=nan", "a=1:inf:3", "a=1,x", "a=1:2:3.5", "a=log:1,2"])  # fmt: skip
def test_ranges_that_cannot_be_read(text):
    """What is no range is refused with the forms there are."""
    with pytest.raises(SheetError):
        axis_of(text)


@pytest.mark.parametrize(("change", "said"), [
    ({"axes": ("q=0:1:3",)}, "q"),
    ({"axes": ("lam=0:1:3", "lam=0:1:3")}, "twice"),
    ({"axes": ("H=0:1:3",)}, "no parameter"),
    ({"overrides": (("lam", "2"),)}, "at once"),
    ({"quantity": Quantity("weights", "absent")}, "no state"),
    ({"quantity": Quantity("expectation", "absent")}, "absent"),
    ({"axes": ("lam=0:1:2000", "lam=0:1:2000")}, "lam"),
])  # fmt: skip
def test_requests_that_do_not_fit_the_sheet(change, said):
    """What does not fit the sheet is told before anything is computed."""
    axes = change.pop("axes", ("lam=0.1:1:3",))
    with pytest.raises(SheetError, match=said):
        sweep(request(ANHARMONIC, *axes, **change))


def test_points_without_levels():
    """A point the physics says no to has no levels and a reason; where all are so, the reason is the answer."""
    sheet = "H = p^2 + a*x^4; a = 1; x in (-inf, inf)"
    found = sweep(request(sheet, "a=-1:1:5", count=2))
    assert np.isnan(found.levels[:2]).all()
    assert np.isfinite(found.levels[3:]).all()
    assert any("bounded below" in note for note in found.notes)
    with pytest.raises(PhysicsError, match="bounded below"):
        sweep(request(sheet, "a=-3:-1:3", count=2))


def test_points_that_are_no_sheets():
    """A value that makes no sheet is a gap, at the first point and later; where none does, the first refusal is the answer."""
    sheet = "H = p^2 + x; gap = 1; x in (0, gap)"
    found = sweep(request(sheet, "gap=-2:2:5", count=2))
    assert np.isnan(found.levels[:3]).all()
    assert np.isfinite(found.levels[3:]).all()
    assert any(note.startswith("3 points have no levels") for note in found.notes)
    found = sweep(request(sheet, "gap=2:-2:5", count=2))
    assert np.isnan(found.levels[2:]).all()
    with pytest.raises(SheetError):
        sweep(request(sheet, "gap=-2:-1:3", count=2))


def test_branches_go_through_crossings_between_points_and_on_them():
    """The waves on a ring keep their number as their levels (n + phase)^2 cross, on a point at 0 and between points at 1/2."""
    found = sweep(request(RING, "phi=-0.4:0.9:14", count=5), gaps=False)
    assert 0 in np.round(found.places[:, 0], 12)
    phases = found.places[:, 0]
    for branch, n in enumerate((0, 1, -1)):
        seen = found.along(branch, found.levels)
        known = np.isfinite(seen)
        assert known.all()
        np.testing.assert_allclose(seen[known], (n + phases[known]) ** 2, rtol=0, atol=1e-9)


def test_a_resolved_avoided_crossing_is_followed():
    """Where the points resolve an avoided crossing, branches keep the order of the levels."""
    found = sweep(request("H = p^2 + (x^2 - 2)^2 + F*x; F = 0; x in (-inf, inf)", "F=-2:2:81", count=2), gaps=False)
    assert (found.branches == [0, 1]).all()


def test_quantities():
    """Transitions, means, weights and strengths of the oscillator at each point (closed forms)."""
    sheet = "H = p^2/2 + w^2*x^2/2; w = 1; x in (-inf, inf); state s = exp(-x^2/2)"
    asked = {text: request(sheet, "w=1,2", count=4, quantity=quantity_of(text))
             for text in ("transitions", "expectation=x^2", "weights=s", "strengths")}  # fmt: skip
    found = {text: sweep(one, gaps=False).quantity for text, one in asked.items()}
    assert found["transitions"][1] == pytest.approx([0, 2, 4, 6], abs=1e-9)
    assert found["expectation=x^2"][1] == pytest.approx((np.arange(4) + 0.5) / 2, abs=1e-9)
    assert found["weights=s"][0] == pytest.approx([1, 0, 0, 0], abs=1e-9)
    assert found["strengths"][0] == pytest.approx([0, 1, 0, 0], abs=1e-9)


def test_map_over_two_parameters():
    """With two parameters the second runs fastest: w (n + 1/2) + c (closed form)."""
    found = sweep(request("H = p^2/2 + w^2*x^2/2 + c; w = 1; c = 0; x in (-inf, inf)", "w=1:2:3", "c=0,5", count=2))
    assert found.places.tolist() == [[1, 0], [1, 5], [1.5, 0], [1.5, 5], [2, 0], [2, 5]]
    assert found.levels[:, 1] == pytest.approx([1.5, 6.5, 2.25, 7.25, 3, 8], abs=1e-9)


def test_every_executor_gives_the_same_bits():
    """In this process, threads, and two processes: values, errors, branches and gaps are identical."""
    asked = request("H = p^2 + (x^2 - 3)^2 + F*x; F = 0; x in (-inf, inf)", "F=-0.52:0.5:30", count=4)
    here = sweep(asked)
    for crew in (Crew(lambda: ThreadPoolExecutor(2), 2), processes(2)):
        there = sweep(asked, crew=crew)
        for name in ("levels", "errors", "branches", "places"):
            assert np.array_equal(getattr(here, name), getattr(there, name))
        assert here.gaps == there.gaps


def test_points_come_as_they_are_done():
    """Each point is handed over once, with progress; what is known so far makes a sweep with the rest missing."""
    asked, points, words = request(ANHARMONIC, "lam=0.1:1:12", count=3), [], []
    sweep(asked, gaps=False, on_point=points.append, progress=words.append)
    assert sorted(point.index for point in points) == list(range(12))
    assert words[-1] == "12 of 12 points"
    part = assemble(asked, points[:5])
    assert part.done.sum() == 5
    assert np.isnan(part.levels[5:]).all()


def test_stop():
    """Asked to stop, a sweep gives up at once."""
    points = []
    with pytest.raises(WorkStopped):
        sweep(request(ANHARMONIC, "lam=0.1:1:50", count=3), on_point=points.append, should_stop=lambda: len(points) >= 7)
    assert len(points) == 7


def test_quantities_that_do_not_exist_leave_the_levels():
    """Where a level that lines start from is missing, the levels are there without them, and a note says why."""
    found = sweep(request(ANHARMONIC, "lam=0.1,0.2", count=2, quantity=Quantity("strengths", "", 5)))
    assert np.isfinite(found.levels).all()
    assert np.isnan(found.quantity).all()
    assert any("level 5" in note for note in found.notes)
