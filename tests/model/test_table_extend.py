"""Tables that go on beyond their points."""

import numpy as np

from specterm.language import parse
from specterm.model import build


def test_an_extended_parabola_stays_one(tmp_path) -> None:
    """Points of a parabola extended outwards confine: the spline's cubic terms there are rounding and are dropped."""
    x = np.linspace(-12, 12, 41)
    (tmp_path / "h.csv").write_text("\n".join(f"{float(a)!r},{float(a * a / 2)!r}" for a in x))
    model = build(parse('V = table("h.csv", 1, 2, extend)\nH = p^2/2 + V\nx in (-inf, inf)'), folder=tmp_path)
    far = np.array([-1e60, 1e60])
    assert np.allclose(model.functions["V"](far), far**2 / 2, rtol=1e-9)  # the quadratic coefficient to the spline's rounding
