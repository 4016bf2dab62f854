"""Read the few kinds of sheet used here: constants, functions, layers, and H = p..p + V as the pair K(x), V(x)."""

from __future__ import annotations

import re

import numpy as np
import series
from mpmath import mp, mpf

FLOAT_NAMES = {
    "exp": np.exp,
    "sin": np.sin,
    "cos": np.cos,
    "cosh": np.cosh,
    "sinh": np.sinh,
    "tanh": np.tanh,
    "sqrt": np.sqrt,
    "log": np.log,
    "ln": np.log,
    "where": series.where,
    "step": lambda x: float(middle_of(x) > 0),
    "abs": np.abs,
    "pi": np.pi,
    "inf": np.inf,
    "sech": lambda x: 1 / np.cosh(x),
}
with mp.workdps(60):
    HBAR = mpf("6.62607015e-34") / (2 * mp.pi)
    # energy, length, mass: SI factors (CODATA 2022 masses; e and h are exact)
    SYSTEMS = {
        "energy meV, length nm, mass m_e": ("1.602176634e-22", "1e-9", "9.1093837139e-31"),
        "energy eV, length nm, mass m_e": ("1.602176634e-19", "1e-9", "9.1093837139e-31"),
        "energy cm^-1, length angstrom, mass u": (mpf("6.62607015e-34") * 29979245800, "1e-10", "1.66053906892e-27"),
    }


class Nodes(np.ndarray):
    """Values at the nodes of one element; comparisons are decided at the middle node, as an element never straddles an edge."""

    def middle(self):
        """Value at the middle node."""
        return float(self[len(self) // 2])

    def __lt__(self, other):
        return self.middle() < middle_of(other)

    def __gt__(self, other):
        return self.middle() > middle_of(other)


def middle_of(value):
    """Value at the middle of an element, of a number or of nodes."""
    return value.middle() if isinstance(value, Nodes) else value


class Kinetic:
    """The operator p K p / hbar^2 + V while H is put together; K and V are numbers, arrays or series."""

    __array_ufunc__ = None

    def __init__(self, K, V=0):
        self.K, self.V = K, V

    def __add__(self, other):
        if isinstance(other, Kinetic):
            return Kinetic(self.K + other.K, self.V + other.V)
        return Kinetic(self.K, self.V + other)

    __radd__ = __add__

    def __sub__(self, other):
        return self + -1 * other

    def __rsub__(self, other):
        return -self + other

    def __neg__(self):
        return Kinetic(-self.K, -self.V)

    def __mul__(self, number):
        return Kinetic(self.K * number, self.V * number)

    __rmul__ = __mul__

    def __truediv__(self, number):
        return Kinetic(self.K / number, self.V / number)


class Momentum:
    """p (square = hbar^2) or D (square = -1) times a function, waiting for its second factor."""

    __array_ufunc__ = None

    def __init__(self, square, factor=1):
        self.square, self.factor = square, factor

    def __mul__(self, other):
        if isinstance(other, Momentum):
            return Kinetic(self.square * self.factor)
        return Momentum(self.square, self.factor * other)

    __rmul__ = __mul__

    def __neg__(self):
        return Momentum(self.square, -self.factor)

    def __pow__(self, power):
        return self * self if power == 2 else NotImplemented


class Sheet:
    """The statements of a sheet's text; `at(x)` gives K and V (hbar inside) at a series or at an array of floats."""

    def __init__(self, text):
        self.defined, self.columns, self.edges = {}, {}, []
        self.coordinate, self.domain, self.system = "x", "", None
        lines = [part.rstrip() for line in text.splitlines() for part in line.split("#")[0].split(";")]
        rows = None
        for line in lines:
            if rows is not None and line.startswith("  ") and line.strip():
                rows.append(line.split())
                continue
            statement = line.strip()
            if match := re.match(r"layers (\w+)(?: from ([-\d.]+))?: (.*)", statement):
                rows = []
                self.layers = (rows, mpf(match[2] or 0), [c.split("[")[0].strip() for c in match[3].split(",")])
            elif statement.startswith("units:"):
                self.system = statement[6:].strip()
            elif match := re.match(r"(\w+) in (.*)", statement):
                self.coordinate, self.domain = match[1], match[2]
            elif match := re.match(r"(\w+) = (.*)", statement):
                self.defined[match[1]] = match[2]
        if rows:
            self._lay(*self.layers)

    def _lay(self, rows, start, columns):
        self.edges = [start]
        for row in rows:
            self.edges.append(self.edges[-1] + self.number(row[0]))
        for k, name in enumerate(columns[1:], 1):
            self.columns[name] = [self.number(row[k]) for row in rows]

    def number(self, text):
        """Value of a constant expression, as mpf."""
        return self._value(text, None, mpf)

    def at(self, x, kind):
        """Return (K, V) at x; kind is mpf (x a Series) or float (x an array of nodes of one element)."""
        H = self._value(self.defined["H"], x, kind)
        return (H.K, H.V)

    def _value(self, text, x, kind):
        source = re.sub(r"(?<![\w.])(\d+\.?\d*(?:[eE][-+]?\d+)?|\.\d+)", r"number('\1')", text.replace("^", "**"))
        source = source.replace("[kV/cm]", "*number('0.1')")
        names = _Names(self, x, kind)
        return eval(source, {"__builtins__": {}}, names)


class _Names(dict):
    """Names of a sheet, worked out when asked for."""

    def __init__(self, sheet, x, kind):
        super().__init__(series.NAMES if kind is mpf else FLOAT_NAMES)
        self.sheet, self.x, self.kind = sheet, x, kind
        self["number"] = kind
        if x is not None:
            self[sheet.coordinate] = x
        if sheet.system:
            energy, length, mass = (mpf(v) for v in SYSTEMS[sheet.system])
            self["hbar"] = kind(HBAR / (length * mp.sqrt(mass * energy)))
            self["m_e"] = self["e"] = kind(1)
        for name in sheet.defined:
            self.pop(name, None)

    def __missing__(self, name):
        sheet = self.sheet
        if name in sheet.columns:
            return self.kind(sheet.columns[name][self._layer()])
        if name in sheet.defined:
            return sheet._value(sheet.defined[name], self.x, self.kind)
        if name == "p":
            return Momentum(self["hbar"] ** 2)
        if name == "D":
            return Momentum(self.kind(-1))
        if name == "hbar":
            return self.kind(1)
        raise KeyError(name)

    def _layer(self):
        middle = self.x.middle()
        inside = [k for k, edge in enumerate(self.sheet.edges[1:-1], 1) if middle > edge]
        return inside[-1] if inside else 0
