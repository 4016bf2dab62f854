"""Tabulated potentials whose interpolation is exact, levels near an energy, more than the bound ones, scaled numbers."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise

from anharmonic import halves
from making import make, shot
from mpmath import mp, mpf

SRC = "Taylor steps (mpmath) on two meshes; second method Legendre elements"
PLACES = (
    "-2",
    "-1.9",
    "-1.75",
    "-1.5",
    "-1.3",
    "-1",
    "-0.8",
    "-0.65",
    "-0.4",
    "-0.2",
    "0",
    "0.15",
    "0.3",
    "0.5",
    "0.75",
    "1",
    "1.1",
    "1.35",
    "1.6",
    "1.8",
    "2",
    "2.25",
    "2.4",
    "2.7",
    "2.85",
    "3",
)


def exactly(value):
    """Write a fraction whose denominator divides a power of ten, as decimal text."""
    places = 0
    while (value * 10**places).denominator != 1:
        places += 1
    digits = str(abs(int(value * 10**places))).rjust(places + 1, "0")
    return ("-" if value < 0 else "") + (
        digits[: len(digits) - places] + "." + digits[len(digits) - places :] if places else digits
    )


def file_of(header, pairs):
    """CSV text."""
    return "\n".join([header, *(f"{x},{v}" for x, v in pairs)]) + "\n"


def cubic(coefficients, places, unit=1):
    """Exact samples of a polynomial, coefficients from the constant up; places divided by unit are its argument."""
    c = [Fraction(v) for v in coefficients]
    return [(x, exactly(sum(a * (Fraction(x) / unit) ** k for k, a in enumerate(c)))) for x in places]


def rewrite(case, sheet, files, note):
    """Return the case with another sheet of the same operator."""
    return {**case, "sheet": sheet, "files": files, "source": f"{note}; {case['source']}"}


def smooth():
    """Cubic and parabola samples: any cubic spline with not-a-knot ends is exact."""
    out = []
    note = "samples of a cubic, for which a not-a-knot spline is exact"
    plain = "H = p^2/2 + 1.5 - 2.4*x + 3.1*x^2 - 0.7*x^3\nx in (-2, 3)\n"
    case = shot("table-cubic", "table", plain, [0, 1, 2, 3, 4, 9], SRC, [(-2, 3, 40)], -9.0, None)
    data = file_of("x,V", cubic(("1.5", "-2.4", "3.1", "-0.7"), PLACES))
    out.append(rewrite(case, 'V = table("scan.csv", "x", "V")\nH = p^2/2 + V\nx in (-2, 3)\n', {"scan.csv": data}, note))
    plain = "H = p^2/(2*0.9) + 0.25 + 1.2*x + 2.6*x^2\nx in (-1.9, 2.85), free right\n"
    case = shot("table-parabola", "table", plain, [0, 1, 2, 3, 11], SRC, [("-1.9", "2.85", 40)], -1.0, None, ("wall", "free"))
    data = file_of("place,other,value", [(x, f"7,{v}") for x, v in cubic(("0.25", "1.2", "2.6"), PLACES)])
    out.append(
        rewrite(
            case, 'm = 0.9\nH = p^2/(2*m) + table("scan.csv", 1, 3)\nx in (-1.9, 2.85), free right\n', {"scan.csv": data}, note
        )
    )
    plain = "units: energy eV, length nm, mass m_e\nH = p^2/(2*0.8) + 0.31*x^2 + 0.07*x^3 + 0.002\nx in (-2, 3)\n"
    case = shot("table-units", "table", plain, [0, 1, 2, 3], SRC + "; CODATA 2022", [(-2, 3, 40)], -1.0, None)
    data = file_of("R,E", [(exactly(Fraction(x) * 10), v) for x, v in cubic(("2", "0", "310", "70"), PLACES)])
    sheet = plain.replace("0.31*x^2 + 0.07*x^3 + 0.002", 'table("scan.csv", "R" [angstrom], "E" [meV])')
    out.append(rewrite(case, sheet, {"scan.csv": data}, note))
    return out


def broken(points):
    """Nested comparisons for the straight lines through points."""
    text = ""
    for (a, u), (b, v) in pairwise(points):
        text += f"where(x < {b}, {u} + (x - ({a}))*({v} - ({u}))/({b} - ({a})), "
    return text + points[-1][1] + ")" * (len(points) - 1)


def straight():
    """Piecewise linear tables, between walls and held outside."""
    out = []
    points = [("-3", "6.5"), ("-1.7", "0.4"), ("-0.6", "2.2"), ("0", "1.9"), ("1.1", "-1.3"), ("2.3", "0.8"), ("3.2", "7.5")]
    pieces = [(a[0], b[0], 6) for a, b in pairwise(points)]
    plain = f"V = {broken(points)}\nH = p^2/2 + V\nx in "
    data = {"scan.csv": file_of("x,V", points)}
    case = shot("table-linear", "table", plain + "(-3, 3.2)\n", [0, 1, 2, 3, 4, 12], SRC, pieces, -2.0, None)
    out.append(
        rewrite(
            case,
            'V = table("scan.csv", "x", "V", linear)\nH = p^2/2 + V\nx in (-3, 3.2)\n',
            data,
            "straight lines through the points",
        )
    )
    held = f"V = where(x < -3, 6.5, {broken(points)})\nH = p^2/2 + V\nx in (-inf, inf)\n"
    far = [("-12", "-3", 18), *pieces, ("3.2", 12, 18)]
    case = shot(
        "table-linear-hold",
        "table",
        held,
        [0, 1, 2, 3],
        SRC,
        pieces,
        -2.0,
        None,
        ("plateau", "plateau"),
        second=far,
        second_ends=("wall", "wall"),
        threshold=6.5,
    )
    out.append(
        rewrite(
            case,
            'V = table("scan.csv", "x", "V", linear, hold)\nH = p^2/2 + V\nx in (-inf, inf)\n',
            data,
            "straight lines through the points, held outside",
        )
    )
    return out


def asked():
    """Levels near an energy and counts beyond the bound ones."""
    out = []
    near = halves("x4-near", "H = p^2 + x^4\nx in (-inf, inf)\n", 9, 200, [0, 98, 99, 100, 101, 102])
    lowest = near["levels"].pop("0")
    middle = round(float(near["levels"]["100"]), 1)
    out.append({**near, "near": middle, "n": 5, "scale": float(lowest)})
    levels = {n: mpf(n + 1) ** 2 * mp.pi**2 / (2 * mpf("1.5") ** 2) for n in (4998, 4999, 5000)}
    out.append(
        make(
            "box-near",
            "infinite well",
            "H = p^2/2\nx in (-1, 0.5)\n",
            levels,
            "closed form n^2",
            levels[4999] / 25000000,
            near=54831135.0,
            n=3,
        )
    )
    levels = {n: -((mpf("4.4") - n) ** 2) / 2 for n in range(5)}
    sheet = "H = p^2/2 - 4.4*5.4/(2*cosh(x)^2)\nx in (-inf, inf)\n"
    out.append(
        make(
            "pt-more-than-bound",
            "sech2/Rosen-Morse/Scarf/Eckart",
            sheet,
            levels,
            "closed form",
            mpf("2.2"),
            bound=5,
            threshold=0.0,
            n=9,
        )
    )
    return out


def scaled():
    """x^4 in SI numbers and at extreme scales: E = (hbar^2/m)^(2/3) lam^(1/3) e_n, e_n of p^2/2 + x^4."""
    out = []
    unit = halves("unit", "H = p^2/2 + x^4\nx in (-inf, inf)\n", 7, 70, [0, 1, 2, 3, 15])
    for name, hbar, m, lam in (
        ("x4-si", "1.054571817e-34", "3.3e-27", "7.1e20"),
        ("x4-tiny", "1", "1e9", "1e-27"),
        ("x4-huge", "1", "1e-9", "1e27"),
        ("x4-hbar", "0.013", "1.7", "0.4"),
    ):
        e = mp.cbrt((mpf(hbar) ** 2 / mpf(m)) ** 2 * mpf(lam))
        sheet = f"hbar = {hbar}\nm = {m}\nlam = {lam}\nH = p^2/(2*m) + lam*x^4\nx in (-inf, inf)\n"
        values = {int(k): e * mpf(v) for k, v in unit["levels"].items()}
        out.append(
            make(
                name, "anharmonic", sheet, values, "scaling of p^2/2 + x^4; " + unit["source"], values[0], digits=unit["digits"]
            )
        )
    return out


def cases():
    """All cases of this theme."""
    return smooth() + straight() + asked() + scaled()
