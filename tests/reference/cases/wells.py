"""Square wells and their edges, coupled wells, layers with mass jumps and bias, smooth wells with tails."""

from __future__ import annotations

from itertools import pairwise

import shooting
from making import make, mirrored, polish, shot
from mpmath import mp, mpf
from sheets import Sheet

SHOT = "Taylor steps (mpmath), exact decay outside; second method Legendre elements"
PLATEAUS = ("plateau", "plateau")


def brinks():
    """Square wells whose last level is bound, or not, by a hair; narrow deep wells."""
    out = []
    for name, nodes, width, excess, count in (
        ("brink-in", 3, "2.2", "1e-4", 4),
        ("brink-out", 3, "2.2", "-1e-4", 3),
        ("brink-in-far", 2, "0.75", "3e-5", 3),
        ("brink-out-far", 5, "4.1", "-2e-6", 5),
    ):
        depth = (nodes * mp.pi / mpf(width)) ** 2 / 2 * (1 + mpf(excess))
        text = mp.nstr(depth, 12)
        at = "-98765.4" if "far" in name else "0.3"
        sheet = f"V0 = {text}\nw = {width}\na = {at}\nV = where(x > a and x < a + w, -V0, 0)\nH = p^2/2 + V\nx in (-inf, inf)\n"
        plain = Sheet(f"H = p^2/2 - {text}\nx in (0, {width})\n")
        meshes = [shooting.mesh(plain, [(0, width, n)], "plateau", "plateau") for n in (16, 23)]
        out.append(square(name, sheet, meshes, mpf(text), mpf(width), count))
    sheet = "lam = 1.7\neps = 2e-6\nV = where(abs(x) < eps/2, -lam/eps, 0)\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(square("delta-like", sheet, None, mpf("1.7") / mpf("2e-6"), mpf("2e-6"), 1))
    sheet = "V0 = 3.3e-4\nV = where(abs(x) < 0.9, -V0, 0)\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(square("shallow", sheet, None, mpf("3.3e-4"), mpf("1.8"), 1))
    hbar, m, V, w = mpf("1.054571817e-34"), mpf("6.1e-32"), mpf("4.2e-20"), mpf("7.4e-9")
    unit = hbar**2 / m
    sheet = (
        "hbar = 1.054571817e-34\nm = 6.1e-32\nV0 = 4.2e-20\nV = where(abs(x) < 3.7e-9, -V0, 0)\n"
        "H = p^2/(2*m) + V\nx in (-inf, inf)\n"
    )
    out.append(square("well-si", sheet, None, V, w, int(mp.ceil(mp.sqrt(2 * V / unit) * w / mp.pi)), unit))
    return out


def square(name, sheet, meshes, depth, width, count, unit=1):
    """Square well from k tan or -k cot in the angle z = k width/2, and again (where meshes are given) by shooting."""
    z0 = mp.sqrt(2 * depth / unit) * width / 2
    levels = {}
    for n in range(count):
        top = min((n + 1) * mp.pi / 2, z0)
        z = mp.findroot(
            lambda z, n=n: z - n * mp.pi / 2 - mp.acos(z / z0),
            (n * mp.pi / 2, top),
            solver="anderson",
            tol=mpf(10) ** -110,
            maxsteps=300,
        )
        levels[n] = -2 * unit * (z0**2 - z**2) / width**2
    if not all(levels.values()) or (z0 > count * mp.pi / 2):
        raise ArithmeticError(f"{name}: wrong number of levels")
    more = {}
    if meshes:
        again, _ = polish(meshes_of(meshes), {n: v + mpf(0) for n, v in levels.items()}, float(levels[0] + depth))
        worst = max(abs(again[n] / v - 1) for n, v in levels.items())
        if worst > mpf(10) ** -16:
            raise ArithmeticError(f"{name}: shooting differs by {mp.nstr(worst, 3)}")
    return make(
        name,
        "finite well",
        sheet,
        levels,
        "root of z - n pi/2 = arccos(z/z0)",
        levels[0] + depth,
        digits=24,
        bound=count,
        threshold=0.0,
        **more,
    )


def meshes_of(meshes):
    """Return the meshes with ends outside the well, where V = 0."""
    return [shooting.Mesh(_Zero(m.sheet), m.steps, m.match, m.left, m.right) for m in meshes]


class _Zero:
    """K as in the sheet and V = 0: what lies outside a well at an end."""

    def __init__(self, sheet):
        self.sheet = sheet

    def at(self, x, kind):
        return self.sheet.at(x, kind)[0], kind(0)


def jumps():
    """Comparisons, steps and absolute values with parameters; different plateaus."""
    out = []
    fam = "finite well"
    sheet = (
        "a = 0.731\nV1 = 7.3\nV2 = 4.9\nw = 2.15\nV = V1*step(-x) + V2*step(x - w) + 1.9*(a < x < a + 0.4)\n"
        "H = p^2/(2*0.83) + V\nx in (-inf, inf)\n"
    )
    pieces = [(0, "0.731", 4), ("0.731", "1.131", 3), ("1.131", "2.15", 5)]
    out.append(
        shot(
            "step-barrier",
            fam,
            sheet,
            [0, 1],
            SHOT,
            pieces,
            -0.1,
            0,
            PLATEAUS,
            second=wide(pieces, 12),
            second_ends=("wall", "wall"),
            bound=2,
            threshold=4.9,
        )
    )
    sheet = "x0 = -98765.4\nd = 1.6\nF = 2.2\nV = where(abs(x - x0) < d, F*abs(x - x0), 9.5)\nH = p^2 + V\nx in (-inf, inf)\n"
    c = mpf("-98765.4")
    pieces = [(c - mpf("1.6"), c, 6), (c, c + mpf("1.6"), 6)]
    out.append(
        shot(
            "abs-cup-far",
            fam,
            sheet,
            [0, 1, 2],
            SHOT,
            pieces,
            -0.1,
            0,
            PLATEAUS,
            second=wide(pieces, 14),
            second_ends=("wall", "wall"),
            tolerance=3e-8,
            bound=3,
            threshold=9.5,
        )
    )
    sheet = "V = 12*step(x - 1) - 3*step(-x) + x^2*step(x)*step(1 - x)\nH = p^2/2 + V\nx in (-1.5, 2.5)\n"
    pieces = [("-1.5", 0, 8), (0, 1, 6), (1, "2.5", 8)]
    out.append(
        shot("step-in-box", fam, sheet, [0, 1, 2, 3, 8, 19], SHOT.replace(", exact decay outside", ""), pieces, -3.0, -3)
    )
    sheet = (
        "s = 0.35\nV = where(x < -s, 20, where(x < 0, 5*x^2, where(x < 3*s, 2.5, 31)))\nH = p^2/2 + V\n"
        "x in (-4, inf), free left\n"
    )
    pieces = [(-4, "-0.35", 18), ("-0.35", 0, 3), (0, "1.05", 6)]
    out.append(
        shot(
            "free-left-step",
            fam,
            sheet,
            [0, 1, 2],
            SHOT,
            pieces,
            -0.1,
            0,
            ("free", "plateau"),
            second=[*pieces, ("1.05", 4, 12)],
            second_ends=("free", "wall"),
            threshold=31.0,
        )
    )
    return out


def wide(pieces, far):
    """Pieces continued on both sides by a plain stretch."""
    a, b = pieces[0][0], pieces[-1][1]
    return [(mpf(a) - far, a, 10), *pieces, (b, mpf(b) + far, 10)]


def coupled():
    """Equal square wells: splittings from 1e-3 to 1e-14 of the level; the same as layers; a tuned unequal pair under bias."""
    out = []
    for name, b in (
        ("dsw-3", "1.31"),
        ("dsw-5", "2.3"),
        ("dsw-7", "3.6"),
        ("dsw-9", "4.5"),
        ("dsw-11", "5.6"),
        ("dsw-14", "7.1"),
    ):
        sheet = (
            f"b = {b}\nw = 1.9\nV0 = 11.3\nV = V0 - where(abs(x) > b/2 and abs(x) < b/2 + w, V0, 0)\n"
            "H = p^2/2 + V\nx in (-inf, inf)\n"
        )
        half = mp.mpf(b) / 2
        pieces = [(0, half, 3), (half, half + mpf("1.9"), 9)]
        out.append(
            mirrored(
                name, "symmetric double well", sheet, 2, SHOT + "; parity by halves", pieces, -0.1, 0, "plateau", threshold=11.3
            )
        )
    system = "units: energy meV, length nm, mass m_e\n"
    rows = "   12   280  0.0912\n   8.5  0    0.0671\n   {b}   280  0.0912\n   8.5  0    0.0671\n   12   280  0.0912\n"
    for name, b in (("lay-pair-6", "18"), ("lay-pair-10", "30.5")):
        start = -(mpf(b) / 2 + mpf("20.5"))
        sheet = (
            system
            + f"layers x from {mp.nstr(start, 12)}: thickness, V, m\n{rows.format(b=b)}x in layers\nH = p*(1/(2*m))*p + V\n"
        )
        half = mpf(b) / 2
        pieces = [(0, half, 4), (half, half + mpf("8.5"), 8), (half + mpf("8.5"), half + mpf("20.5"), 8)]
        out.append(
            mirrored(
                name, "layered, position-dependent mass", sheet, 2, SHOT + "; parity by halves; CODATA 2022", pieces, 0.0, 0
            )
        )
    return out


def layers():
    """Layered structures in meV and nm, with and without bias; the last pair is tuned to resonance."""
    out = []
    fam = "layered, position-dependent mass"
    src = SHOT + "; CODATA 2022"
    head = (
        "units: energy meV, length nm, mass m_e\nH = p*(1/(2*m))*p + V + e*F*x\nF = {F} [kV/cm]\n"
        "layers x: thickness, V, m\n{rows}x in layers\n"
    )
    three = (
        "  9    310   0.094\n  6.5  0     0.0665\n  2.1  310   0.094\n  4.4  35    0.071\n"
        "  1.6  310   0.094\n  7.9  0     0.0665\n  9    310   0.094\n"
    )
    for name, F in (("lay-three-flat", "0"), ("lay-three-bias", "18"), ("lay-three-back", "-43.5")):
        sheet = head.format(F=F, rows=three)
        pieces = blocks(sheet, 5)
        bottom = 0 if F[0] != "-" else float(mpf("-4.35") * mpf("31.5"))
        out.append(shot(name, fam, sheet, [0, 1, 2, 3, 4, 7], src, pieces, bottom - 1.0, None))
    sheet = (
        "units: energy eV, length nm, mass m_e\nH = p*(1/(2*m))*p + V\nlayers z from 1234.5: thickness, V, m\n"
        "  4   1.12  0.121\n  3.3 0     0.043\n  0.9 0.62  0.21\n  5.7 -0.1  0.052\n  4   1.35  0.133\nz in (-inf, inf)\n"
    )
    pieces = blocks(sheet, 6)[1:-1]
    m = Sheet(sheet)
    outer = [(m.edges[0] - 30, m.edges[1], 30), *pieces, (m.edges[-2], m.edges[-1] + 30, 30)]
    out.append(
        shot(
            "lay-four-forever",
            fam,
            sheet,
            [0, 1, 2, 3, 4],
            src,
            pieces,
            -0.2,
            -0.1,
            PLATEAUS,
            second=outer,
            second_ends=("wall", "wall"),
            threshold=1.12,
        )
    )
    sheet = (
        "units: energy meV, length nm, mass m_e\nm = where(x < 7.2, 0.067, 0.0919)\n"
        "V = where(x < 7.2, 0, 251)\nH = p*(1/(2*m))*p + V\nx in (0, inf)\n"
    )
    pieces = [(0, "7.2", 10)]
    out.append(
        shot(
            "half-well-mass",
            fam,
            sheet,
            [0],
            src,
            pieces,
            -1.0,
            0,
            ("wall", "plateau"),
            second=[*pieces, ("7.2", 60, 30)],
            second_ends=("wall", "wall"),
            threshold=251.0,
        )
    )
    sheet = "units: energy meV, length nm, mass m_e\nH = p*(1/(2*m))*p + e*F*x\nm = 0.067\nF = 62 [kV/cm]\nx in (0, inf)\n"
    out.append(shot("triangle-50", "linear ramp", sheet, [0, 1, 2, 5], src, [(0, 140, 40)], -1.0, 0))
    out.append(resonant(fam, src))
    return out


def blocks(sheet, per):
    """One piece a layer."""
    edges = Sheet(sheet).edges
    return [(a, b, max(3, int((b - a) * per / 4))) for a, b in pairwise(edges)]


def resonant(fam, src):
    """Unequal wells behind a thick barrier, the second floor raised until the lowest pair all but meets."""

    def sheet(floor):
        return (
            "units: energy meV, length nm, mass m_e\nH = p*(1/(2*m))*p + V + e*F*x\nF = 11 [kV/cm]\nlayers x: thickness, V, m\n"
            f"  10  290  0.09\n  7    0   0.067\n  16  290  0.09\n  9    {floor}  0.067\n  10  290  0.09\nx in layers\n"
        )

    def levels(floor):
        text = sheet(mp.nstr(floor, 12))
        return shooting.elements(shooting.mesh(Sheet(text), blocks(text, 5)), 2, 0.0)

    a, b = -30.0, 30.0
    for _ in range(60):
        third = (b - a) / 3
        lower, upper = levels(a + third), levels(b - third)
        a, b = (a, b - third) if lower[1] - lower[0] < upper[1] - upper[0] else (a + third, b)
    text = sheet(mp.nstr(mpf((a + b) / 2), 9))
    return shot("lay-resonant", fam, text, [0, 1, 2, 3], src, blocks(text, 5), 0.0, None)


def smooth():
    """Gaussians, exponentials, power tails, barriers inside wells."""
    out = []
    fam = "smooth well"
    src = "Taylor steps (mpmath) on two meshes; second method Legendre elements"
    sheet = "V = -8.2*exp(-x^2/(2*0.9^2))\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(
        mirrored("gauss", fam, sheet, 1, src + "; parity by halves", [(0, 8, 40), (8, 60, 60)], -9.0, -8.2, threshold=0.0)
    )
    sheet = "s = 2.4e-9\nm = 9.3e17\nH = p^2/(2*m) + 7.7*(1 - exp(-(x/s)^2))\nx in (-inf, inf)\n"
    out.append(
        mirrored(
            "gauss-tiny",
            fam,
            sheet,
            3,
            src + "; parity by halves",
            [(0, "1.2e-8", 40), ("1.2e-8", "6e-8", 60)],
            0.0,
            0,
            threshold=7.7,
        )
    )
    sheet = "V = 0.5*x^2 + 6*exp(-4*(x - 0.3)^2)\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(
        shot(
            "barrier-in-osc",
            "asymmetric double well",
            sheet,
            [0, 1, 2, 3, 4, 9],
            src,
            [(-11, -2, 20), (-2, 2, 32), (2, 11, 20)],
            0.0,
            None,
        )
    )
    sheet = "V = -7.5/(1 + x^2)^2\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(
        mirrored(
            "tail-x4", fam, sheet, 1, src + "; parity by halves", [(0, 2, 20), (2, 90, 60, "log")], -8.0, -7.5, threshold=0.0
        )
    )
    sheet = "b = 2.6\nV = -40/(x^4 + b^4)\nH = p^2/2 + 40/b^4 + V\nx in (-inf, inf)\n"
    out.append(
        mirrored(
            "tail-quartic",
            fam,
            sheet,
            1,
            src + "; parity by halves",
            [(0, 3, 16), (3, 300, 60, "log")],
            0.0,
            0,
            threshold=float(40 / 2.6**4),
        )
    )
    sheet = "V = 25*exp(-2*abs(x)) - 18*exp(-abs(x)/1.5)\nH = p^2/2 + V\nx in (-inf, inf)\n"
    out.append(
        mirrored(
            "exp-barrier",
            "symmetric double well",
            sheet,
            2,
            src + "; parity by halves",
            [(0, 12, 60), (12, 60, 60)],
            -10.0,
            None,
            threshold=0.0,
        )
    )
    sheet = "R = 4.1; a = 0.55\nV = -47/(1 + exp((r - R)/a))\nH = 0.5*p^2 + V\nr in (0, inf)\n"
    out.append(shot("woods-saxon", fam, sheet, [0, 1, 3, 6], src, [(0, 12, 90), (12, 60, 80)], -48.0, -47, threshold=0.0))
    sheet = "V = -3*exp(-0.4*r)/r + 1/r^2\nH = p^2/2 + V\nr in (0, inf)\n"
    out.append(
        shot(
            "yukawa-l1",
            "radial",
            sheet,
            [0],
            src,
            [("1e-30", "0.5", 110, "log"), ("0.5", 12, 60), (12, 320, 80, "log")],
            -2.5,
            None,
            (2, "wall"),
            threshold=0.0,
        )
    )
    return out


def cases():
    """All cases of this theme."""
    return brinks() + jumps() + coupled() + layers() + smooth()
