"""Statements: the forms of the design's table (section 3), the layers block, bytes to text."""

import json
from pathlib import Path

import pytest

from specterm.errors import SheetError
from specterm.language import decode, parse
from specterm.language.dimensions import check_dimensions
from specterm.language.nodes import Name, Number
from specterm.language.printing import format_expression
from specterm.units import UnitSystem

CASES = Path(__file__).parent.parent / "reference" / "cases"
EXAMPLE = """# Two coupled wells under bias (invented structure)
units: energy meV, length nm, mass m_e

H = p*(1/(2*m))*p + V + e*F*x
F = 20 [kV/cm]
gap = 1.8
layers x: thickness, V, m
   10     300   0.092
   7.2    0     0.067

   # the barrier between the wells
   gap    300   0.092
   5.4    0     0.067
   10     300   0.092
x in layers

state packet = exp(-(x-13)^2/(4*1.5^2)) * exp(i*0.2*x)
"""


def test_the_example_of_the_design():
    """The sheet that the design shows is read whole, comments and blank lines inside the block included."""
    sheet = parse(EXAMPLE)
    assert sheet.units.pairs == (("energy", "meV"), ("length", "nm"), ("mass", "m_e"))
    assert [item.name for item in sheet.definitions] == ["H", "F", "gap"]
    assert sheet.definitions[1].expression.unit == "kV/cm"
    (block,) = sheet.layers
    assert [(name, unit) for name, unit, _ in block.columns] == [("thickness", None), ("V", None), ("m", None)]
    assert len(block.rows) == 5
    assert isinstance(block.rows[2][0], Name)
    assert sheet.domains[0].shape == "layers"
    assert sheet.states[0].name == "packet"
    assert sheet.text == EXAMPLE


@pytest.mark.parametrize(
    ("text", "shape", "ends", "free", "phase"),
    [
        ("x in (a, b)", "interval", ("a", "b"), (False, False), None),
        ("x in (-inf, inf)", "interval", ("-inf", "inf"), (False, False), None),
        ("x ∈ (−∞, ∞)", "interval", ("-inf", "inf"), (False, False), None),
        ("x in (0, 1), free", "interval", ("0", "1"), (True, True), None),
        ("x in (0, 1), free left", "interval", ("0", "1"), (True, False), None),
        ("x in (0, 1), free right", "interval", ("0", "1"), (False, True), None),
        ("x in (0, 1), free left, free right", "interval", ("0", "1"), (True, True), None),
        ("x in ring(0, 2*pi)", "ring", ("0", "2*pi"), (False, False), None),
        ("x in ring(0, L), phase theta/(2*pi)", "ring", ("0", "L"), (False, False), "theta/(2*pi)"),
        ("x in ring(0, L), phase -ng", "ring", ("0", "L"), (False, False), "-ng"),
        ("x in layers", "layers", (None, None), (False, False), None),
        ("x in layers, free", "layers", (None, None), (True, True), None),
        ("x in (min(a, b), 2*(a + b))", "interval", ("min(a, b)", "2*(a + b)"), (False, False), None),
    ],
)
def test_domains(text, shape, ends, free, phase):
    """Every form of a domain gives its shape, ends, free ends and phase."""
    (domain,) = parse(text).domains
    assert domain.coordinate == "x"
    assert domain.shape == shape
    assert tuple(end and format_expression(end) for end in (domain.left, domain.right)) == ends
    assert (domain.free_left, domain.free_right) == free
    assert (domain.phase and format_expression(domain.phase)) == phase


@pytest.mark.parametrize("word", ["diagonalise", "diagonalize"])
def test_diagonalise(word):
    """Both spellings name the operator."""
    assert parse(f"{word} K").diagonalise.name == "K"


@pytest.mark.parametrize(
    "name", ["units", "layers", "state", "diagonalise", "phase", "free", "ring", "level", "of", "table", "e", "D"]
)
def test_words_of_statements_are_free_as_names(name):
    """A word that only begins a statement may be the name of a parameter."""
    assert parse(f"{name} = 3").definitions[0].name == name


def test_semicolons_and_newlines():
    """Statements end at a newline or `;` outside brackets; inside brackets a newline does not end them."""
    sheet = parse("a = 1; b = 2;;\n; c = (1 +\n  2\n)*3 # rest; d = 4\r\ne = 5")
    assert [item.name for item in sheet.definitions] == ["a", "b", "c", "e"]


def test_layers_details():
    """A block may start elsewhere, carry units, hold expressions without blanks, and stand in an indented sheet."""
    sheet = parse("  layers z from -5: thickness [nm], V [eV], m [m_e]\n\t 5 1.350/2 (1 + 2)\n     a -3 5[nm]\n  z in layers\n")
    (block,) = sheet.layers
    assert block.coordinate == "z"
    assert format_expression(block.start) == "-5"
    assert [(name, unit) for name, unit, _ in block.columns] == [("thickness", "nm"), ("V", "eV"), ("m", "m_e")]
    assert [[format_expression(cell) for cell in row] for row in block.rows] == [
        ["5", "1.35/2", "1 + 2"],
        ["a", "-3", "5 [nm]"],
    ]
    assert sheet.domains[0].coordinate == "z"


@pytest.mark.parametrize(
    ("text", "unit"),
    [("energy cm^-1, length nm", "cm^-1"), ("energy [meV], length nm", "meV"), ("energy kJ/mol , length nm", "kJ/mol")],
)
def test_units_as_written(text, unit):
    """The unit is the text up to the comma, with or without brackets."""
    assert parse(f"units: {text}").units.pairs[0] == ("energy", unit)


def test_hbar_is_an_ordinary_definition():
    """A sheet without units may set hbar."""
    (item,) = parse("hbar = 0.37").definitions
    assert item.name == "hbar"
    assert item.expression == Number(item.expression.span, 0.37)


def test_definition_spans():
    """A definition knows where its name stands and where the whole of it does."""
    text = "a = 1\n  b = 2 + 3  # rest"
    item = parse(text).definitions[1]
    assert text[item.name_span.start : item.name_span.end] == "b"
    assert text[item.span.start : item.span.end] == "b = 2 + 3"


@pytest.mark.parametrize("text", ["", "\n\n", "# to do\n\n;;\n", "\ufeff"])
def test_empty_sheet(text):
    """A sheet without a statement is refused as empty."""
    with pytest.raises(SheetError, match="the sheet is empty: it defines no operator"):
        parse(text)


def test_sheets_of_the_reference_cases_pass():
    """Every sheet of the reference cases that is not about lattices, and every sheet beside one, passes the dimension check."""
    texts = []
    for file in sorted(CASES.glob("*.json")):
        for case in json.loads(file.read_text()):
            files = (text for name, text in (case.get("files") or {}).items() if name.endswith(".sheet"))
            texts += [text for text in (case["sheet"], *files) if "lattice" not in text]
    assert len(texts) > 20
    for text in texts:
        sheet = parse(text)
        assert sheet.domains
        check_dimensions(sheet, UnitSystem.make(sheet.units.pairs) if sheet.units else UnitSystem.dimensionless())


def test_decode():
    """A byte order mark is dropped, CRLF becomes a newline, and umlauts survive."""
    assert decode("\ufeffH = p^2\r\n# Übergang\r\n".encode()) == "H = p^2\n# Übergang\n"


def test_decode_names_the_place():
    """A byte that is not UTF-8 is named with line and column."""
    with pytest.raises(SheetError, match="byte 0xfc at line 2, column 3"):
        decode(b"a = 1\nb \xfc")
