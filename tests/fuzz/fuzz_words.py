"""Hostile pieces: numbers, names, characters, expressions and paths that have broken programs before."""

from __future__ import annotations

from random import Random

NUMBERS = (
    "9^9^9^9", "9^9^9^9^9^9", "1e999999999", "1e308", "1e-308", "5e-324", "1e-400", "0", "-0", "1/0", "0/0", "inf", "-inf",
    "nan",
    "1e400", "2^1023*2", "0x10", "1_000", "1e", "1.2.3", ".5e5", "1e+", "07", "2^0.5^2^9", "-1", "1e16", "9007199254740993",
    "i",
    "(-1)^0.5", "1e300*1e300", "3.7", "1", "2", "0.5", "1e-9", "1e9", "10^-300", "1e154", "1e155", "gamma(171.7)", "10^400",
    "65",
    "2^-1074", "1e-30", "1e30", "pi", "hbar", "gamma(-1)", "exp(1000)", "log(0)", "exp(i*pi)",
)  # fmt: skip
CHARACTERS = (
    "\x00", "\x07", "\x08", "\x0b", "\x0c", "\r", "\x1b", "\x1b[2J", "\x1b]0;x\x07", "\x7f", "\x80", "\x85", "\x9b", "\x9b31m",
    "\x9f", "\xa0", "\xad", "\u061c", "\u180e", "\u200b", "\u200d", "\u200e", "\u200f", "\u2028", "\u2029", "\u202a", "\u202e",
    "\u2060", "\u2066", "\u2069", "\ufeff", "\ufff9", "\ufffd", "\uffff", "\U000e0001", "\U0010ffff", "\ud800", "\u0301",
    "é", "π",
    "ħ", "²", "⁻¹", "∞", "∈", "−", "·", "×", "≤", "٣", "Ⅷ", "ﬀ", "K", "Å", "µ", "º", "ª", "一", "\u3164", "𝐱", "🙂", "\t",
    "\n", ";",
    "#",
    '"', "'", "[", "]", "(", ")", "{", "}", "\\", "$", "`", "%", "&", "|", "~", "@", "!", "?", ":", ",", "=", "==", "\u0345",
)  # fmt: skip
NAMES = (
    "x", "p", "D", "H", "V", "m", "i", "e", "hbar", "pi", "inf", "E_h", "level", "table", "matrix", "state", "layers",
    "units", "in",
    "of", "and", "not", "or", "__import__", "eval", "exec", "os", "open", "lambda", "class", "None", "__class__", "self",
    "ring",
    "lattice", "phase", "free", "diagonalise", "thickness", "nan", "k_B", "u", "c", "px", "Dx", "_", "a" * 300, "é", "ψ",
    "λ_1", "x1",
)  # fmt: skip
FUNCTIONS = (
    "sin", "cos", "tan", "exp", "log", "sqrt", "abs", "sign", "step", "erf", "gamma", "sinh", "cosh", "tanh", "asin", "acos",
    "atan",
    "sec", "csc", "cot", "sech", "csch", "coth", "arcsinh", "acosh", "arctanh", "ln", "floor", "ceil", "airyai", "airybi",
    "re", "im",
    "conj", "arg", "erfc", "lgamma", "log10", "log2", "log1p", "expm1", "cbrt", "acot", "asec", "digamma", "airyaiprime",
)  # fmt: skip
PAIRED = ("min", "max", "mod", "atan2", "hypot", "besselj", "bessely", "besseli", "besselk", "polygamma")
STRANGE = (
    "dagger", "commutator", "level", "nosuch", "eval", "__import__", "where", "table", "matrix", "lattice", "round", "x", "p",
)  # fmt: skip
UNITS = (
    "meV", "nm", "m_e", "cm^-1", "1/cm", "GHz", "kV/cm", "K", "u", "angstrom", "eV", "pm", "s", "fs", "", "???", "m^999999999",
    "m^9^9^9", "1e400 m", "QQm", "m*m*m*m", "kg m^2/s^2", "meV\u202e", "%", "m" * 5000, "1/0", "0", "m^0.5", "hartree",
    "mm_e", "T",
    "m/" * 3000 + "m",
)  # fmt: skip
PATHS = (
    "good.csv", "other.sheet", "loop_a.sheet", "loop_b.sheet", "self.sheet", "fifo", "zero", "directory", "circle",
    "missing.csv",
    "/dev/zero", "/dev/stdin", "/dev/tty", "/dev/random", "/proc/self/environ", "/proc/self/mem", "/proc/kmsg",
    "/proc/1/environ",
    "/proc/self/fd/0", "../../../../etc/passwd", "/etc/passwd", "/", ".", "", " ", "~", "$HOME", "huge.csv", "a" * 300,
    "a/" * 3000,
    "binary.csv", "http://localhost/x.csv", "file:///etc/passwd", "good.csv/", "deep/../good.csv", "-", "|ls", "ham.mtx",
    "x\ty",
)  # fmt: skip


EXPONENTS = (-300, -150, -30, -9, -3, 0, 1, 2, 3, 6, 9, 15, 16, 30, 150, 300)


def hostile_number(random: Random) -> str:
    """Return a number that is large, long, undefined or merely odd."""
    roll = random.random()
    if roll < 0.02:
        return random.choice("0123456789") * random.choice((399, 401, 5000, 100_000))
    if roll < 0.04:
        return "^".join(["9"] * random.choice((3, 50, 199, 300)))
    if roll < 0.06:
        return f"{random.random()}e{random.choice('+-')}{random.randrange(10**random.randrange(1, 12))}"
    if roll < 0.4:
        return f"{random.choice((1, 2, 5, 7.3))}e{random.choice(EXPONENTS)}"
    return random.choice(NUMBERS)
