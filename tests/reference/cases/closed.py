"""Closed forms: oscillators, wells, Morse and its kin, Coulomb and inverse squares, ramps, non-Schroedinger operators."""

from __future__ import annotations

import shooting
from making import checked, make
from mpmath import mp, mpf
from sheets import HBAR, SYSTEMS, Sheet

OSC = "closed form hbar w (n + 1/2)"
R = mpf


def oscillators():
    """Harmonic levels in SI numbers, far from the origin, at extreme scales, high indices."""
    out = []
    hbar, w = R("1.054571817e-34"), R("8.8e13")
    si = (
        "hbar = 1.054571817e-34\nm = 1.6726e-27\nw = 8.8e13      # rad/s\nx0 = 1.2746e-10\n"
        "H = p^2/(2*m) + m*w^2*(x - x0)^2/2\nx in (-inf, inf)\n"
    )
    out.append(make("ho-si", "harmonic", si, {n: hbar * w * (n + R("0.5")) for n in (0, 1, 2, 5, 11)}, OSC, hbar * w / 2))
    for name, text, k, v0 in (("ho-far", "1234.5", "2.6", "0"), ("ho-farther", "-98765.4", "0.85", "7.25")):
        w = mp.sqrt(R(k) / R("1.3"))
        sheet = f"m = 1.3\nk = {k}\nH = p^2/(2*m) + k*(x - ({text}))^2/2 + {v0}\nx in (-inf, inf)\n"
        values = {n: w * (n + R("0.5")) + R(v0) for n in (0, 1, 2, 3, 8, 21)}
        x0 = float(text)
        out.append(checked(name, "harmonic", sheet, values, OSC, w / 2, [(x0 - 12, x0 + 12, 50)], float(v0), 1e-8))
    for name, k in (("ho-tiny", "1e-18"), ("ho-huge", "1e18")):
        w = mp.sqrt(R(k))
        out.append(
            make(
                name,
                "harmonic",
                f"k = {k}\nH = p^2/2 + k*y^2/2; y in (-inf, inf)\n",
                {n: w * (n + R("0.5")) for n in (0, 1, 2, 7)},
                OSC,
                w / 2,
            )
        )
    sheet = "# a trap\nw = 0.71\nH = p^2/2 + w^2*x^2/2 + 0.3*x\nx in (-inf, inf)\n"
    values = {n: R("0.71") * (n + R("0.5")) - R("0.045") / R("0.71") ** 2 for n in (0, 1, 40, 100, 200)}
    out.append(checked("ho-200", "harmonic", sheet, values, OSC + " - F^2/2w^2", R("0.355"), [(-28, 27, 110)], -0.2, 1e-9))
    values = {n: R("0.71") * (n + R("0.5")) - R("0.045") / R("0.71") ** 2 for n in (999, 1000, 1001)}
    out.append(make("ho-near", "harmonic", sheet, values, OSC + " - F^2/2w^2", R("0.355"), near=710.2, n=5))
    sheet = "H = p^2/2 + 3.5^2*x^2/2\nx in (0, inf), free\n"
    values = {n: R("3.5") * (2 * n + R("0.5")) for n in (0, 1, 2, 3, 10)}
    out.append(
        checked("ho-half-free", "harmonic", sheet, values, OSC + ", even levels", R("1.75"), [(0, 8, 40)], 0.0, left="free")
    )
    return out


def boxes():
    """Infinite wells: SI numbers, far away, extreme scales, free ends and mixtures."""
    out = []

    def box(n, L, K=None):
        return (R("0.5") if K is None else K) * (n * mp.pi / R(L)) ** 2

    K = R("1.054571817e-34") ** 2 / (2 * R("9.1093837e-31"))
    sheet = "hbar = 1.054571817e-34\nm = 9.1093837e-31\nH = p^2/(2*m)\nx in (0, 2.5e-9)\n"
    out.append(
        make(
            "box-si",
            "infinite well",
            sheet,
            {n: box(n + 1, "2.5e-9", K) for n in (0, 1, 2, 9)},
            "closed form n^2",
            box(1, "2.5e-9", K),
        )
    )
    for name, a, b, L in (
        ("box-far", "1234.5", "1237.25", "2.75"),
        ("box-tiny", "0", "3e-9", "3e-9"),
        ("box-huge", "-1e9", "1.5e9", "2.5e9"),
    ):
        sheet = f"H = p^2/2\nx in ({a}, {b})\n"
        out.append(
            make(name, "infinite well", sheet, {n: box(n + 1, L) for n in (0, 1, 2, 5, 30)}, "closed form n^2", box(1, L))
        )
    sheet = "H = p^2 - 2.5\nx in (-98765.4, -98762.3), free\n"
    out.append(
        make(
            "box-free",
            "infinite well",
            sheet,
            {n: box(n, "3.1", 1) - R("2.5") for n in (0, 1, 2, 7)},
            "closed form n^2, n from 0",
            box(1, "3.1", 1),
        )
    )
    sheet = "H = p^2/2\nx in (-0.4, 1.7), free right\n"
    out.append(
        checked(
            "box-mixed",
            "infinite well",
            sheet,
            {n: box(n + R("0.5"), "2.1") for n in (0, 1, 2, 3, 15)},
            "closed form (n + 1/2)^2",
            box(R("0.5"), "2.1"),
            [(-0.4, 1.7, 12)],
            -0.1,
            right="free",
        )
    )
    F, L = R("4.2"), R("2.5")
    sheet = "F = 4.2\nH = p^2/2 + F*x\nx in (0, 2.5), free left\n"
    s, e = mp.cbrt(2 * F), mp.cbrt(F**2 / 2)

    def wall(E):
        a, b = -E / e, s * L - E / e
        return mp.airyai(a, derivative=1) * mp.airybi(b) - mp.airybi(a, derivative=1) * mp.airyai(b)

    values = {n: mp.findroot(wall, g) for n, g in enumerate(airy_starts())}
    out.append(
        checked(
            "box-ramp-free",
            "linear ramp",
            sheet,
            values,
            "root of Airy functions",
            values[0],
            [(0, 2.5, 20)],
            -0.1,
            left="free",
        )
    )
    return out


def airy_starts():
    """Double-precision starts for box-ramp-free, from elements."""
    m = shooting.mesh(Sheet("F = 4.2\nH = p^2/2 + F*x\nx in (0, 2.5)"), [(0, 2.5, 20)], "free", "wall")
    return shooting.elements(m, 6, -0.1)


def morse():
    """Morse levels; the top one bound by a hair, or just not."""
    out = []

    def case(name, a, K, lam, x0, indices, note):
        """D = K a^2 lam^2, lam = sqrt(D/K)/a."""
        a, K, lam = R(a), R(K), R(lam)
        D = K * a**2 * lam**2
        text = mp.nstr(D, 17)
        D = R(text)
        lam = mp.sqrt(D / K) / a
        bound = int(mp.ceil(lam - R("0.5")))
        sheet = (
            f"D0 = {text}\na = {mp.nstr(a, 20)}\nH = {mp.nstr(K, 20)}*p^2 + D0*(1 - exp(-a*(r - {x0})))^2\nr in (-inf, inf)\n"
        )
        levels = {n: D - K * a**2 * (lam - n - R("0.5")) ** 2 for n in (n if n >= 0 else bound + n for n in indices)}
        out.append(
            make(name, "Morse", sheet, levels, "closed form; " + note, levels[0], digits=24, bound=bound, threshold=float(D))
        )

    case("morse-10", "1.3", "0.5", "10.21", "2.2", [0, 1, 2, 5, -2, -1], "ten levels")
    case("morse-hair-in", "0.81", "0.137", "7.500223", "1.7", [0, 1, 3, -2, -1], "top level bound by 1e-9 of the depth")
    case("morse-hair-out", "0.81", "0.137", "7.499777", "1.7", [0, 1, 3, -2, -1], "one level fewer by a hair")
    case("morse-far", "2.1", "0.5", "15.83", "1234.5", [0, 1, 6, -2, -1], "far from the origin")
    case("morse-deep", "1.9", "0.021", "97.44", "1.1", [0, 1, 50, -3, -2, -1], "97 levels")
    out.append(morse_si())
    return out


def morse_si():
    """Return a diatomic in SI numbers."""
    hbar, m, a, D = R("1.054571817e-34"), R("1.1385e-26"), R("2.3e10"), R("1.79e-18")
    w = hbar * a * mp.sqrt(2 * D / m)
    levels = {n: w * (n + R("0.5")) - (w * (n + R("0.5"))) ** 2 / (4 * D) for n in (0, 1, 2, 10, 40)}
    bound = int(mp.ceil(mp.sqrt(2 * m * D) / (a * hbar) - R("0.5")))
    sheet = (
        "hbar = 1.054571817e-34\nm = 1.1385e-26\na = 2.3e10\nDe = 1.79e-18\nre = 1.13e-10\n"
        "H = p^2/(2*m) + De*(1 - exp(-a*(r - re)))^2\nr in (-inf, inf)\n"
    )
    return make("morse-si", "Morse", sheet, levels, "closed form", levels[0], bound=bound, threshold=1.79e-18)


def poschl_teller():
    """sech^2 with lambda a hair above or below an integer, Rosen-Morse, Scarf, Eckart, trigonometric relatives."""
    out = []
    fam = "sech2/Rosen-Morse/Scarf/Eckart"
    for name, lam, width, x0 in (
        ("pt-above", "3.00002", "0.77", "0"),
        ("pt-below", "2.99998", "0.77", "0"),
        ("pt-2.3", "2.3", "1.9", "-98765.4"),
        ("pt-shallow", "0.0013", "1", "0"),
    ):
        L, a = R(lam), R(width)
        bound = int(mp.ceil(L))
        levels = {n: -(a**2) * (L - n) ** 2 / 2 for n in range(bound)}
        sheet = (
            f"lam = {lam}\na = {width}\nV = -lam*(lam + 1)*a^2/(2*cosh(a*(x - ({x0})))^2)\nH = p^2/2 + V\nx in (-inf, inf)\n"
        )
        depth = L * (L + 1) * a**2 / 2
        out.append(
            make(name, fam, sheet, levels, "closed form -(lam - n)^2 a^2/2", levels[0] + depth, bound=bound, threshold=0.0)
        )
    A, B = R("5.3"), R("4.1")
    levels = {n: -((A - n) ** 2) - B**2 / (A - n) ** 2 for n in range(4) if A - n > mp.sqrt(B)}
    sheet = "A = 5.3\nB = 4.1\nH = p^2 - A*(A + 1)*sech(x)^2 + 2*B*tanh(x)\nx in (-inf, inf)\n"
    out.append(
        checked(
            "rosen-morse",
            fam,
            sheet,
            levels,
            "closed form -(A - n)^2 - B^2/(A - n)^2, A - n > sqrt B",
            5,
            [(-40, 30, 240)],
            -40.0,
            1e-8,
            bound=len(levels),
            threshold=-8.2,
        )
    )
    A, B = R("3.45"), R("1.2")
    levels = {n: -((A - n) ** 2) for n in range(4)}
    sheet = "A = 3.45\nB = 1.2\nH = p^2 + (B^2 - A^2 - A)*sech(x)^2 + B*(2*A + 1)*sech(x)*tanh(x)\nx in (-inf, inf)\n"
    out.append(
        checked(
            "scarf2", fam, sheet, levels, "closed form -(A - n)^2", 7, [(-50, 50, 330)], -20.0, 1e-8, bound=4, threshold=0.0
        )
    )
    A, B = R("1.6"), R("31.7")
    levels = {n: -((A + n) ** 2) - B**2 / (A + n) ** 2 for n in range(5) if A + n < mp.sqrt(B)}
    sheet = "A = 1.6\nB = 31.7\nH = p^2 + A*(A - 1)/sinh(r)^2 - 2*B*cosh(r)/sinh(r)\nr in (0, inf)\n"
    out.append(
        make(
            "eckart",
            fam,
            sheet,
            levels,
            "closed form -(A + n)^2 - B^2/(A + n)^2, A + n < sqrt B",
            100,
            bound=len(levels),
            threshold=-63.4,
        )
    )
    A = R("2.25")
    sheet = "A = 2.25\na = 0.8\nH = p^2 + a^2*A*(A - 1)/cos(a*x)^2\nx in (-pi/1.6, pi/1.6)\n"
    out.append(
        make(
            "pt-trig",
            fam,
            sheet,
            {n: R("0.64") * (A + n) ** 2 for n in (0, 1, 2, 3, 12)},
            "closed form a^2 (A + n)^2",
            R("0.64") * A,
        )
    )
    A, B = R("2.6"), R("3.3")
    sheet = "A = 2.6\nB = 3.3\nH = p^2 + A*(A - 1)/sin(x)^2 - 2*B*cos(x)/sin(x)\nx in (0, pi)\n"
    levels = {n: (A + n) ** 2 - B**2 / (A + n) ** 2 for n in (0, 1, 2, 3, 9)}
    out.append(make("rosen-morse-trig", fam, sheet, levels, "closed form (A + n)^2 - B^2/(A + n)^2", 3))
    return out


def radial():
    """Kratzer, Coulomb with whole and broken l, two-dimensional centrifugal terms, isotonic and critical inverse squares."""
    out = []
    B = R("35.5")
    for name, A in (("kratzer", "40.3"), ("kratzer-shallow", "0.27")):
        s = (1 + mp.sqrt(1 + 8 * R(A))) / 2
        levels = {n: -(B**2) / (2 * (n + s) ** 2) for n in (0, 1, 2, 5)}
        sheet = f"A = {A}\nB = 35.5\nH = p^2/2 + A/r^2 - B/r\nr in (0, inf)\n"
        out.append(
            make(
                name,
                "radial",
                sheet,
                levels,
                "closed form -B^2/2(n + s)^2, s(s - 1) = 2A",
                levels[0] + B**2 / (4 * R(A)),
                threshold=0.0,
            )
        )
    for name, ell in (
        ("coulomb-defect", "0.63"),
        ("coulomb-l3", "3"),
        ("coulomb-near-half", "-0.49"),
        ("coulomb-attr", "-0.2"),
    ):
        levels = {n: -1 / (2 * (n + 1 + R(ell)) ** 2) for n in (0, 1, 2, 3, 6)}
        sheet = f"l = {ell}\nH = p^2/2 + l*(l + 1)/(2*r^2) - 1/r\nr in (0, inf)\n"
        out.append(make(name, "radial", sheet, levels, "closed form -1/2(n + 1 + l)^2", -levels[0], threshold=0.0))
    sheet = (
        "units: energy meV, length nm, mass m_e\nmu = 0.067\nk = 110.77\nr in (0, inf)\n"
        "H = p^2/(2*mu) - hbar^2/(8*mu*r^2) - k/r\n"
    )
    energy, length, mass = (R(v) for v in SYSTEMS["energy meV, length nm, mass m_e"])
    ry = R("0.067") * R("110.77") ** 2 / (2 * HBAR**2 / (length**2 * mass * energy))
    levels = {n: -ry / (n + R("0.5")) ** 2 for n in (0, 1, 2, 4)}
    out.append(
        make(
            "exciton-2d", "radial", sheet, levels, "closed form -Ry/(n + 1/2)^2; CODATA 2022", ry * 4, digits=24, threshold=0.0
        )
    )
    w = R("1.83")
    sheet = "w = 1.83\nrho in (0, inf)\nH = p^2/2 - 1/(8*rho^2) + w^2*rho^2/2\n"
    out.append(
        make("osc-2d", "inverse-square", sheet, {n: w * (2 * n + 1) for n in (0, 1, 2, 3, 8)}, "closed form w(2n + 1)", w)
    )
    for name, nu, A in (
        ("critical-box", R(0), "-1/8"),
        ("bessel-third-box", R(1) / 3, "-5/72"),
        ("bessel-half-box", R("2.5"), "3"),
    ):
        levels = {n: mp.besseljzero(nu, n + 1) ** 2 / (2 * R("2.6") ** 2) for n in (0, 1, 2, 3, 9)}
        sheet = f"A = {A}\nH = p^2/2 + A/r^2\nr in (0, 2.6)\n"
        out.append(
            make(
                name,
                "inverse-square",
                sheet,
                levels,
                "zeros of a Bessel function",
                levels[0] - (3 / R("2.6") ** 2 if A == "3" else 0),
            )
        )
    for name, g, hb in (("isotonic", "3.71", "0.4"), ("isotonic-near-half", "-0.1249", "1"), ("isotonic-attr", "-0.11", "1")):
        nu = mp.sqrt(R(g) * 2 / R(hb) ** 2 + R("0.25"))
        levels = {n: R(hb) * (2 * n + 1 + nu) for n in (0, 1, 2, 3, 7)}
        sheet = f"hbar = {hb}\ng = {g}\nH = p^2/2 + g/x^2 + x^2/2\nx in (0, inf)\n"
        bottom = mp.sqrt(2 * R(g)) if R(g) > 0 else 0
        out.append(
            make(
                name,
                "inverse-square",
                sheet,
                levels,
                "closed form hbar(2n + 1 + nu), nu^2 = 2g/hbar^2 + 1/4",
                levels[0] - bottom,
            )
        )
    return out


def ramps():
    """Airy zeros."""
    out = []
    F, m = R("2.9"), R("0.6")
    e = mp.cbrt(F**2 / (2 * m))
    levels = {n: -mp.airyaizero(n // 2 + 1, derivative=1 - n % 2) * e for n in (0, 1, 2, 3, 4, 9, 30)}
    sheet = "F = 2.9\nm = 0.6\nH = p^2/(2*m) + F*abs(x - 1234.5)\nx in (-inf, inf)\n"
    out.append(make("abs-far", "linear ramp", sheet, levels, "Airy zeros", levels[0]))
    levels = {n: -mp.airyaizero(n + 1) * e for n in (0, 1, 2, 3, 20, 50)}
    out.append(
        checked(
            "bouncer",
            "linear ramp",
            "F = 2.9\nm = 0.6\nH = p^2/(2*m) + F*x\nx in (0, inf)\n",
            levels,
            "Airy zeros",
            levels[0],
            [(0, 32, 90)],
            0.0,
        )
    )
    levels = {n: -mp.airyaizero(n + 1, derivative=1) * e for n in (0, 1, 2, 3, 11)}
    out.append(
        checked(
            "bouncer-free",
            "linear ramp",
            "F = 2.9\nm = 0.6\nH = p^2/(2*m) + F*x\nx in (0, inf), free left\n",
            levels,
            "zeros of Ai'",
            levels[0],
            [(0, 16, 60)],
            0.0,
            left="free",
        )
    )
    return out


def others():
    """Position-dependent mass, Legendre and Jacobi, gauges and squeezes, fourth order on a ring, counted from the top."""
    out = []
    fam = "non-Schroedinger Hermitian"

    def nu(n, r):
        return (n + 1) * mp.pi / mp.log(r)

    sheet = "H = p*x^2*p\nx in (1, 2)\n"
    out.append(
        checked(
            "euler",
            fam,
            sheet,
            {n: nu(n, 2) ** 2 + R("0.25") for n in (0, 1, 2, 3, 9)},
            "closed form (n pi/ln 2)^2 + 1/4",
            20,
            [(1, 2, 20)],
            0.0,
        )
    )
    sheet = "a = 2.4\nH = p*(a^2*x^2)*p/2 + 3\nx in (0.5, 8)\n"
    levels = {n: R("2.88") * (nu(n, 16) ** 2 + R("0.25")) + 3 for n in (0, 1, 2, 3, 12)}
    out.append(checked("euler-wide", fam, sheet, levels, "closed form", 4, [(0.5, 8, 40, "log")], 0.0))
    for name, text, mu in (("legendre-m1", "1", 1), ("legendre-m2.5", "2.5", R("2.5"))):
        sheet = f"m = {text}\nH = -D*(1 - x^2)*D + m^2/(1 - x^2)\nx in (-1, 1), free\n"
        out.append(
            make(name, fam, sheet, {n: (mu + n) * (mu + n + 1) for n in (0, 1, 2, 3, 10)}, "closed form (m + n)(m + n + 1)", mu)
        )
    c = R("1.35")
    sheet = "a = 0.8\nb = 1.9\nH = p*(1 - x^2)*p + a^2/(2*(1 - x)) + b^2/(2*(1 + x))\nx in (-1, 1), free\n"
    out.append(
        make("jacobi", fam, sheet, {n: (n + c) * (n + c + 1) for n in (0, 1, 2, 5, 14)}, "closed form, Jacobi polynomials", c)
    )
    w = mp.sqrt(R("1.21") - R("0.64"))
    sheet = "H = (p^2 + 1.21*x^2)/2 + 0.8*(x*p + p*x)/2 + 0.5*p\nx in (-inf, inf)\n"
    shift = R("1.21") * R("0.25") / (2 * w**2)
    out.append(
        make(
            "squeeze-drift",
            fam,
            sheet,
            {n: w * (n + R("0.5")) - shift for n in (0, 1, 2, 3, 12)},
            "closed form, complete the square",
            w / 2,
        )
    )
    w = R("2.3")
    sheet = "A = sin(3*x) + 0.4*x^2\nH = (p - A)^2/2 + 2.3^2*x^2/2\nx in (-inf, inf)\n"
    out.append(
        make("gauge-sin", fam, sheet, {n: w * (n + R("0.5")) for n in (0, 1, 2, 6)}, "gauge transformation, closed form", w / 2)
    )
    sheet = "A = 0.37\nH = (p - A)^2/2\nx in ring(0, 5)\n"
    k = sorted((2 * mp.pi * j / 5 - R("0.37")) ** 2 / 2 for j in range(-9, 10))
    out.append(make("ring-gauge", "periodic/ring", sheet, dict(enumerate(k[:8])), "closed form, gauge transformation", k[0]))
    sheet = "H = p^4 + 1.5*p^2\nx in ring(0, 3), phase 1/3\n"
    k = sorted((2 * mp.pi * (j + R(1) / 3) / 3) for j in range(-6, 6))
    values = sorted(v**4 + R("1.5") * v**2 for v in k)
    out.append(make("ring-p4", fam, sheet, dict(enumerate(values[:7])), "closed form k^4 + 1.5 k^2", values[0]))
    sheet = "# only a highest level: counted from the top\nH = D^2 - x^2\nx in (-inf, inf)\n"
    out.append(make("from-top", fam, sheet, {n: -(2 * R(n) + 1) for n in (0, 1, 2, 3, 10)}, "closed form -(2n + 1)", 1))
    sheet = "H = -p^2/2 - 5*x - 0.5*x^2*9 + 40\nx in (-inf, inf)\n"
    levels = {n: 40 + R(25) / 18 - 3 * (n + R("0.5")) for n in (0, 1, 2, 3, 13)}
    out.append(make("from-top-shifted", fam, sheet, levels, "closed form, negative of an oscillator", R("1.5")))
    values = sorted((2 * mp.pi * (j + R(1) / 3) / R("4.4")) ** 2 for j in range(-8, 8))
    sheet = "H = p^2\ntheta in ring(-1.1, 3.3), phase 1/3\n"
    out.append(make("ring-free-third", "periodic/ring", sheet, dict(enumerate(values[:9])), "closed form k^2", values[0]))
    values = sorted((mp.mpf(j)) ** 2 * R("0.31") for j in range(-6, 7))
    out.append(
        make(
            "ring-free",
            "periodic/ring",
            "B = 0.31\nH = B*p^2\nphi in ring(0, 2*pi)\n",
            dict(enumerate(values[:8])),
            "closed form B m^2, in pairs",
            R("0.31"),
        )
    )
    return out


def cases():
    """All cases of this theme."""
    return oscillators() + boxes() + morse() + poschl_teller() + radial() + ramps() + others()
