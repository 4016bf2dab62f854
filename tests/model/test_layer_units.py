"""Units in the cells and in the heading of a layers block."""

import numpy as np

from specterm.language import parse
from specterm.model import build

SHEET = """units: energy meV, length nm, mass m_e
gap = 50 [angstrom]
layers x: thickness [angstrom], V [eV], m
  gap  0.3     0.09
  80   1[meV]  0.067
x in layers
H = p*(1/(2*m))*p + V
"""


def test_a_cell_with_a_unit_does_not_take_the_column_s() -> None:
    """A unit behind a column's name is for bare numbers; a cell that carries a unit keeps its own."""
    model = build(parse(SHEET))
    assert np.isclose(model.domain.right, 13.0, rtol=1e-14)  # 5 nm + 8 nm
    assert np.allclose(model.functions["V"](np.array([1.0, 6.0])), [300.0, 1.0], rtol=1e-14)
