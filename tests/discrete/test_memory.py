"""Memory is asked for before it is taken."""

import pytest
from discrete_making import problem

from specterm.discrete import memory
from specterm.discrete.memory import memory_left, refuse_above
from specterm.errors import PhysicsError
from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve


def test_memory_left_is_known():
    """The machine tells how much memory is left, and it is more than nothing."""
    assert memory_left() > 1e6


def test_half_of_what_is_left(monkeypatch):
    """Half of what is left may be taken; a byte more is refused, with both sizes."""
    monkeypatch.setattr(memory, "memory_left", lambda: 2e9)
    refuse_above(1e9, "a mesh")
    with pytest.raises(PhysicsError, match=r"a mesh would take 1 GB, and 2 GB are left") as caught:
        refuse_above(1e9 + 1, "a mesh")
    assert "fewer" in caught.value.mend


def test_a_control_group_counts(monkeypatch, tmp_path):
    """The least of the machine's and the control group's rest is taken; a missing file, or "max", does not count."""
    (tmp_path / "limit").write_text("1000\n")
    (tmp_path / "used").write_text("400\n")
    assert memory._group("limit", "used", tmp_path) == 600
    (tmp_path / "limit").write_text("max\n")
    assert memory._group("limit", "used", tmp_path) == float("inf")
    assert memory._group("missing", "used", tmp_path) == float("inf")
    monkeypatch.setattr(memory, "_machine", lambda: 5e5)
    assert memory_left() <= 5e5
    monkeypatch.setattr(memory, "_group", lambda limit, *_: 1e3 if limit == "memory.max" else 1e4)
    assert memory_left() == 1e3


@pytest.mark.parametrize(
    ("text", "count"), [("H = p^2 + x^4; x in (-inf, inf)", 200), ("H = p^4 + x^4; x in (-inf, inf)", 200)]
)
def test_solving_is_refused_when_memory_is_short(monkeypatch, text, count):
    """With a megabyte left a solve that needs more is refused as physics (exit 1), not by a crash."""
    model = build(parse(text))
    monkeypatch.setattr(memory, "memory_left", lambda: 1e6)
    with pytest.raises(PhysicsError, match="GB are left"):
        solve(model, count=count)


def test_problem_takes_no_memory():
    """Making a problem ready asks for none."""
    assert problem("H = p^2 + x^4; x in (-inf, inf)").knots == 0
