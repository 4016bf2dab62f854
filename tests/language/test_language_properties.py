"""Properties of the language, by random text and random trees."""

from hypothesis import example, given, settings
from hypothesis import strategies as st

from specterm.errors import SheetError, Span, describe
from specterm.language import parse, parse_expression
from specterm.language.dimensions import check_dimensions
from specterm.language.lexer import MAX_TEXT
from specterm.language.nodes import Binary, Call, Compare, Name, Number, Unary
from specterm.language.printing import format_expression
from specterm.units import UnitSystem

NOWHERE = Span(0, 0)
PIECES = st.sampled_from(
    [
        "x",
        "H",
        "=",
        "(",
        ")",
        ",",
        "+",
        "-",
        "*",
        "/",
        "^",
        "**",
        "<",
        "==",
        "not ",
        " and ",
        " in ",
        "ring",
        "layers ",
        "units:",
        "state ",
        "diagonalise ",
        "level",
        " of ",
        "table",
        '"a"',
        "[nm]",
        "[",
        "]",
        "\n",
        ";",
        "#",
        " ",
        "  ",
        "\t",
        "1",
        "2.5",
        "1e9",
        "free",
        "phase ",
        "thickness",
        ":",
        "inf",
        "π",
        "²",
        "−",
        "\r\n",
        "\x00",
        "é",
        "energy meV",
        "'",
        "\u202e",
        "٣",
        "matrix",
        "∞",
    ]
)
UNITS = UnitSystem.make((("energy", "meV"), ("length", "nm"), ("mass", "m_e")))


def error_of(text: str) -> SheetError | None:
    """Parse a text and check its dimensions; return the error, if there is one."""
    try:
        check_dimensions(parse(text), UNITS)
    except SheetError as error:
        return error
    return None


def check_only_sheet_errors(text: str) -> None:
    """Let anything but a SheetError through, and see that the error can be shown with its place."""
    error = error_of(text)
    if error is not None:
        assert error.message
        assert error.mend
        assert error.span is None or 0 <= error.span.start < error.span.end <= len(text) + 1
        assert describe(error, text)


@given(st.text(max_size=200))
@settings(max_examples=150, deadline=None, derandomize=True)
def test_any_text_gives_a_sheet_or_a_sheet_error(text):
    """No text raises anything but SheetError, and every error can be shown with its place."""
    check_only_sheet_errors(text)


@given(st.lists(PIECES, max_size=40).map("".join))
@example("layers x: thickness\n (\n")
@example("a = (b\nc = 1")
@example("x in (0, 1),")
@settings(max_examples=400, deadline=None, derandomize=True)
def test_any_mixture_of_words_gives_a_sheet_or_a_sheet_error(text):
    """No mixture of the language's own words raises anything but SheetError."""
    check_only_sheet_errors(text)


@given(st.lists(PIECES, min_size=1, max_size=8).map("".join))
@settings(max_examples=25, deadline=None, derandomize=True)
def test_repeated_text_stays_within_the_limits(text):
    """A piece of text repeated up to a quarter of the largest sheet is read or refused like any other."""
    check_only_sheet_errors((text * (MAX_TEXT // 4 // len(text)))[: MAX_TEXT // 4])


def trees():
    """Return a strategy for expression trees, numbers with units and all operators included."""
    numbers = st.builds(
        Number, st.just(NOWHERE), st.floats(0, 1e300, allow_subnormal=False), st.sampled_from([None, None, "nm", "kV/cm"])
    )
    leaves = numbers | st.builds(Name, st.just(NOWHERE), st.sampled_from(["x", "V0", "p", "inf", "ω", "of"]))

    def wider(inner):
        return (
            st.builds(Unary, st.just(NOWHERE), st.sampled_from(["-", "+", "not"]), inner)
            | st.builds(Binary, st.just(NOWHERE), st.sampled_from(["+", "-", "*", "/", "^", "and", "or"]), inner, inner)
            | st.lists(inner, min_size=1, max_size=3).map(lambda items: Call(NOWHERE, "min", tuple(items)))
            | st.lists(inner, min_size=2, max_size=3).map(
                lambda items: Compare(NOWHERE, ("<", "==")[: len(items) - 1], tuple(items))
            )
        )

    return st.recursive(leaves, wider, max_leaves=12)


def bare(node):
    """Return a tree without its places."""
    match node:
        case Number(value=value, unit=unit):
            return value, unit
        case Name(name=name):
            return name
        case Unary(operator=operator, operand=operand):
            return operator, bare(operand)
        case Binary(operator=operator, left=left, right=right):
            return operator, bare(left), bare(right)
        case Compare(operators=operators, operands=operands):
            return operators, [bare(operand) for operand in operands]
        case Call(name=name, arguments=arguments):
            return name, [bare(argument) for argument in arguments]
    raise AssertionError(node)


@given(trees())
@settings(max_examples=300, deadline=None, derandomize=True)
def test_a_printed_tree_reads_back_the_same(tree):
    """Printing a tree and parsing the text gives the same tree, numbers to the last bit."""
    assert bare(parse_expression(format_expression(tree))) == bare(tree)
