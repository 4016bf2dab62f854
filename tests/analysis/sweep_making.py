"""Sweeps for the tests, and work for other processes."""

import os

from specterm.analysis.sweep import SweepRequest
from specterm.analysis.sweep_request import axis_of

RING = "H = p^2; phi = 0; x in ring(0, 2*pi), phase phi"
ANHARMONIC = "H = p^2/2 + x^2/2 + lam*x^4; lam = 0.1; x in (-inf, inf)"


def request(text, *ranges, **options):
    """Return a request."""
    return SweepRequest(text, tuple(axis_of(one) for one in ranges), **options)


def squared(number):
    """Return the square, but kill the process at 13."""
    if number == 13:
        os._exit(1)
    return number**2
