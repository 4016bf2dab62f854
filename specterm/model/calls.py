"""Calls in a sheet's expressions: functions of numbers, `where`, complex parts, adjoints and commutators, levels."""

from __future__ import annotations

from collections.abc import Sequence

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.language.nodes import Call
from specterm.language.suggest import nearest
from specterm.model import compose
from specterm.model.elementary import COMPOSED, FUNCTIONS, ORDERED, SECOND_NAMES, first_name
from specterm.model.setting import Setting
from specterm.model.term import UNIT, Term
from specterm.model.values import LevelPart, Levels, Value, adjoint, as_number, as_operator, as_real, as_term

_COUNTS = {"where": 3, "mod": 2, "re": 1, "im": 1, "arg": 1, "conj": 1, "dagger": 1, "commutator": 2, "level": 1}
KNOWN = (*FUNCTIONS, *SECOND_NAMES, *COMPOSED, "dagger", "commutator", "level", "table")
"""Every name that can be called."""


def call_value(node: Call, values: Sequence[Value], setting: Setting) -> Value:
    """Return the value of a call, its arguments resolved."""
    _check_count(node)
    spans = [a.span for a in node.arguments]
    if node.name == "dagger":
        return adjoint(values[0], spans[0])
    if node.name == "commutator":
        a, b = (as_operator(v, setting, s) for v, s in zip(values, spans, strict=True))
        return a.commutator(b)
    if node.name == "level":
        return level(values[0], spans[0], None, setting)
    name = first_name(node.name) or node.name
    if name in COMPOSED:
        return _composed(name, values, spans)
    real = not FUNCTIONS[name].holomorphic and name != "abs"
    what = f"the argument of `{node.name}`"
    terms = [as_real(v, what, s) if real else as_term(v, what, s) for v, s in zip(values, spans, strict=True)]
    if name in ORDERED:
        as_number(terms[0], f"the order of `{node.name}`", spans[0], setting.coordinate)
    return compose.call(name, *terms)


def _check_count(node: Call) -> None:
    name = first_name(node.name)
    if name is None and node.name not in _COUNTS:
        raise refuse("unknown-function", node.span, name=node.name, near=nearest(node.name, KNOWN))
    fewest = most = _COUNTS.get(name or node.name, 0)
    if name in FUNCTIONS:
        fewest, most = FUNCTIONS[name].fewest, FUNCTIONS[name].most
    found = len(node.arguments)
    if not fewest <= found <= most:
        wanted = f"{fewest} argument{'s' if fewest > 1 else ''}" if fewest == most else f"{fewest} to {most} arguments"
        raise refuse("argument-count", node.span, name=node.name, wanted=wanted, found=found)


def _composed(name: str, values: Sequence[Value], spans: Sequence[Span]) -> Term:
    terms = [as_term(v, f"an argument of `{name}`", s) for v, s in zip(values, spans, strict=True)]
    if name == "where":
        return compose.where(as_real(terms[0], "the condition of `where`", spans[0]), terms[1], terms[2])
    if name == "mod":
        return compose.modulus(*(as_real(t, "an argument of `mod`", s) for t, s in zip(terms, spans, strict=True)))
    single = {"re": compose.real_part, "im": compose.imaginary_part, "arg": compose.argument, "conj": compose.conjugate}
    return single[name](terms[0])


def level(index: Value, span: Span, path: str | None, setting: Setting) -> Levels:
    """Return one level, of this sheet or of the sheet at `path`."""
    number = as_number(index, "the number of a level", span, setting.coordinate)
    if number < 0 or number != int(number):
        raise refuse("level-index", span, found=f"{number:g}")
    return Levels((LevelPart(UNIT, int(number), path),))
