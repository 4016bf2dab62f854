"""From sheet to model: names, parameters, domains, layers, states, observables, and what is refused."""

import json
import math
from pathlib import Path

import numpy as np
import pytest
from model_making import model

from specterm.errors import SheetError, SpectermError
from specterm.language import parse
from specterm.language.catalogue import MARK, ROWS
from specterm.model import Domain, Function, build

SHEETS = json.loads((Path(__file__).parent / "case_sheets.json").read_text())
X = np.array([0.5, 1.5, 3.5])


@pytest.mark.parametrize("name", sorted(SHEETS))
def test_case_sheets(name):
    """Every sheet of the reference cases builds, is Hermitian, and has a finite Sturm form where its order is at most 2."""
    m = build(parse(SHEETS[name]))
    op = m.operator
    assert op.hermitian() is None
    assert not m.warnings
    if op.order <= 2:
        s = op.sturm()
        x = np.linspace(max(m.domain.left, 0.1), min(m.domain.right, 1.0), 7)[1:-1]
        assert np.all(np.isfinite(s.K(x)) & np.isfinite(s.V(x)))
        assert s.K(x).dtype == s.V(x).dtype == float


ROWS_OF_MODEL = [(key, example) for key, row in ROWS.items() if row.stage == "model" for example in row.examples]


@pytest.mark.parametrize(("key", "example"), ROWS_OF_MODEL)
def test_catalogue(key, example):
    """Every example of the catalogue gives its error, at its place (some units are read by the dimension check first)."""
    with pytest.raises(SheetError) as found:
        build(parse(example.replace(MARK, "")))
    wanted = example.find(MARK)
    assert found.value.message.startswith(ROWS[key].message.split("{")[0])
    assert (found.value.span.start if found.value.span else -1) == wanted


def test_harmonic_sheet():
    """A sheet's parameters, plain names, hbar, domain and main operator come out as written."""
    m = model(
        "hbar = 0.61; m = 2.3; k = 0.77; x0 = 1.93; b = -k/2\nH = p^2/(2*m) + 0.5*k*(x - x0)^2 - 4.2 + b; x in (-inf, inf)"
    )
    assert m.parameters == {"hbar": 0.61, "m": 2.3, "k": 0.77, "x0": 1.93, "b": -0.385}
    assert m.plain == ("hbar", "m", "k", "x0")
    assert m.hbar == 0.61
    assert m.main == "H"
    assert m.domain == Domain("x", -math.inf, math.inf, "open", "open")
    s = m.operator.sturm()
    assert s.K.constant == pytest.approx(0.61**2 / 4.6, rel=1e-15)
    assert s.V(X) == pytest.approx(0.385 * (X - 1.93) ** 2 - 4.585, rel=1e-14)


def test_any_order_and_shadowing():
    """Definitions come in any order; the user's names shadow built-ins; a coordinate named like one wins over it."""
    m = model("H = a*p^2 + W; W = pi*y^2; a = 2*b; y = x; b = 3; pi = 10")
    assert m.operator.sturm().V(X) == pytest.approx(10 * X**2)
    assert m.operator.sturm().K.constant == 6
    units = model("units: energy eV, length nm, mass m_e\ne in (0, 1)\nH = p^2/(2*m_e) + 3*e^2")
    assert units.operator.sturm().V(X) == pytest.approx(3 * X**2)


def test_units():
    """The field term e F x with F in kV/cm, x in nm and energies in meV is 0.1 meV/nm per kV/cm (definition of the units)."""
    m = model("units: energy meV, length nm, mass m_e\nF = 20 [kV/cm]\nV = e*F*x\nx in (0, 10)\nH = p^2/(2*m_e) + V")
    assert m.functions["V"](X) == pytest.approx(2.0 * X, rel=1e-14)
    assert m.parameters["F"] == pytest.approx(2.0, rel=1e-14)
    assert m.plain == ("F",)


DOMAINS = [
    ("x in (0, 3)", (0, 3, "wall", "wall", None)),
    ("x in (0, 3), free", (0, 3, "free", "free", None)),
    ("x in (0, 3), free left", (0, 3, "free", "wall", None)),
    ("x in (-1, inf), free", (-1, math.inf, "free", "open", None)),
    ("x in (-inf, +inf)", (-math.inf, math.inf, "open", "open", None)),
    ("x in (-inf, 2*3)", (-math.inf, 6, "open", "wall", None)),
    ("x in ring(0, 2*pi)", (0, 2 * math.pi, "ring", "ring", None)),
    ("x in ring(-1, 1), phase 0.9/3", (-1, 1, "ring", "ring", 0.9 / 3)),
]


@pytest.mark.parametrize(("text", "wanted"), DOMAINS)
def test_domains(text, wanted):
    """Each form of the domain gives its ends, what holds there, and its phase."""
    d = model(text).domain
    assert (d.left, d.right, d.left_end, d.right_end, d.phase) == wanted


def test_domain_ends_know_their_rounding():
    """An end computed from 0.1 + 0.2 carries the bound of its rounding; a whole number is exact."""
    d = model("x in (0, 0.1 + 0.2)").domain
    assert d.left_slack == 0
    assert 0 < abs(d.right - 0.3) <= d.right_slack < 1e-15


LAYERS = "layers x from -1: thickness, V, m\n  1    0   a\n  b    3   0.7\n\n  1/2  2*a 0.5\na = 0.5\nb = 2\n"


def test_layers():
    """Columns are piecewise constant, the right layer counts at a boundary, cells may use parameters."""
    m = model(LAYERS + "x in layers\nH = p*(1/m)*p + V")
    assert (m.domain.left, m.domain.right, m.domain.left_end) == (-1, 2.5, "wall")
    places = np.array([-1, -0.5, 0, 1, 2, 2.25, 2.5])
    assert list(m.functions["V"](places)) == [0, 0, 3, 3, 1, 1, 1]
    assert list(m.functions["m"](places)) == [0.5, 0.5, 0.7, 0.7, 0.5, 0.5, 0.5]
    assert list(m.functions["V"].edges(-1, 2.5)) == [0, 2]


def test_outer_layers_go_on():
    """On a wider domain the outermost layers go on; on a narrower one they are cut."""
    m = model(LAYERS + "x in (-inf, 9)\nH = p*(1/m)*p + V")
    assert list(m.functions["V"](np.array([-99.0, 8.0]))) == [0, 1]
    assert model(LAYERS + "x in ring(0, 2)\nH = p*(1/m)*p + V").domain.right == 2


def test_layer_units():
    """Units behind a column's name convert its cells."""
    block = "layers z: thickness [angstrom], V [eV]\n 50 1\n 20 0\nz in layers\n"
    m = model("units: energy meV, length nm, mass m_e\n" + block + "H = p^2/(2*m_e) + V")
    assert m.domain.right == pytest.approx(7, rel=1e-15)
    assert list(m.functions["V"](np.array([1.0, 6.0]))) == [1000, 0]


def test_states():
    """A state is a function or a sum of levels with coefficients that may be complex or depend on x."""
    m = model(
        "state f = exp(-x^2)*exp(0.2*i*x)\n"
        "state s = sqrt(0.3)*level(0) - i*(level(1) + x*level(2))/2\n"
        'state o = 2*level(3) of "other.sheet"'
    )
    assert m.states["f"].function(np.array([0.5])) == pytest.approx(np.exp(-0.25 + 0.1j))
    assert m.states["f"].levels == ()
    parts = m.states["s"].levels
    assert m.states["s"].function is None
    assert [(index, path) for _, index, path in parts] == [(0, None), (1, None), (2, None)]
    assert parts[0][0].constant == pytest.approx(math.sqrt(0.3))
    assert parts[1][0].constant == pytest.approx(-0.5j)
    assert parts[2][0](np.array([3.0])) == pytest.approx(-1.5j)
    assert m.states["o"].levels[0][1:] == (3, "other.sheet")


@pytest.mark.parametrize(
    "text",
    [
        "level(0)*level(1)",
        "level(0) + x",
        "1/level(0)",
        "p*level(0)",
        "level(-1)",
        "level(x)",
        "sin(level(0))",
        "0*x",
        "p",
    ],
)
def test_bad_states(text):
    """What is neither a function nor a sum of levels is refused."""
    with pytest.raises(SheetError):
        model(f"state s = {text}")


def test_main_operator():
    """`diagonalise` chooses; else H; else the only operator; a function named H is an operator of order 0."""
    assert model("A = p^4\ndiagonalise A").main == "A"
    assert build(parse("x in (0, 1)\nA = p^2")).main == "A"
    m = model("H = x^2\nA = p")
    assert m.main == "H"
    assert m.operator.order == 0
    assert model("H = p^2\nA = x^2\ndiagonalise A").operator.function == Function(model("B = x^2").functions["B"].term)


def test_observables():
    """An observable is a name of the sheet or an expression over its names; errors have no place in the sheet."""
    m = model("a = 2\nV = x^2\nH = p^2 + V\nq = p/2")
    assert m.observable("x").function(X) == pytest.approx(X)
    assert m.observable("a*V + 1").function(X) == pytest.approx(2 * X**2 + 1)
    assert m.observable("q").order == 1
    assert m.observable("commutator(H, x)").order == 1
    assert m.observable("x > 1").function(X) == pytest.approx([0, 1, 1])
    for text in ("b", "level(0)", "p +", "sin(p)", 'table("/dev/zero", 1, 2)'):
        with pytest.raises(SheetError, match="observable") as found:
            m.observable(text)
        assert found.value.span is None


def test_overrides():
    """`--set` replaces definitions before anything is resolved; unknown names and broken texts are refused."""
    text = "a = 2\nb = a^2\nx in (0, b)\nH = p^2"
    m = build(parse(text), overrides={"a": "3"})
    assert m.domain.right == 9
    assert m.parameters == {"a": 3.0, "b": 9.0}
    assert build(parse(text), overrides={"b": "a + 1"}).domain.right == 3
    with pytest.raises(SheetError, match="`mas`") as found:
        build(parse(text + "\nmass = 1"), overrides={"mas": "3"})
    assert "`mass`" in found.value.mend
    with pytest.raises(SheetError, match="in a = 3 \\+"):
        build(parse(text), overrides={"a": "3 +"})
    with pytest.raises(SheetError, match="kappa") as found:
        build(parse(text), overrides={"a": "kappa"})
    assert found.value.span.start == text.index("2")


def test_warnings():
    """A parameter that nothing uses is pointed out; observables and hbar are not."""
    assert model("m = 2\nX = x^2\nhbar = 2").warnings == ("the parameter `m` is never used",)


REFUSED = [
    ("a = b; b = c; c = a; H = p^2*a", "defined by itself"),
    ("a = a + 1", "defined by itself"),
    ("layers x: thickness, V\n 1 V\nx in layers", "defined by itself"),
    ("layers x: thickness, V\n 1 x\nx in layers", "must be a number"),
    ("layers x: thickness, V\n -1 2\nx in layers", "thickness"),
    ("layers x: thickness, V\n 1e20 2\n 1 3\nx in layers", "thickness"),
    ("layers x: thickness, x\n 1 2\nx in layers", "coordinate"),
    ("x in (0, p)", "derivative"),
    ("x in (0, sqrt(-1))", "not a finite number"),
    ("x in ring(0, 1), phase x", "must be a number"),
    ("x in (0, 1), free right\nx in (0, 1)", "domain"),
    ("x in (0, inf), free right", "infinite end"),
    ("hbar = p", "derivative"),
    ("hbar = 0", "above 0"),
    ("hbar = x", "must be a number"),
    ("H = exp(p)", "derivative"),
    ("H = p^x", "power"),
    ("H = p^(-1)", "power"),
    ("H = 2^p", "derivative"),
    ("H = x/p", "divided"),
    ("H = p > 0", "derivative"),
    ("H = p^2 + besselj(x, x)", "must be a number"),
    ("H = p^2 + where(i*x > 0, 1, 2)", "real"),
    ("H = p^2 + gamma(i*x)", "real"),
    ("H = p^2 + 1/0", "not a finite number"),
    ("H = p^2 + log(-1)", "not a finite number"),
    ("H = p^2 + 1e300*1e300*x", "not a finite number"),
    ("H = p^2 + sin()", "between the brackets"),
    ("H = p^2 + hypot(x)", "takes 2 arguments"),
    ("H = p^2 + arcsine(x)", "no function"),
    ("H = commutator(p, x, x)", "takes 2 arguments"),
    ("H = p^2 + max(" + ", ".join("x" * 70) + ")", "takes 1 to 64 arguments"),
    ("H = (p^2 + x)^9", "order"),
]


@pytest.mark.parametrize(("text", "words"), REFUSED)
def test_refused(text, words):
    """What cannot be built is refused with a message that says why, a mend, and no other kind of exception."""
    with pytest.raises(SheetError, match=words.replace("(", r"\(")) as found:
        model(text)
    assert found.value.mend


@pytest.mark.parametrize(
    ("text", "near"),
    [
        ("kapa = 2; H = p^2 + kappa*x", "kapa"),
        ("H = p^2 + coss(x)", "cos"),
        ("H = P^2", "p"),
        ("m = 1\nH = p^2\ndiagonalise h", "H"),
    ],
)
def test_suggestions(text, near):
    """A misspelt name is answered with the nearest known one."""
    with pytest.raises(SpectermError) as found:
        model(text)
    assert f"`{near}`" in found.value.mend


def test_long_chains_of_definitions():
    """A chain of 3,000 definitions in the worst order builds; a cycle of 3,000 is told."""
    lines = [f"a{k} = a{k + 1} + 1" for k in range(3000)]
    assert model("\n".join([*lines, "a3000 = 0"])).parameters["a0"] == 3000
    with pytest.raises(SheetError, match="defined by itself"):
        model("\n".join([*lines, "a3000 = a0"]))
