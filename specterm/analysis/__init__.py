"""Physics from levels: potentials to draw, moments, projection weights. `solve` is the engine's own."""

from specterm.analysis.moments import Moments, moments
from specterm.analysis.potential import potential_curve
from specterm.analysis.weights import Weight, Weights, project
from specterm.spectrum import Level, Spectrum, solve

__all__ = ["Level", "Moments", "Spectrum", "Weight", "Weights", "moments", "potential_curve", "project", "solve"]
