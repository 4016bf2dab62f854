"""The potential to be drawn under the levels."""

from __future__ import annotations

import numpy as np

from specterm.arrays import Array
from specterm.model import Model


def potential_curve(model: Model, x: Array) -> Array:
    """Return the effective potential of the main operator at the places x, in the sheet's unit of energy; shape (n,).

    For an operator of second order that is what is left when the momentum is at its best, V - B^2/(4 K); for others the part
    without derivatives. Non-finite values are possible.
    """
    operator = model.operator
    if operator.order == 2 and operator.hermitian() is None:
        sturm = operator.sturm()
        function = sturm.V if sturm.B is None else sturm.V - sturm.B * sturm.B / (4 * sturm.K)
    else:
        plain = operator.form()[(0, 0)]
        if plain is None:
            return np.zeros(len(x))
        function = plain
    with np.errstate(all="ignore"):
        values: Array = np.real(function(x))
    return values
