"""Sheets made by a grammar: mostly what a user might write, with a hostile piece here and there."""

from __future__ import annotations

from random import Random

from fuzz_words import CHARACTERS, FUNCTIONS, NAMES, PAIRED, PATHS, STRANGE, UNITS, hostile_number

WELLS = (
    "x^2", "x^4 - 3*x^2", "-2/cosh(x)^2", "abs(x)", "5*cos(x)", "-1/x", "1/x^2", "exp(-x)", "(x > 1)*3",
    "where(x < 0, 2, x)", "-x^4",
    "step(x)*x", "0", "max(x, 2, -x)", "min(x^2, 4)", "erf(x)", "x^2*(1 + 0.1*x)", "-exp(-x^2)", "log(x)", "sqrt(x)",
    "1/(x-0.3)",
    "gamma(x)", "tan(x)", "x^-0.5", "x^x", "x^x^x", "sin(1/x)", "floor(x)", "mod(x, 0.1)", "x*exp(x)", "sin(1e6*x)",
    "abs(sin(50*x))",
)  # fmt: skip
KINETIC = (
    "p^2", "p^2/2", "p^2/(2*m)", "p*(1/(2*m))*p", "p*(1+x^2)*p", "(p - 0.3)^2", "p^4", "p", "-D^2", "D^2", "x*p + p*x",
    "p^6 + p^2",
    "p*abs(x)*p", "(p - x)^2", "p^2*x", "i*p", "p^16", "p^17", "(p + x)^8", "dagger(p)*p", "commutator(x^3, p^3)", "p*m*p",
    "sqrt(p)",
    "p*(1/x)*p", "p*exp(-x)*p", "p*x*p", "2^p", "p^-1", "sin(p)", "p*(x > 0)*p + p^2", "cos(x)*p^2*cos(x)", "(p*x*p)^4",
    "(p^2 + x)^8",
)  # fmt: skip
ENDS = ("-inf", "inf", "0", "1", "-1", "5", "-8", "8", "2*pi", "1e9", "-1e9", "1e-9", "a", "b", "1e308", "-1e308", "nan")


class Sheets:
    """Makes sheets from one stream of random numbers; `twist` is the share of pieces that are hostile."""

    def __init__(self, random: Random) -> None:
        """Take the stream; each sheet is more or less hostile."""
        self.random = random
        self.twist = random.choice((0.0, 0.0, 0.01, 0.05, 0.3))
        self.free = ["A", "B", "q", "w", "f", "g", "packet"]

    def sheet(self) -> str:
        """Return the text of a sheet."""
        random = self.random
        lines = [self._units()] if random.random() < 0.15 else []
        lines += [f"H = {self._kinetic()} + {self._potential()}", self._domain()]
        taken = {"V"} if random.random() < 0.15 else set()
        if taken:
            lines.append(f"V = {self._table()}")
        elif random.random() < 0.25:
            columns = random.choice((("V",), ("V", "m"), ("W",)) if not self._odd() else (("V", "V"), ("x",)))
            taken = set(columns)
            lines.append(self._layers(columns))
        lines += [f"{name} = {self._number()}" for name in ("m", "a", "b", "k") if name not in taken and not self._odd()]
        lines += [f"{self._name()} = {self.expression(3)}" for _ in range(random.choice((0, 0, 1, 3)))]
        if random.random() < 0.4:
            lines.append(f"state {self._name()} = {self._state()}")
        if random.random() < 0.05:
            lines.append(f"diagonalise {self._name()}")
        if random.random() < 0.3:
            random.shuffle(lines)
        text = random.choice(("\n", "\n", "\n", "; ", "\r\n")).join(lines)
        return self._spoiled(text) if random.random() < self.twist else text

    def _odd(self) -> bool:
        return self.random.random() < self.twist

    def _spoiled(self, text: str) -> str:
        """Return the text with characters put in anywhere."""
        for _ in range(self.random.choice((1, 1, 3))):
            at = self.random.randrange(len(text) + 1)
            text = text[:at] + self.random.choice(CHARACTERS) + text[at:]
        return text

    def _number(self) -> str:
        return hostile_number(self.random) if self._odd() else f"{self.random.choice((0.3, 1, 2, 7.5, -1, 1e-3, 40)):g}"

    def _name(self) -> str:
        if self._odd() or not self.free:
            return self.random.choice(NAMES)
        return self.free.pop(self.random.randrange(len(self.free)))

    def _kinetic(self) -> str:
        if self._odd():
            return self.expression(2)
        return self.random.choice(KINETIC if self.random.random() < 0.4 else KINETIC[:4])

    def _potential(self) -> str:
        random = self.random
        if self._odd():
            return self.expression(4)
        if random.random() < 0.7:
            return random.choice(WELLS)
        return f"{self._number()}*{random.choice(WELLS)} + {random.choice(WELLS)}"

    def expression(self, depth: int) -> str:  # noqa: PLR0911 - one return for each form
        """Return an expression of at most this depth."""
        random = self.random
        roll = random.random()
        if depth == 0 or roll < 0.2:
            return random.choice(NAMES) if self._odd() else random.choice(("x", "x", "k", "a", self._number()))
        left, right = self.expression(depth - 1), self.expression(depth - 1)
        if roll < 0.55:
            return f"({left} {random.choice(('+', '-', '*', '*', '/', '^', '<', '==', 'and', 'or', '**'))} {right})"
        if self._odd():
            return f"{random.choice(STRANGE + PAIRED)}({', '.join([left, right, left][: random.choice((1, 2, 3))])})"
        if roll < 0.75:
            return f"{random.choice(FUNCTIONS)}({left})"
        if roll < 0.83:
            return f"{random.choice(PAIRED)}({random.choice((left, self._number(), '2'))}, {right})"
        if roll < 0.87 and self._odd():
            return f"{left} [{random.choice(UNITS)}]"
        forms = (f"-{left}", f"not ({left})", f"({left})^2", f"0 < {left} < {right}", f"where({left}, {right}, x)")
        return random.choice(forms)

    def _domain(self) -> str:
        random = self.random
        name = self._name() if self._odd() else "x"
        if self._odd():
            return f"{name} in ({self.expression(1)}, {self._number()})"
        plain = ("(-inf, inf)", "(-8, 8)", "(0, inf)", "(0, 1)", "ring(0, 2*pi)", "ring(0, 2*pi), phase 0.3", "(-5, 5), free")
        if random.random() < 0.9:
            return f"{name} in {random.choice(plain)}"
        shape = random.choice(("", "ring", "lattice", "layers", "disc"))
        tail = random.choice(("", "", ", free left", ", phase k", ", outgoing", ", free, free", ", phase 9^9^9"))
        return f"{name} in {shape}({random.choice(ENDS)}, {random.choice(ENDS)}){tail}"

    def _layers(self, names: tuple[str, ...]) -> str:
        random = self.random
        rows = [
            "    "
            + "   ".join([self._number().replace(" ", "").lstrip("-")] + [self._number().replace(" ", "") for _ in names])
            for _ in range(random.choice((1, 3, 5, 40)))
        ]
        start = f" from {self._number()}" if random.random() < 0.3 else ""
        return f"layers x{start}: thickness, {', '.join(names)}\n" + "\n".join(rows)

    def _table(self) -> str:
        random = self.random
        path = random.choice(PATHS) if self._odd() or random.random() < 0.1 else "good.csv"
        columns = random.choice(
            ("", "", ", 1, 2", ', "x", "V"', ', "x" [nm], "V" [meV]', ", 1, 99", ", 0, 1", ', "x"', ", 1, 2, 3")
        )
        return f'table("{path}"{columns}{random.choice(("", ", hold", ", extend", ", linear", ", hold, extend"))})'

    def _state(self) -> str:
        random = self.random
        if self._odd():
            return self.expression(3)
        number = random.choice(("0", "1", "3", "k", "-1", "1e9", "0.5", "10^7"))
        foreign = f'level({number}) of "{random.choice(PATHS)}"'
        return random.choice(
            (
                "exp(-x^2)", "exp(-(x-1)^2 + i*x)", "level(0) + i*level(1)", "1", f"level({number})", foreign, f"x*{foreign}",
                "0*x", "H*x",
            )
        )

    def _units(self) -> str:
        random = self.random
        if not self._odd():
            return "units: energy meV, length nm, mass m_e"
        quantities = ("energy", "length", "mass", "time", "heat")
        pairs = [f"{random.choice(quantities)} {random.choice(UNITS)}" for _ in range(random.choice((1, 3)))]
        return "units: " + ", ".join(pairs)


def giant(random: Random) -> str:
    """Return a sheet that is large or deep in one way."""
    n = random.choice((100, 1000, 10_000))
    deep = random.choice((50, 199, 201, 5000))
    tail = "\nx in (-1, 1)"
    shapes = (
        lambda: "\n".join(f"a{k} = a{k + 1} + 1" for k in range(n)) + f"\na{n} = 1\nH = p^2 + a0*x^2" + tail,
        lambda: "\n".join(f"a{k} = a{k - 1} + 1" for k in range(1, n)) + "\na0 = 1\nH = p^2 + a1*x^2" + tail,
        lambda: "\n".join(f"a{k} = a{(k + 1) % n}" for k in range(n)) + "\nH = p^2 + a0" + tail,
        lambda: "\n".join(f"f{k} = f{k - 1}*f{k - 1} + x" for k in range(1, 60)) + "\nf0 = x\nH = p^2 + f59" + tail,
        lambda: "\n".join(f"f{k} = sin(f{k - 1})*f{k - 1}" for k in range(1, n // 10))
        + f"\nf0 = x\nH = p^2 + f{n // 10 - 1}" + tail,
        lambda: "\n".join(f"A{k} = A{k - 1}*A{k - 1}" for k in range(1, 30)) + "\nA0 = p\nH = A29" + tail,
        lambda: "\n".join(f"A{k} = A{k - 1}*B + B*A{k - 1}" for k in range(1, 30)) + "\nA0 = p\nB = x^2\nH = A29" + tail,
        lambda: f"H = p^2 + {'x + ' * n}x" + tail,
        lambda: f"H = p^2 + {'*'.join(['(1 + x)'] * (n // 10))}" + tail,
        lambda: f"H = p^2 + {' + '.join(f'{k}*x^{k}' for k in range(n // 3))}" + tail,
        lambda: f"H = p^2 + {' + '.join(f'sin({k}*x)' for k in range(n // 3))}" + tail,
        lambda: f"H = p^2 + {' + '.join(f'abs(x - {k}/{n})' for k in range(n // 5))}" + tail,
        lambda: f"H = p^2 + {'sin(' * deep}x{')' * deep}" + tail,
        lambda: f"H = p^2 + {'(' * deep}x{')' * deep}" + tail,
        lambda: f"H = p^2 + {'x^' * deep}2" + tail,
        lambda: f"H = p^2 + {'-' * deep}x" + tail,
        lambda: f"H = {' + '.join(f'p*x^{k}*p' for k in range(n // 10))}" + tail,
        lambda: f"H = ({' + '.join(f'x^{k}*p' for k in range(9))})^{random.choice((2, 3, 4, 8))}" + tail,
        lambda: f"H = p^2 + {'b' * (10 * n)}\n{'b' * (10 * n)} = x^2" + tail,
        lambda: f"H = p^2 + {'b' * (10 * n)}" + tail,
        lambda: "layers x: thickness, V\n" + "    0.1  1\n    0.2  2\n" * n + "H = p^2 + V\nx in layers",
        lambda: "layers x: thickness, V\n" + "".join(f"    0.{k % 9 + 1}  sin({k})\n" for k in range(n))
        + "H = p^2 + V\nx in layers",
        lambda: f"layers x: thickness, {', '.join(f'V{k}' for k in range(min(n, 120)))}\n  1 2\nH = p^2\nx in layers",
        lambda: "H = p^2 + x^2" + tail + "\n" + "\n".join(f"state s{k} = level({k})" for k in range(n)),
        lambda: "H = p^2 + x^2" + tail + f"\nstate s = {' + '.join(f'level({k})' for k in range(n))}",
        lambda: f"H = p^2 + x^{random.choice((63, 64, 65, 1000, 10**9))}*(x > 0)" + tail,
        lambda: f"H = p^2 + {'where(x > 0.1, x, ' * deep}0{')' * deep}" + tail,
        lambda: "H = p^2 + gamma(x)^gamma(x)^gamma(x)" + tail,
        lambda: "\n" * (100 * n) + "H = p^2" + tail,
        lambda: "H = p^2 + x^2" + tail + "#" * (100 * n),
        lambda: f"H = p^2 + x^2\nx in ({'1 + ' * n}0, {n + 2})",
        lambda: f"units: energy {'m*' * n}eV, length nm, mass m_e\nH = p^2" + tail,
        lambda: f"H = p^2 + 3 [{'m*' * n}m]" + tail,
        lambda: f"H = p^2 + max({', '.join(f'x - {k}' for k in range(n // 3))})" + tail,
        lambda: f"H = p^2 + {' < '.join(['x'] * n)}" + tail,
        lambda: f"H = {'dagger(' * min(deep, 199)}p^2 + x{')' * min(deep, 199)}" + tail,
        lambda: f"H = {'commutator(p, ' * min(deep, 199)}x^9{')' * min(deep, 199)}" + tail,
    )  # fmt: skip
    return random.choice(shapes)()
