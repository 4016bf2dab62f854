"""The error catalogue: one table of what can be wrong with a sheet, how to mend it, and sheets that show it.

`refuse(id, span, **facts)` makes an error of a row: the facts fill the braces of its two templates. A fact `near` is the
nearest known name, or None; `{near}` becomes "did you mean `...`? " or nothing. In an example the mark `‸` stands right
before the place where the error begins (no mark: the error has no place). The tests loop over all rows.
"""

from __future__ import annotations

from dataclasses import dataclass

from specterm.errors import SheetError, Span
from specterm.units import UNIT_ERRORS

MARK = "‸"
_MAX_FACT = 80


@dataclass(frozen=True, slots=True)
class Row:
    """One kind of error. `stage` says who finds it: "language" (`parse`) or "model" (a sheet made ready)."""

    message: str
    mend: str
    examples: tuple[str, ...]
    stage: str = "language"


def _row(message: str, mend: str, *examples: str) -> Row:
    """Return a row for an error that `parse` finds."""
    return Row(message, mend, examples)


def _model(message: str, mend: str, *examples: str) -> Row:
    """Return a row for an error that is found when a sheet is made ready."""
    return Row(message, mend, examples, "model")


_TEXT = {
    "too-large": _row("the sheet is too large: more than {limit} bytes", "put data into files and read them with `table(...)`"),
    "not-utf8": _row("the sheet is not UTF-8 text: byte {byte} at line {line}, column {column}", "save it as UTF-8"),
    "control-character": _row(
        "the control character {code} has no place in a sheet", "delete it", "H = p^2‸\0\nx in (0, 1)", "# ‸\x1b[31m\nH = p^2"
    ),
    "bad-character": _row("'{found}' has no meaning in a sheet", "delete it, or write what was meant in words", "H = p^2 ‸$ 3"),
    "foreign-digit": _row("'{found}' is not one of the digits 0 to 9", "write numbers with 0 to 9", "H = ‸٣*p^2", "V‸٣ = 1"),
    "logic-sign": _row("'{found}' has no meaning in a sheet", "write `{word}`", "V = x > 0 ‸& x < 1", "V = ‸!x"),
    "prime": _row("a name has no prime", "call it `{name}1`, say", "f‸' = x"),
    "unclosed-quote": _row("the quotation mark is never closed", "close it on the same line", 'V = table(‸"a.csv, 1, 2)'),
    "unclosed-unit": _row("the bracket '[' is never closed", "close it with ']' on the same line", "a = 3 ‸[nm\nH = p^2"),
    "unclosed-bracket": _row(
        "this '(' is never closed", "close it with ')'", "H = p^2/‸(2*m\nx in (0, 1)\nm = 3", "H = ‸(p; x in (0, 1)"
    ),
    "stray-bracket": _row("this ')' closes nothing", "delete it, or open a '(' before it", "H = p^2‸)"),
    "too-deep": _row(
        "the expression is nested too deeply: more than {limit} levels",
        "give parts of it names of their own",
        "H = " + "(" * 200 + "‸(x" + ")" * 201,
    ),
    "too-many-nodes": _row("the expression is too long: more than {limit} terms", "give parts of it names, or use a table"),
    "too-many-statements": _row(
        "the sheet has more than {limit} statements", "put data into files and read them with `table(...)`"
    ),
    "number-too-long": _row("a number of more than {limit} digits", "write fewer digits: 17 are kept", "a = ‸" + "1" * 401),
    "number-too-large": _row("the number is too large to compute with", "the largest is about 1.8e308", "a = ‸1e999"),
    "number-too-small": _row("the number is too small to compute with", "the smallest is about 1e-307", "a = 2*‸1e-999"),
}

_EXPRESSIONS = {
    "expected": _row(
        "expected {wanted}{after}{found}",
        "{how}",
        "H = p^2 +‸",
        "H = 2*‸/x",
        "H =‸",
        "x in (0,‸)",
        "V = (lambda‸: 3)",
        "diagonalise‸",
        "x in‸",
        "x in (0, 1) ‸free",
        "state s ‸x",
        "units: energy‸, length nm",
    ),
    "empty-brackets": _row("there is nothing between the brackets", "put a value there", "V = sin(‸)", "V = 2*(‸)"),
    "missing-operator": _row(
        "expected an operator between '{left}' and '{right}'",
        "write `{factor}` if a product is meant",
        "H = 2‸(x + 1)",
        "H = (x)‸(x)",
    ),
    "missing-operator-call": _row(
        "expected an operator between '{left}' and '{right}'",
        "write `{factor}` for a product, `{left}({right})` for a function",
        "H = p ‸p",
        "V = sin ‸x",
    ),
    "missing-operator-unit": _row(
        "expected an operator between '{left}' and '{right}'",
        "write `{factor}` for a product, `{left} [{right}]` for a unit",
        "H = 2‸x",
        "V = 5 ‸meV",
    ),
    "second-equals": _row(
        "a second '=' in one statement", "to compare, write '=='; else end the first statement", "a = b ‸= 3"
    ),
    "stray-comma": _row(
        "a comma stands only between the arguments of a function",
        "a decimal number has a point; a domain is written `x in (a, b)`",
        "x = (0‸, 1)",
        "a = 3‸,5",
    ),
    "loose-not": _row(
        "`not` binds looser than what stands before it", "put `not ...` in brackets", "V = 1 + ‸not x", "V = -‸not x"
    ),
    "quoted-text": _row(
        "a text in quotation marks is no value", "only `table(...)` and `of` take a file's name", 'V = ‸"a.csv"'
    ),
    "unit-alone": _row(
        "the unit [{unit}] has no number before it", "write the number, then the unit: `1 [{unit}]`", "V = ‸[nm]"
    ),
    "unit-place": _row(
        "the unit [{unit}] does not stand behind a number",
        "a unit belongs to the number before it: `2 [{unit}]`; multiply by `1 [{unit}]` elsewhere",
        "V = x ‸[nm]",
        "V = (1 + 2) ‸[nm]",
    ),
    "table-columns": _row(
        "a table has two columns, or three with an imaginary part, found {count}",
        'write `table("file.csv", 1, 2)`: the column of the coordinate, then that of the values',
        'V = ‸table("a.csv", 1)',
    ),
    "column-number": _row("'{found}' is no number of a column", "columns count 1, 2, 3, ...", 'V = table("a.csv", ‸0, 1)'),
    "empty-path": _row(
        "the name of the file is empty", "write the file's name between the quotation marks", 'V = table(‸"", 1, 2)'
    ),
    "table-option": _row(
        "a table has no option '{found}'",
        "{near}the options are `linear`, `hold` and `extend`",
        'V = table("a.csv", 1, 2, ‸liner)',
    ),
    "table-option-twice": _row(
        "this option repeats or contradicts one before it",
        "keep one of them: `hold` (constant outside the points) or `extend` (the last piece goes on)",
        'V = table("a.csv", hold, ‸extend)',
        'V = table("a.csv", linear, ‸linear)',
    ),
    "foreign-form": _row(
        "`of` stands only behind a level", 'write `level(0) of "other.sheet"`', 'state s = sin(2) ‸of "a.sheet"'
    ),
    "foreign-outside-state": _row(
        "a level of another sheet stands only in a state",
        'write `state NAME = level(0) of "other.sheet"`',
        'V = level(0) ‸of "a.sheet"',
    ),
    "channels": _row("operators with several channels are not available yet", "write one channel", "H = ‸[[T, W], [W, T]]"),
    "not-yet": _row(
        "{what} is not available yet",
        "use a coordinate with a domain `(a, b)` or `ring(a, b)` and walls, free or open ends",
        "n in ‸lattice(0, 9)",
        'H = ‸matrix("a.mtx")',
        "x in (0, inf), ‸outgoing",
    ),
    "no-expression": _row("there is no expression", "write one, for instance `x^2`"),
    "one-expression": _row("more than one expression", "write a single expression"),
}

_STATEMENTS = {
    "empty": _row(
        "the sheet is empty: it defines no operator", "write, for instance, `H = p^2/2 + x^2/2` and `x in (-inf, inf)`"
    ),
    "no-statement": _row(
        "this line is no statement: a statement is `name = expression`, `x in (a, b)` and the like",
        "give the expression a name: `H = ...`",
        "‸p^2 + x",
        "‸(a) = 3",
    ),
    "loose-number": _row(
        "a statement does not begin with a number",
        "the rows of a `layers` block are indented more than its header",
        "layers x: thickness, V\n  1 2\n‸3 4",
    ),
    "double-equals": _row("'==' compares; it defines nothing", "write `{name} = ...`", "H ‸== p^2"),
    "function-definition": _row(
        "`{name}(...) =`: a name stands for its expression and takes no arguments",
        "write `{name} = ...`; the coordinate is known everywhere",
        "‸V(x) = x^2",
    ),
    "unknown-statement": _row(
        "there is no statement '{found}'",
        "{near}statements are `name = ...`, `x in ...`, `units:`, `layers`, `state`, `diagonalise`",
        "‸stat s = x",
        "‸unit: energy meV",
    ),
    "name-with-blank": _row("'{found}': a name has no blank in it", "join the words with '_'", "‸my x in (0, 1)"),
    "units-form": _row(
        "the units are not given as they should be",
        "write `units: energy meV, length nm, mass m_e`",
        "‸units(energy meV)",
        "units: energy meV; ‸length nm",
    ),
    "layers-form": _row(
        "the layers are not given as they should be",
        "write `layers x: thickness, V, m` and indent the rows below it",
        "‸layers: thickness, V",
    ),
    "state-form": _row("a state needs a name", "write `state NAME = ...`", "‸state: x"),
    "reserved-word": _row(
        "`{name}` is a word of the language", "choose another name", "‸inf = 3", "‸and = 2", "state ‸not = 2"
    ),
    "name-twice": _row(
        "`{name}` is defined twice: first in line {line}",
        "keep one of the two, or rename it",
        "a = 1\nb = 2\n‸a = 3",
        "a = 1\nstate ‸a = x",
        "V = 1\nlayers x: thickness, ‸V\n  1 2\n",
    ),
    "domain-twice": _row(
        "the coordinate `{name}` has two domains: the first in line {line}", "keep one of the two", "x in (0, 1)\n‸x in (0, 2)"
    ),
    "layers-twice": _row(
        "the coordinate `{name}` has two `layers` blocks: the first in line {line}",
        "put all columns into one block",
        "layers x: thickness, V\n  1 2\n‸layers x: thickness, m\n  1 2",
    ),
    "units-twice": _row(
        "the units are given twice: first in line {line}",
        "keep one of the two",
        "units: energy eV, length nm, mass m_e\n‸units: energy eV, length nm, mass m_e",
    ),
    "diagonalise-twice": _row(
        "two operators to diagonalise: the first in line {line}", "keep one of the two", "diagonalise H\n‸diagonalise K"
    ),
    "coordinate-defined": _row(
        "`{name}` is the coordinate (line {line}) and cannot be defined", "choose another name", "x in (0, 1)\n‸x = 3"
    ),
    "hbar-with-units": _row(
        "`hbar` follows from the units in line {line}",
        "delete this definition, or the units",
        "units: energy eV, length nm, mass m_e\n‸hbar = 0.3",
    ),
    "unknown-quantity": _row(
        "'{found}' is no quantity that units are given for",
        "{near}the quantities are energy, length, mass and time",
        "units: ‸enrgy eV",
    ),
    "quantity-twice": _row(
        "two units for one quantity, {name}", "keep one of the two", "units: energy eV, length nm, ‸energy meV"
    ),
}

_DOMAINS = {
    "square-domain": _row("a domain stands in round brackets", "write `x in ({inside})`", "x in ‸[0, 1]"),
    "unknown-domain": _row(
        "'{found}' is no domain", "{near}a domain is `(a, b)`, `ring(a, b)` or `layers`", "x in ‸rign(0, 1)"
    ),
    "unknown-option": _row(
        "a domain has no option '{found}'",
        "{near}the options are `free`, `free left`, `free right` and, on a ring, `phase`",
        "x in (0, 1), ‸fre",
    ),
    "option-twice": _row("`{name}` is given twice", "keep one of the two", "x in ring(0, 1), phase 0.1, ‸phase 0.2"),
    "phase-without-ring": _row("only a ring has a phase", "write `x in ring(a, b), phase ...`", "x in (0, 1), ‸phase 0.2"),
    "free-ring": _row(
        "a ring has no ends that could be free", "delete `free`, or write `x in (a, b), free`", "x in ring(0, 1), ‸free"
    ),
    "first-column": _row(
        "the first column of a `layers` block is the thickness, found '{found}'",
        "write `layers x: thickness, ...`",
        "layers x: ‸V, m\n  1 2",
    ),
    "too-many-columns": _row("a `layers` block has at most {limit} columns", "use several coordinates' worth of names fewer"),
    "row-length": _row(
        "the row has {found} cells for {wanted} columns",
        "one value for each column, separated by blanks, and no blank inside a cell",
        "layers x: thickness, V, m\n  5 0 0.1\n  ‸2 10\n",
        "layers x: thickness, V\n  ‸1 + 2 3\n",
    ),
    "no-rows": _row(
        "the `layers` block has no rows", "indent the rows more than the header", "‸layers x: thickness, V\nx in layers"
    ),
}

_MODEL = {
    "unknown-name": _model("`{name}` is not defined", "{near}define it: `{name} = ...`", "x in (0, 1)\nH = p^2/2 + ‸kappa*x^2"),
    "unknown-function": _model(
        "there is no function `{name}`", "{near}for a product write `{name}*(...)`", "x in (0, 1)\nH = p^2 + ‸sinn(x)"
    ),
    "argument-count": _model("`{name}` takes {wanted}, found {found}", "give it {wanted}", "x in (0, 1)\nH = p^2 + ‸sin(x, 2)"),
    "cycle": _model("`{name}` is defined by itself: {path}", "break the circle", "x in (0, 1)\n‸a = b\nb = a\nH = a*p^2"),
    "no-domain": _model(
        "the coordinate has no domain", "say where it lives: `x in (-inf, inf)`, `x in (0, 10)`, ...", "H = p^2/2 + x^2"
    ),
    "several-coordinates": _model(
        "more than one coordinate is not available yet", "keep one domain", "x in (0, 1)\n‸y in (0, 1)\nH = p^2"
    ),
    "no-operator": _model("the sheet defines no operator", "write, for instance, `H = p^2/2 + x^2/2`", "x in (0, 1)\na = 3"),
    "which-operator": _model(
        "several operators and none is called H: {names}", "say which: `diagonalise NAME`", "x in (0, 1)\nA = p^2\nB = p^4"
    ),
    "diagonalise-unknown": _model(
        "`{name}` is not defined", "{near}diagonalise an operator of the sheet", "x in (0, 1)\nH = p^2\ndiagonalise ‸K"
    ),
    "no-layers": _model(
        "there is no `layers` block for `{name}`", "write one: `layers {name}: thickness, V`", "‸x in layers\nH = p^2"
    ),
    "domain-empty": _model(
        "the ends of the domain are equal ({left})", "the right end lies above the left one", "H = p^2\nx in (‸1, 1)"
    ),
    "domain-reversed": _model(
        "the left end of the domain ({left}) lies above the right one ({right})", "swap the two", "H = p^2\nx in (‸1, 0)"
    ),
    "domain-infinite-ring": _model(
        "a ring has finite ends", "write `x in ring(0, 2*pi)`, or `x in (-inf, inf)`", "H = p^2\nx in ring(0, ‸inf)"
    ),
    "not-constant": _model("{what} must be a number, but depends on `{name}`", "use constants here", "H = p^2\nx in (0, ‸x)"),
    "not-real": _model("{what} must be real, but is {value}", "use a real number here", "H = p^2\nx in (0, ‸1 + i)"),
    "not-finite": _model("{what} is not a finite number: {value}", "check what it is computed from", "H = p^2\nx in (0, ‸1/0)"),
    "operator-here": _model(
        "{what} must be a number or a function, but contains a derivative",
        "use functions of the coordinate here",
        "x in (0, 1)\nH = p^2\nV = sin(‸p)",
    ),
    "division-by-operator": _model(
        "an operator cannot be divided by", "multiply by a function, `(1/f)*...`", "x in (0, 1)\nH = 1/‸p"
    ),
    "operator-power": _model(
        "the power of an operator must be one of 0, 1, 2, ..., found {found}", "use a whole number", "x in (0, 1)\nH = p^‸0.5"
    ),
    "order-too-high": _model(
        "the operator has order {found}; the limit is {limit}", "use a lower power of p", "x in (0, 1)\nH = ‸p^18"
    ),
    "too-many-terms": _model("the operator has more than {limit} terms", "use a lower power, or fewer terms in it"),
    "layer-thickness": _model(
        "the thickness of a layer must be above 0, found {found}",
        "delete the row, or make it thicker",
        "layers x: thickness, V\n  ‸0 1\nx in layers\nH = p^2 + V",
    ),
    "state-structure": _model(
        "the state mixes levels and functions",
        "a state is a function, or a sum of levels with factors",
        "x in (0, 1)\nH = p^2\nstate s = ‸level(0)^2",
    ),
    "level-index": _model(
        "a level is numbered 0, 1, 2, ..., found {found}",
        "use a whole number from 0",
        "x in (0, 1)\nH = p^2\nstate s = level(‸0.5)",
    ),
    "level-outside-state": _model(
        "a level stands only in a state",
        "write `state NAME = level(0)`",
        "x in (0, 1)\nH = p^2 + ‸level(0)",
        "x in (0, 1)\nV = ‸level(0)\nH = p^2",
    ),
    "infinity-place": _model(
        "`inf` can only be an end of the domain",
        "use a number here",
        "x in (0, 1)\nH = p^2 + ‸inf",
        "x in (0, 2*‸inf)\nH = p^2",
    ),
    "state-as-value": _model(
        "`{name}` is a state and stands for no value",
        "write its expression again",
        "x in (0, 1)\nH = p^2\nstate a = x\nstate b = ‸a + 1",
    ),
    "layers-coordinate": _model(
        "the layers belong to `{name}`, but the coordinate is `{coordinate}`",
        "write `layers {coordinate}: ...`",
        "‸layers y: thickness, V\n  1 2\nx in (0, 1)\nH = p^2",
    ),
    "not-positive": _model(
        "{what} must be above 0, but is {value}", "use a positive number", "hbar = ‸-1\nx in (0, 1)\nH = p^2"
    ),
    "free-open": _model(
        "an infinite end cannot be free", "say which end is: `free left` or `free right`", "H = p^2\n‸x in (-inf, inf), free"
    ),
    "not-plain": _row("`{name}` is not written as a plain number", "{near}plain numbers are definitions like a = 3 [nm]"),
    "set-unknown": _model("there is no `{name}` to set in the sheet", "{near}set a name the sheet defines"),
    "state-not-normalisable": _model(
        "the state `{name}` cannot be normalised: {reason}", "let it fall off towards the open ends of the domain"
    ),
    "file-missing": _model("there is no file {path}", "the path starts at the sheet's folder"),
    "file-unreadable": _model("the file {path} cannot be read: {reason}", "check the path and its permissions"),
    "file-too-large": _model("the file {path} is too large: {found}, the limit is {limit}", "thin the data out"),
    "file-special": _model("{path} is not a regular file", "name a text file"),
    "table-cell": _model(
        "{path}, line {line}, column {column}: '{found}' is no finite number",
        "correct the cell (decimals as in 29.5), or delete the line",
    ),
    "table-cells": _model(
        "{path}, line {line} has {found} cells, but {wanted}", "write decimals with a point, or take the rest out"
    ),
    "table-quotes": _model("{path}, line {line}: a quotation mark does not enclose a cell", "close it, or take it out"),
    "table-column-unknown": _model("{path} has no column {name}", "{near}the columns are {names}"),
    "table-conflict": _model("{path}: lines {first} and {second} give two values at {place}", "keep one of the two"),
    "table-too-short": _model("{path} has {found} points", "a table needs at least two points"),
    "table-steep": _model(
        "{path}: the points near {place} cannot be joined in double precision", "take some out, or scale the columns"
    ),
    "table-outside": _model(
        "the table covers {left} to {right}, the domain is {domain}", "say `hold` or `extend`, or narrow the domain"
    ),
    "unit-mismatch": _model(
        "`{left}` is {left_kind}, but `{right}` is {right_kind}",
        "a factor is missing or one too many: the second is the first times {factor}",
        "units: energy eV, length nm, mass m_e\nx in (0 [nm], 1 [nm])\nH = p^2/(2*m_e) + ‸3 [nm]",
        "units: energy meV, length nm, mass m_e\nx in (0, 9)\nH = p^2/(2*m_e) + ‸F*x\nF = 20 [kV/cm]",
    ),
    "unit-mismatch-kelvin": _model(
        "`{left}` is {left_kind}, but `{right}` is {right_kind}",
        "a number in [K] counts as an energy: give a temperature that k_B multiplies without a unit",
        "units: energy meV, length nm, mass m_e\nx in (0, 9)\nH = p^2/(2*m_e) + ‸k_B*T\nT = 300 [K]",
    ),
    "unit-argument": _model(
        "`{name}` takes a plain number, but `{argument}` is {kind}",
        "divide it by {kind}",
        "units: energy eV, length nm, mass m_e\nx in (0, 1)\nH = p^2/(2*m_e) + sin(‸3 [nm])",
    ),
}
_MODEL.update({key: Row(message, mend, examples, "model") for key, (message, mend, examples) in UNIT_ERRORS.items()})

ROWS: dict[str, Row] = {**_TEXT, **_EXPRESSIONS, **_STATEMENTS, **_DOMAINS, **_MODEL}


def refuse(key: str, span: Span | None, **facts: object) -> SheetError:
    """Return the error of row `key`, to be raised: the facts fill its templates; long ones are cut short."""
    row = ROWS[key]
    near = facts.pop("near", None)
    shown = {name: _short(fact) for name, fact in facts.items()}
    shown["near"] = f"did you mean `{near}`? Otherwise: " if near else ""
    return SheetError(row.message.format(**shown), mend=row.mend.format(**shown), span=span)


def _short(fact: object) -> str:
    """Return a fact as text, cut where it is long."""
    text = str(fact).replace("\n", " ")
    return text if len(text) <= _MAX_FACT else text[: _MAX_FACT - 3] + "..."
