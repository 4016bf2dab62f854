"""Power-law and polynomial potentials, close pairs, high indices, even-order operators in momentum."""

from __future__ import annotations

from functools import partial

import numpy as np
import shooting
from making import make, mirrored, polish, shot
from mpmath import mp, mpf
from series import Series
from sheets import Sheet

SRC = "Taylor steps (mpmath) on two meshes and cuts; second method Legendre elements"
FAM = "anharmonic"


def powers():
    """Single powers of |x|, low and high levels."""
    out = []
    for name, text, cut, steps, indices in (
        ("x4-200", "H = p^2 + x^4", 11, 260, [0, 1, 49, 50, 100, 199, 200]),
        ("x6-100", "H = p^2/2 + x^6", 5.2, 160, [0, 1, 2, 50, 99, 100]),
        ("x8-50", "H = p^2/2 + 0.5*x^8", 3.4, 90, [0, 1, 2, 3, 25, 50]),
        ("x2x4-100", "H = (p^2 + x^2)/2 + 0.1*x^4", 12, 150, [0, 1, 2, 50, 100]),
        ("x4-weak", "H = (p^2 + x^2)/2 + 2e-5*x^4", 24, 120, [0, 1, 5, 40]),
        ("x4-strong", "H = p^2 + x^2 + 1e6*x^4", 0.7, 40, [0, 1, 2, 3, 12]),
        ("x10", "H = p^2 + x^10/10", 4, 60, [0, 1, 2, 3, 20]),
    ):
        out.append(halves(name, text + "\nx in (-inf, inf)\n", cut, steps, indices))
    out.append(
        halves(
            "abs3-far",
            "g = 0.31\nH = p^2/(2*1.4) + g*abs(x - 1234.5)^3\nx in (-inf, inf)\n",
            8,
            60,
            [0, 1, 2, 3, 10],
            centre="1234.5",
        )
    )
    out.append(halves("abs-plus-square", "H = p^2/2 + 1.3*abs(x) + 0.2*x^2\nx in (-inf, inf)\n", 13, 60, [0, 1, 2, 3, 14]))
    out.append(halves("x4-half", "H = p^2 + x^4; x in (0, inf)\n", 6, 60, [0, 1, 2, 3, 20], kinds=("wall",)))
    out.append(halves("x5-half", "H = p^2 + x^5; x in (0, inf)\n", 6, 90, [0, 1, 2, 24], kinds=("wall",)))
    out.append(halves("x3-half-free", "H = p^2 + x^3; x in (0, inf), free\n", 9, 60, [0, 1, 2, 24], kinds=("free",)))
    out.append(root_potential())
    return out


def halves(name, sheet, cut, steps, indices, centre="0", kinds=("free", "wall")):
    """Levels of an even potential from half the line (or of a half line, with one kind of end)."""
    values, digits = {}, 24
    c = mpf(centre)
    for odd, left in enumerate(kinds):
        mine = {n // len(kinds): n for n in indices if n % len(kinds) == odd}
        meshes = [
            shooting.mesh(Sheet(sheet), [(c, c + mpf(cut) * f, int(steps * g))], left, "wall") for f, g in ((1, 1), (1.12, 1.5))
        ]
        found = shooting.elements(meshes[0], max(mine) + 1, 0.0)
        part, figures = polish(meshes, {k: found[k] for k in mine}, found[0])
        for k, v in part.items():
            if abs(found[k] / float(v) - 1) > 1e-9:
                raise ArithmeticError(f"{name}: {k} {v} {found[k]}")
        values.update({mine[k]: v for k, v in part.items()})
        digits = min(digits, figures)
    return make(name, FAM, sheet, values, SRC + "; parity by halves", values[0], digits=digits)


def squared(t):
    """Coefficients of p^2/2 + sqrt x in t, x = t^2: f' = 4 t flux, flux' = 2 t (t - E) f."""
    return 4 * t, 2 * t * t, 2 * t


def root_potential():
    """|x|^(1/2), by Taylor steps in t = sqrt x."""
    sheet = "H = p^2/2 + abs(x)^(1/2)\nx in (-inf, inf)\n"

    def half(left, count, cut):
        h = mpf(cut) / count
        steps = [shooting.Step(k * h, h, False, partial(squared, Series([k * h, h]))) for k in range(count)]
        return shooting.Mesh(None, steps, count // 3, left, "wall")

    values, digits = {}, 24
    plain = Sheet(sheet.replace("1/2)", "0.5)"))
    for odd, left in enumerate(("free", "wall")):
        found = shooting.elements(
            shooting.mesh(plain, [(0, "1e-5", 1), ("1e-5", "0.5", 25, "log"), ("0.5", 140, 120)], left, "wall"), 6, 0.0
        )
        part, figures = polish([half(left, 150, 12), half(left, 220, "13.4")], dict(enumerate(found)), found[0])
        for k, v in part.items():
            if abs(found[k] / float(v) - 1) > 1e-8:
                raise ArithmeticError(f"root: {k} {v} {found[k]}")
        values.update({2 * k + odd: v for k, v in part.items()})
        digits = min(digits, figures)
    return make(
        "root-x",
        FAM,
        sheet,
        values,
        "Taylor steps (mpmath) in t with x = t^2; second method Legendre elements",
        values[0],
        digits=digits,
    )


def doubles():
    """Quartic double wells with splittings from 1e-2 to 1e-14 of the level, and skewed ones."""
    out = []
    for name, a, centre in (
        ("dwq-1.5", "1.5", "0"),
        ("dwq-1.97", "1.97", "1234.5"),
        ("dwq-2.25", "2.25", "0"),
        ("dwq-2.5", "2.5", "0"),
        ("dwq-2.71", "2.71", "0"),
        ("dwq-2.9", "2.9", "0"),
    ):
        x = "x" if centre == "0" else f"(x - {centre})"
        sheet = f"a = {a}\nH = p^2/2 + ({x}^2 - a^2)^2\nx in (-inf, inf)\n"
        c = mpf(centre)
        out.append(
            mirrored(name, "symmetric double well", sheet, 3, SRC + "; parity by halves", [(c, c + mpf("6.2"), 90)], 0.0, 0)
        )
    sheet = "H = p^2 + x^4 - 25*x^2\nx in (-inf, inf)\n"
    out.append(mirrored("dwq-25", "symmetric double well", sheet, 6, SRC + "; parity by halves", [(0, 9, 140)], -160.0, None))
    sheet = "hbar = 0.11\nH = p^2/2 + (x^2 - 1)^2*(x^2 + 0.4)\nx in (-inf, inf)\n"
    out.append(mirrored("dw-sextic", "symmetric double well", sheet, 4, SRC + "; parity by halves", [(0, "2.6", 90)], 0.0, 0))
    sheet = "H = p^2/2 - 1.6*x^2 + 0.14*x^4 + 0.085*x\nx in (-inf, inf)\n"
    out.append(shot("dw-skew-near", "asymmetric double well", sheet, [0, 1, 2, 3, 4, 11], SRC, [(-9, 9, 120)], -6.0, None))
    sheet = "e = 2.0*sqrt(2)*1.0003\nH = p^2/2 + (x^2 - 4)^2 + e*x/2\nx in (-inf, inf)\n"
    out.append(shot("dw-tilt", "asymmetric double well", sheet, [0, 1, 2, 3, 4, 5], SRC, [("-6.5", "6.5", 120)], -6.0, None))
    sheet = "H = p^2/2 + x^2*(x - 1.9)^2*(x + 2.3)^2/4\nx in (-inf, inf)\n"
    out.append(shot("triple", "asymmetric double well", sheet, [0, 1, 2, 3, 4, 5, 12], SRC, [(-5, "4.7", 110)], 0.0, 0))
    sheet = "H = p^2/2 + 0.02*x^6 - 0.31*x^3 + 0.1*x^4 + 0.7*x - 3\nx in (-inf, inf)\n"
    out.append(shot("mixed", FAM, sheet, [0, 1, 2, 3, 4, 20], SRC, [("-7.5", 8, 110)], -8.0, None))
    for name, b, exact in (
        ("qes-7", 7, {0: -2 * mp.sqrt(2), 2: 2 * mp.sqrt(2)}),
        ("qes-11", 11, {0: -8, 2: 0, 4: 8}),
        ("qes-5", 5, {1: 0}),
    ):
        out.append(
            make(
                name,
                FAM,
                f"H = p^2 + x^6 - {b}*x^2\nx in (-inf, inf)\n",
                exact,
                "quasi-exact sextic (check-values section 2)",
                (exact[0] if 0 in exact else mpf("-1.9")) + 2 * mpf(b) / 3 * mp.sqrt(mpf(b) / 3),
            )
        )
    return out


def momentum():
    """Operators that are a known one after exchange of x and p, or after a gauge transformation."""
    out = []
    fam = "non-Schroedinger Hermitian"

    def twin(name, plain, written, indices, cut, steps, note, sign=1, bottom=0, **more):
        got = halves("twin", plain + "\nx in (-inf, inf)\n", cut, steps, indices)
        values = {int(k): sign * mpf(v) for k, v in got["levels"].items()}
        return make(
            name,
            fam,
            written + "\nx in (-inf, inf)\n",
            values,
            f"{note}: same levels as {plain}; {got['source']}",
            got["scale"] - bottom,
            digits=got["digits"],
            **more,
        )

    out.append(twin("p4-x2", "H = p^2/2 + x^4", "H = p^4 + x^2/2", [0, 1, 2, 3, 10], 6, 50, "x and p exchanged"))
    out.append(twin("p6-x2", "H = p^2 + x^6", "H = p^6 + x^2", [0, 1, 2, 3, 6], 4.5, 50, "x and p exchanged"))
    out.append(
        twin(
            "p4-p2-x2",
            "H = (p^2 + x^2)/2 + 0.1*x^4",
            "H = 0.1*p^4 + p^2/2 + x^2/2 + 0*x",
            [0, 1, 2, 3, 9],
            9,
            60,
            "x and p exchanged",
        )
    )
    out.append(
        twin(
            "gauge-quartic",
            "H = p^2/2 + x^4",
            "k = 1.7\nH = (p + k*x)^2/2 + x^4",
            [0, 1, 2, 3, 8],
            6,
            50,
            "gauge transformation",
        )
    )
    out.append(
        twin(
            "gauge-cross",
            "H = p^2 + x^6",
            "H = p^2 - 0.6*(x^2*p + p*x^2) + 0.36*x^4 + x^6",
            [0, 1, 2, 3, 8],
            4.5,
            50,
            "gauge transformation",
        )
    )
    out.append(
        twin(
            "top-quartic",
            "H = p^2/2 + x^4",
            "H = -p^2/2 - x^4",
            [0, 1, 2, 3, 9],
            6,
            50,
            "negative, counted from the top",
            sign=-1,
        )
    )
    got = mirrored("twin", FAM, "H = p^2/2 + (x^2 - 2.6^2)^2\nx in (-inf, inf)\n", 3, SRC, [(0, "6.2", 90)], 0.0, 0)
    out.append(
        make(
            "p4-dw-2.6",
            fam,
            "k0 = 2.6\nH = (p^2 - k0^2)^2 + x^2/2\nx in (-inf, inf)\n",
            {int(k): mpf(v) for k, v in got["levels"].items()},
            "x and p exchanged: quartic double well; " + SRC,
            got["scale"],
            digits=got["digits"],
        )
    )
    out.append(p4_x4())
    return out


def p4_x4():
    """p^4 + x^4 in an oscillator basis: bands by parity and modulo 4, roots of the banded determinant at two sizes."""
    found, values = double_p4x4(), {}

    def chain(start, size, E):
        """First pivot, from the last, of the block n = start, start + 4, ...: x^4 + p^4 couples n with n and n + 4 only."""
        d = mp.inf
        for k in reversed(range(size)):
            n = mpf(start + 4 * k)
            d = mpf(3) / 2 * (2 * n * n + 2 * n + 1) - E - (n + 1) * (n + 2) * (n + 3) * (n + 4) / 4 / d
        return d

    for start in range(4):
        for E in found[start]:
            a, b = (shooting.root(lambda E, n=n, s=start: chain(s, n, E), E, 1e-11) for n in (46, 60))
            if abs(a / b - 1) > mpf(10) ** -22:
                raise ArithmeticError(f"p4 + x4: {a} {b}")
            values[b] = E
    levels = dict(enumerate(sorted(values)[:9]))
    return make(
        "p4-x4",
        "non-Schroedinger Hermitian",
        "H = p^4 + x^4\nx in (-inf, inf)\n",
        levels,
        "oscillator basis (mpmath), two sizes",
        levels[0],
        digits=20,
    )


def double_p4x4():
    """Start values of the four blocks in doubles."""
    out = []
    for start in range(4):
        n = start + 4.0 * np.arange(40)
        H = np.diag(1.5 * (2 * n * n + 2 * n + 1))
        off = np.sqrt((n[1:] - 3) * (n[1:] - 2) * (n[1:] - 1) * n[1:]) / 2
        out.append(np.linalg.eigvalsh(H + np.diag(off, 1) + np.diag(off, -1))[:4])
    return out


def cases():
    """All cases of this theme."""
    return powers() + doubles() + momentum()
