"""Sheets solved and states projected, for the tests of the analysis."""

from functools import cache

from specterm.analysis import project, solve
from specterm.language import parse
from specterm.model import build


@cache
def model(text, folder=None):
    """Return the model of a sheet."""
    return build(parse(text), folder=folder)


@cache
def spectrum(text, count=None, folder=None):
    """Return levels of a sheet."""
    return solve(model(text, folder), count=count)


def weights(text, name, count=None, folder=None):
    """Return the weights of a state."""
    return project(model(text, folder), spectrum(text, count, folder), name, folder)


def assert_weights(found, expected):
    """Assert that all weights are as expected within their reported errors."""
    for weight, value in zip(found.weights, expected, strict=True):
        off = abs(weight.weight - value)
        assert off <= weight.error, (
            f"weight {weight.index}: {weight.weight!r}, expected {value!r}: {off:.1e} > {weight.error:.1e}"
        )
