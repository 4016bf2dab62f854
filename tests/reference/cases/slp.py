"""Sturm-Liouville test problems, variable mass, circuits on the open line, radial problems without a closed form."""

from __future__ import annotations

from making import make, mirrored, shot
from mpmath import mp, mpf

SRC = "Taylor steps (mpmath) on two meshes; second method Legendre elements"
REGULAR = "regular Sturm-Liouville"
ODD = "non-Schroedinger Hermitian"


def regular():
    """Coffey-Evans, exponential, inverse square, logarithm, cosines, Gelfand-Levitan potential with walls."""
    out = []
    for beta in (20, 33, 50):
        sheet = f"beta = {beta}\nH = p^2 - 2*beta*cos(2*x) + beta^2*sin(2*x)^2\nx in (-pi/2, pi/2)\n"
        case = mirrored(
            f"coffey-evans-{beta}",
            "Coffey-Evans",
            sheet,
            3,
            SRC + "; parity by halves; check-values section 10",
            [(0, "pi/2", 90)],
            -150.0,
            -2 * beta,
            tolerance=1e-9,
        )
        out.append(case)
    sheet = "H = p^2 + exp(x)\nx in (0, pi)\n"
    out.append(shot("paine-exp", REGULAR, sheet, [0, 1, 2, 3, 9, 24, 49], SRC, [(0, "pi", 40)], 0.0, 1))
    out.append(
        shot(
            "paine-exp-free",
            REGULAR,
            "H = p^2 + exp(x)\nx in (0, pi), free\n",
            [0, 1, 2, 3, 14],
            SRC,
            [(0, "pi", 24)],
            0.0,
            1,
            ("free", "free"),
        )
    )
    sheet = "c = 0.1\nH = p^2 + 1/(x + c)^2\nx in (0, pi)\n"
    out.append(shot("paine-inverse", REGULAR, sheet, [0, 1, 2, 3, 9, 29], SRC, [(0, "0.3", 22), ("0.3", "pi", 36)], 0.0, None))
    sheet = "H = p^2 + ln(x)\nx in (0, 4)\n"
    pieces = [("1e-32", "0.2", 90, "log"), ("0.2", 4, 40)]
    out.append(
        shot(
            "ln-x",
            REGULAR,
            sheet,
            [0, 1, 2, 9, 24],
            SRC + "; check-values section 10",
            pieces,
            -2.0,
            0,
            (1, "wall"),
            tolerance=1e-8,
        )
    )
    sheet = "H = p^2 + 5*cos(x)\nx in (0, 40)\n"
    out.append(
        shot("cos-40", REGULAR, sheet, [0, 5, 6, 11, 12, 17], SRC + "; check-values section 10", [(0, 40, 110)], -5.0, -5)
    )
    sheet = "T = 1 + x/2 + sin(2*x)/4\nH = p^2 + 2*(T*sin(2*x) + cos(x)^4)/T^2\nx in (0, 100)\n"
    out.append(shot("gelfand-levitan", REGULAR, sheet, [0, 1, 2, 30, 98], SRC, [(0, 12, 50), (12, 100, 180)], -3.0, None))
    sheet = "H = -D^2 + (2*x^2 + x^4 - 14*x^2/2)\nx in (0, inf), free left\n"
    out.append(shot("quartic-free", REGULAR, sheet, [0, 1, 2, 8], SRC, [(0, "7.5", 70)], -8.0, mpf("-6.25"), ("free", "wall")))
    sheet = "H = p^2 + x^4 + x^3/2 - 7*x^2\nx in (-inf, inf)\n"
    out.append(
        shot(
            "pryce-quartic",
            REGULAR,
            sheet,
            [0, 1, 2, 5, 9],
            SRC + "; check-values section 10 (halved)",
            [(-8, 8, 120)],
            -18.0,
            None,
        )
    )
    return out


def masses():
    """Masses: p exp(kx) p by Bessel functions, p (1 + x^2) p, layered and smooth masses."""
    out = []
    for name, k, a, b in (("exp-mass", "1.7", "0.2", "1.3"), ("exp-mass-neg", "-2.9", "-0.5", "0.75")):
        sheet = f"k = {k}\nH = p*exp(k*x)*p\nx in ({a}, {b})\n"
        out.append(against_bessel(name, sheet, mpf(k), mpf(a), mpf(b)))
    sheet = "H = p*(1 + x^2)*p\nx in (-1, 2.2)\n"
    pieces = [(-1, "2.2", 36)]
    out.append(shot("cubic-mass", ODD, sheet, [0, 1, 2, 3, 11], SRC, pieces, 0.0, 0))
    out.append(
        shot(
            "cubic-mass-free",
            ODD,
            "H = p*(1 + x^2)*p/2 + x\nx in (-1, 2.2), free right\n",
            [0, 1, 2, 7],
            SRC,
            pieces,
            -1.0,
            -1,
            ("wall", "free"),
        )
    )
    sheet = "m = 0.6 + 0.3*tanh(2*x)\nH = p*(1/(2*m))*p + 1.7*x^2\nx in (-inf, inf)\n"
    out.append(shot("tanh-mass", ODD, sheet, [0, 1, 2, 3, 12], SRC, [(-9, -2, 90), (-2, 2, 60), (2, 8, 75)], 0.0, 0))
    sheet = "m = 1 + 0.5*exp(-x^2)\nH = p*(1/(2*m))*p + x^4/4\nx in (-inf, inf)\n"
    out.append(mirrored("gauss-mass", ODD, sheet, 4, SRC + "; parity by halves", [(0, "7.5", 90)], 0.0, 0))
    return out


def against_bessel(name, sheet, k, a, b):
    """-(e^{kx} u')' = E u: u = z C_1(z), z = (2 sqrt E/|k|) e^{-kx/2}; zeros of a Bessel cross product, and by shooting."""
    case = shot(name, ODD, sheet, [0, 1, 2, 3, 8, 20], SRC, [(a, b, 30)], 0.0, 0)

    def cross(E):
        p, q = (2 * mp.sqrt(E) / abs(k) * mp.exp(-k * x / 2) for x in (a, b))
        return mp.besselj(1, p) * mp.bessely(1, q) - mp.besselj(1, q) * mp.bessely(1, p)

    exact = {int(n): mp.findroot(cross, mpf(v)) for n, v in case["levels"].items()}
    worst = max(abs(exact[int(n)] / mpf(v) - 1) for n, v in case["levels"].items())
    if worst > mpf(10) ** -20:
        raise ArithmeticError(f"{name}: Bessel zeros differ by {mp.nstr(worst, 3)}")
    return make(name, ODD, sheet, exact, "zeros of a Bessel cross product, and Taylor steps", exact[0], digits=24)


def circuits():
    """Phase of a superconducting loop on the open line."""
    out = []
    head = "EJ = {EJ}\nEC = {EC}\nEL = {EL}\nf = {f}\nH = 4*EC*p^2 + EL*phi^2/2 - EJ*cos(phi - 2*pi*f)\nphi in (-inf, inf)\n"
    for name, EJ, EC, EL, f, cut, n in (
        ("fluxonium-quarter", "9.0", "2.5", "0.52", "0.25", 40, 170),
        ("fluxonium-half", "9.0", "2.5", "0.52", "0.5", 40, 170),
        ("fluxonium-heavy", "6.27", "0.8", "0.31", "0.5", 36, 200),
    ):
        sheet = head.format(EJ=EJ, EC=EC, EL=EL, f=f)
        note = SRC + ("; differences in check-values section 9" if EC == "2.5" else "")
        out.append(shot(name, "superconducting circuit", sheet, [0, 1, 2, 3, 4, 10], note, [(-cut, cut, n)], -9.0, None))
    return out


def radial():
    """Singular ends without a closed form: ramp with Coulomb, disc, broken exponents, screened Coulomb, logarithm."""
    out = []
    inner = [("1e-32", 2, 220, "log")]
    cases = (
        ("cornell-s", "H = p^2/2 - 1.4/r + 0.9*r\nr in (0, inf)\n", [0, 1, 2, 3, 9], (2, 26, 80), 1, -3.0, "radial"),
        ("quartic-l2", "H = p^2/2 + 3/r^2 + r^4\nr in (0, inf)\n", [0, 1, 2, 3, 9], (2, "6.5", 40), 3, 0.0, "radial"),
        ("disc-osc", "H = p^2/2 + 15/(8*r^2) + r^2/2\nr in (0, 2.4)\n", [0, 1, 2, 3, 9], (2, "2.4", 3), "2.5", 0.0, "radial"),
        (
            "defect-osc",
            "H = p^2/2 + 0.37*1.37/(2*r^2) - 0.8/r + 0.08*r^2\nr in (0, inf)\n",
            [0, 1, 2, 3, 8],
            (2, 22, 70),
            "1.37",
            -1.0,
            "radial",
        ),
        ("hydrogen-box-2", "H = p^2/2 + 1/r^2 - 1/r\nr in (0, 7.1)\n", [0, 1, 2, 3, 8], (2, "7.1", 20), 2, -1.0, "radial"),
        ("log-well", "H = p^2/2 + 2*ln(r) + 1/r^2\nr in (0, inf)\n", [0, 1, 2, 3], (2, 95, 180), 2, 0.0, "radial"),
        (
            "woods-saxon-l2",
            "t = exp((r - 7)/0.6)\nH = p^2 + 6/r^2 - 50/(1 + t)*(1 - 5*t/(3*(1 + t)))\nr in (0, inf)\n",
            [0, 1, 5, 10],
            (2, 24, 120),
            3,
            -50.0,
            "radial",
        ),
    )
    for name, sheet, indices, outer, sigma, floor, family in cases:
        more = {"threshold": 0.0} if name.startswith("woods") else {}
        tolerance = 1e-8 if sigma in (1, "1.37") else 1e-9
        out.append(shot(name, family, sheet, indices, SRC, [*inner, outer], floor, None, (sigma, "wall"), tolerance, **more))
    return out


def cases():
    """All cases of this theme."""
    return regular() + masses() + circuits() + radial()
