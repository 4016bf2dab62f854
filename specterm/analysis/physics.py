"""The functions for users of the package, in one place: `from specterm.analysis.physics import expectation, transitions`.

A state is a name of the sheet or `level(3)`, an observable a name or an expression. The rest of specterm takes these
functions from where they live, since importing them all costs 25 ms that `specterm levels` does not need.
"""

from specterm.analysis.capture import captured_by
from specterm.analysis.evolution import Evolution, Packet, evolve, packet_of, revivals
from specterm.analysis.expectation import Expectation, expectation
from specterm.analysis.lines import Line
from specterm.analysis.matrix_elements import MatrixElements, elements, matrix_elements
from specterm.analysis.measurement import Course, Joint, Orders, Record, Step, both_orders, course_of, measure, repeat
from specterm.analysis.meters import Outcome
from specterm.analysis.moments import Moments, moments
from specterm.analysis.momentum import MomentumDensity, level_momentum, momentum_density
from specterm.analysis.observables import Observable, observable
from specterm.analysis.potential import potential_curve
from specterm.analysis.prepared import Prepared, other_sheet, prepare
from specterm.analysis.transitions import Transitions, into_other, populations, transitions
from specterm.analysis.uncertainty import Pair, pair_of
from specterm.analysis.weights import Weight, Weights, project
from specterm.spectrum import Level, Spectrum, solve

__all__ = [
    "Course", "Evolution", "Expectation", "Joint", "Level", "Line", "MatrixElements", "Moments", "MomentumDensity",
    "Observable", "Orders", "Outcome", "Packet", "Pair", "Prepared", "Record", "Spectrum", "Step", "Transitions",
    "Weight", "Weights",
    "both_orders", "captured_by", "course_of", "elements", "evolve", "expectation", "into_other", "level_momentum",
    "matrix_elements", "measure", "moments", "momentum_density", "observable", "other_sheet", "packet_of", "pair_of",
    "populations", "potential_curve", "prepare", "project", "repeat", "revivals", "solve", "transitions",
]  # fmt: skip
