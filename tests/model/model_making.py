"""Short ways to models, functions and operators from text, and the same expressions in 50 digits."""

import mpmath

from specterm.language import parse, parse_expression
from specterm.language.nodes import Binary, Call, Compare, Name, Node, Number, Unary
from specterm.model import build
from specterm.model.elementary import SECOND_NAMES

PRECISION = 50


def model(text, **options):
    """Return the model of a sheet; a domain and an operator are added where there are none."""
    if " in " not in text:
        text += "\nx in (-inf, inf)"
    if "H =" not in text:
        text += "\nH = p^2"
    return build(parse(text), **options)


def function(expression, rest=""):
    """Return an expression of x as a Function."""
    found = model(rest).observable(expression).function
    assert found is not None
    return found


def operator(expression, rest=""):
    """Return an expression as an Operator."""
    return model(rest).observable(expression)


def exact(expression, x):
    """Return the value of an expression at x (a float, taken as it is) in 50 digits; numbers are the decimals as written."""
    with mpmath.workdps(max(PRECISION, mpmath.mp.dps)):
        return _exact(parse_expression(expression), mpmath.mpf(x))


def _exact(node: Node, x):
    if isinstance(node, Number):
        return mpmath.mpf(repr(node.value))
    if isinstance(node, Name):
        return {"x": x, "pi": mpmath.pi, "i": mpmath.mpc(0, 1)}[node.name]
    if isinstance(node, Unary):
        return {"-": lambda a: -a, "+": lambda a: a, "not": lambda a: float(not a)}[node.operator](_exact(node.operand, x))
    if isinstance(node, Compare):
        values = [_exact(n, x) for n in node.operands]
        return float(all(COMPARE[op](a, b) for op, a, b in zip(node.operators, values, values[1:], strict=False)))
    if isinstance(node, Binary):
        return BINARY[node.operator](_exact(node.left, x), _exact(node.right, x))
    assert isinstance(node, Call)
    return EXACT[SECOND_NAMES.get(node.name, node.name)](*(_exact(n, x) for n in node.arguments))


COMPARE = {"<": lambda a, b: a < b, "<=": lambda a, b: a <= b, ">": lambda a, b: a > b, ">=": lambda a, b: a >= b}
BINARY = {
    "+": lambda a, b: a + b,
    "-": lambda a, b: a - b,
    "*": lambda a, b: a * b,
    "/": lambda a, b: a / b,
    "^": lambda a, b: a**b,
    "and": lambda a, b: float(bool(a) and bool(b)),
    "or": lambda a, b: float(bool(a) or bool(b)),
}
_SAME = """exp expm1 log log1p log10 sqrt sin cos tan sec csc cot asin acos atan asec acsc sinh cosh tanh sech csch coth
asinh acosh atanh asech acsch acoth sign floor ceil erf erfc gamma digamma besselj bessely besseli besselk airyai airybi hypot
atan2"""
EXACT = {name: getattr(mpmath, name, None) for name in _SAME.split()} | {
    "log2": lambda x: mpmath.log(x, 2),
    "cbrt": lambda x: mpmath.sign(x) * mpmath.cbrt(abs(x)),
    "acot": lambda x: mpmath.pi / 2 - mpmath.atan(x),
    "abs": abs,
    "step": lambda x: mpmath.mpf(x >= 0),
    "min": min,
    "max": max,
    "lgamma": lambda x: mpmath.re(mpmath.loggamma(x)),
    "polygamma": lambda n, x: mpmath.psi(int(n), x),
    "airyaiprime": lambda x: mpmath.airyai(x, derivative=1),
    "airybiprime": lambda x: mpmath.airybi(x, derivative=1),
    "where": lambda c, a, b: a if c else b,
}
