"""Expressions: what binds how, what is accepted, what is refused."""

import pytest

from specterm.errors import SheetError
from specterm.language import parse_expression
from specterm.language.nodes import Binary, Call, Compare, ForeignLevel, Name, Number, Table, Unary
from specterm.language.printing import format_expression


def brackets(node) -> str:
    """Write a tree with a bracket around every operation."""
    match node:
        case Number(value=value, unit=unit):
            return f"{value:g}" + (f"[{unit}]" if unit is not None else "")
        case Name(name=name):
            return name
        case Unary(operator=operator, operand=operand):
            return f"({operator} {brackets(operand)})"
        case Binary(operator=operator, left=left, right=right):
            return f"({brackets(left)} {operator} {brackets(right)})"
        case Compare(operators=operators, operands=operands):
            rest = "".join(f" {o} {brackets(n)}" for o, n in zip(operators, operands[1:], strict=True))
            return f"({brackets(operands[0])}{rest})"
        case Call(name=name, arguments=arguments):
            return f"{name}({', '.join(map(brackets, arguments))})"
    raise AssertionError(node)


GROUPING = [
    ("1 + 2*3", "(1 + (2 * 3))"),
    ("1 - 2 - 3", "((1 - 2) - 3)"),
    ("1/2/3", "((1 / 2) / 3)"),
    ("a/b*c", "((a / b) * c)"),
    ("2^3^2", "(2 ^ (3 ^ 2))"),
    ("2**3**2", "(2 ^ (3 ^ 2))"),
    ("-x^2", "(- (x ^ 2))"),
    ("2^-3", "(2 ^ (- 3))"),
    ("2^-3^2", "(2 ^ (- (3 ^ 2)))"),
    ("2^-3*4", "((2 ^ (- 3)) * 4)"),
    ("-a*b", "((- a) * b)"),
    ("2*-3", "(2 * (- 3))"),
    ("1 - -2", "(1 - (- 2))"),
    ("--x", "(- (- x))"),
    ("+x", "(+ x)"),
    ("(1 + 2)*3", "((1 + 2) * 3)"),
    ("((x))", "x"),
    ("p*(1/(2*m))*p + V", "(((p * (1 / (2 * m))) * p) + V)"),
    ("0 < x < 2", "(0 < x < 2)"),
    ("(0 < x) < 2", "((0 < x) < 2)"),
    ("a + 1 <= b == c", "((a + 1) <= b == c)"),
    ("x > 0 and x < 3 or y", "(((x > 0) and (x < 3)) or y)"),
    ("not a < b", "(not (a < b))"),
    ("not not a and b", "((not (not a)) and b)"),
    ("where(x < 0, 1, sin(x)*2)", "where((x < 0), 1, (sin(x) * 2))"),
    ("level(0) + i*level(1)", "(level(0) + (i * level(1)))"),
    ("sin(x)^2", "(sin(x) ^ 2)"),
    ("20 [kV/cm]*x", "(20[kV/cm] * x)"),
    ("2[nm]^2", "(2[nm] ^ 2)"),
    ("2 [ cm^-1 ]", "2[cm^-1]"),
    ("1 +\t2", "(1 + 2)"),
    ("(1 +\n2)", "(1 + 2)"),
    ("1.5 + .5 + 1. + 1e-3 + 1E5", "((((1.5 + 0.5) + 1) + 0.001) + 100000)"),
]
FRIENDLY = [
    ("1 − 2", "(1 - 2)"),
    ("a·b", "(a * b)"),
    ("a⋅b", "(a * b)"),
    ("a × b", "(a * b)"),
    ("2*π", "(2 * pi)"),
    ("ħ*ω", "(hbar * ω)"),
    ("ℏ", "hbar"),
    ("-∞", "(- inf)"),
    ("x²", "(x ^ 2)"),
    ("x³ + y²", "((x ^ 3) + (y ^ 2))"),
    ("x⁻¹²", "(x ^ (- 12))"),
    ("a ≤ b ≥ c ≠ d", "(a <= b >= c != d)"),
    ("ε_0*β2", "(ε_0 * β2)"),
    ("1\u00a0+ 2", "(1 + 2)"),
]


@pytest.mark.parametrize(("text", "tree"), GROUPING + FRIENDLY)
def test_grouping(text, tree):
    """An expression groups as the design says (section 3) and the friendly signs read as their plain ones."""
    assert brackets(parse_expression(text)) == tree


@pytest.mark.parametrize(("text", "tree"), GROUPING + FRIENDLY)
def test_printing_reads_back(text, tree):
    """The printed form of a tree parses to the same tree."""
    assert brackets(parse_expression(format_expression(parse_expression(text)))) == tree


@pytest.mark.parametrize(
    "text",
    [
        "",
        "1 +",
        "* 2",
        "2x",
        "2 3",
        "x y",
        "(1",
        "1)",
        "sin()",
        "()",
        "f(1,,2)",
        "1_000",
        "0x10",
        "٣",
        "1.2.3",
        "a = b",
        "a ? b",
        "x.y",
        "x[0]",
        "a b",
        "{1}",
        "1 <",
        "not",
        "a and",
        "1 + not x",
        "x'",
        "lambda: 3",
        "'a'",
        '"a"',
        "[nm]",
        "x [nm]",
        "1e999",
        "@",
        "`",
        "(1, 2)",
        "a\nb",
        "a; b",
        "x²y",
        "5 % 2",
        "a // b",
        "a & b",
        "!a",
        "1e-999",
        "f(x) = 2",
        "inf(",
        "∞∞",
        'level(0) of "a.sheet"',
    ],
)
def test_refused(text):
    """What is no expression is refused with a SheetError that says how to mend it."""
    with pytest.raises(SheetError) as caught:
        parse_expression(text)
    assert caught.value.mend


def test_spans_cover_the_text_of_each_node():
    """A node's span is the text it came from, brackets of the group left out."""
    text = "a + sin(b*2 [nm])"
    node = parse_expression(text)
    assert text[node.span.start : node.span.end] == text
    call = node.right
    assert text[call.span.start : call.span.end] == "sin(b*2 [nm])"
    number = call.arguments[0].right
    assert text[number.span.start : number.span.end] == "2 [nm]"
    assert (number.value, number.unit) == (2.0, "nm")


def test_foreign_level():
    """`level(n) of "file"` is one node, in a state only."""
    node = parse_expression('2*level(1 + 1) of "lower.sheet"', state=True)
    assert isinstance(node.right, ForeignLevel)
    assert node.right.path == "lower.sheet"
    assert brackets(node.right.index) == "(1 + 1)"


@pytest.mark.parametrize(
    ("text", "columns", "smooth", "outside"),
    [
        ('table("a.csv")', ((1, None), (2, None)), True, "error"),
        ('table("a.csv", 1, 3)', ((1, None), (3, None)), True, "error"),
        ('table("a.csv", "R" [angstrom], "E" [cm^-1], linear, hold)', (("R", "angstrom"), ("E", "cm^-1")), False, "hold"),
        ('table("a.csv", extend)', ((1, None), (2, None)), True, "extend"),
    ],
)
def test_table(text, columns, smooth, outside):
    """The columns, units and options of a table are read; without columns the first two are taken."""
    node = parse_expression(text)
    assert isinstance(node, Table)
    assert (node.path, node.columns, node.smooth, node.outside) == ("a.csv", columns, smooth, outside)
    again = parse_expression(format_expression(node))
    assert (again.columns, again.smooth, again.outside) == (columns, smooth, outside)
