"""Levels with error and kind from a model."""

from specterm.spectrum.engine import solve
from specterm.spectrum.result import Level, Spectrum

__all__ = ["Level", "Spectrum", "solve"]
