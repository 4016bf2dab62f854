"""Rings and Bloch phases: cosine potentials in plane waves, layers by transfer matrices, hindered rotors, lattices."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import shooting
from making import agree, make
from mpmath import mp, mpf
from sheets import Sheet

FAM = "periodic/ring"


def plane_waves(unit, phase, harmonics, size, count):
    """Levels of unit (m + phase)^2 + sum_j c_j cos(j theta) for m = -size..size: doubles, then mpmath."""
    m = [mpf(k) + phase for k in range(-size, size + 1)]
    H = np.diag([float(unit * v * v) for v in m]) + sum(
        float(c) / 2 * (np.eye(len(m), k=j) + np.eye(len(m), k=-j)) if j else float(c) * np.eye(len(m))
        for j, c in harmonics.items()
    )
    start, vectors = np.linalg.eigh(H)
    del start
    return [rayleigh(m, unit, harmonics, [mpf(float(v)) for v in vectors[:, k]]) for k in range(count)]


def rayleigh(m, unit, harmonics, v):
    """Rayleigh quotient iteration on the banded matrix (bandwidth: highest harmonic)."""
    value, width = None, max(harmonics)
    for _ in range(12):
        w = [
            (unit * m[i] ** 2 + harmonics.get(0, 0)) * v[i]
            + mp.fsum(c / 2 * v[k] for j, c in harmonics.items() if j for k in (i - j, i + j) if 0 <= k < len(v))
            for i in range(len(v))
        ]
        old, value = value, mp.fdot(v, w) / mp.fdot(v, v)
        if old is not None and abs(value - old) < mpf(10) ** -38 * (1 + abs(value)):
            return value
        v = solve_banded(m, unit, harmonics, value + mpf(10) ** -45, width, v)
        size = mp.sqrt(mp.fdot(v, v))
        v = [x / size for x in v]
    raise ArithmeticError("Rayleigh quotient iteration does not settle")


def solve_banded(m, unit, harmonics, shift, width, v):
    """Solve (H - shift) x = v by elimination without pivoting inside the band."""
    n = len(v)
    rows = [
        {i + j: harmonics[abs(j)] / mpf(2) for j in range(-width, width + 1) if j and abs(j) in harmonics and 0 <= i + j < n}
        for i in range(n)
    ]
    for i in range(n):
        rows[i][i] = unit * m[i] ** 2 + harmonics.get(0, 0) - shift
    x = list(v)
    for i in range(n):
        for k in range(i + 1, min(n, i + width + 1)):
            factor = rows[k].pop(i, 0) / rows[i][i]
            if factor:
                for j, c in rows[i].items():
                    if j > i:
                        rows[k][j] = rows[k].get(j, mpf(0)) - factor * c
                x[k] -= factor * x[i]
    for i in reversed(range(n)):
        x[i] = (x[i] - mp.fsum(c * x[j] for j, c in rows[i].items() if j > i)) / rows[i][i]
    return x


def waves(name, family, sheet, unit, phase, harmonics, indices, bottom, pieces=None, note=""):
    """Make a case in plane waves, at two sizes; held against Legendre elements on the ring where pieces are given."""
    unit, phase, harmonics = mpf(unit), mpf(phase), {j: mpf(c) for j, c in harmonics.items()}
    a, b = (plane_waves(unit, phase, harmonics, size, max(indices) + 1) for size in (40, 50))
    a, b = sorted(a), sorted(b)
    if max(abs(a[k] - b[k]) / (1 + abs(b[k])) for k in indices) > mpf(10) ** -26:
        raise ArithmeticError(f"{name}: sizes differ")
    values = {k: b[k] for k in indices}
    if pieces:
        found = shooting.elements(shooting.mesh(Sheet(sheet), pieces), max(indices) + 1, bottom - 1.0, phase=float(phase))
        agree(name, values, found, b[0] - mpf(bottom), 1e-9)
    return make(
        name,
        family,
        sheet,
        values,
        "plane waves (mpmath), two sizes; second method Legendre elements on the ring" + note,
        b[0] - mpf(bottom),
    )


def cosines():
    """Mathieu rings at several phases, transmons, hindered rotors, optical lattice bands."""
    out = []
    for name, phase, text in (
        ("mathieu-0", 0, "0"),
        ("mathieu-third", mpf(1) / 3, "1/3"),
        ("mathieu-odd", "0.1234", "0.1234"),
        ("mathieu-negative", "-0.41", "-0.41"),
        ("mathieu-large", "2.3", "2.3"),
    ):
        sheet = f"q = 5\nH = p^2 + 2*q*cos(2*x)\nx in ring(0, pi), phase {text}\n"
        out.append(waves(name, FAM, sheet, 4, phase, {1: 10}, [0, 1, 2, 3, 4, 7], -10, [(0, "pi", 24)]))
    sheet = "q = 25\nH = p^2 + 2*q*cos(2*x)\nx in ring(0, 2*pi)\n"
    out.append(waves("mathieu-ring-2pi", FAM, sheet, 1, 0, {2: 50}, [0, 1, 2, 3, 4, 5, 9, 14], -50, [(0, "2*pi", 50)]))
    for name, EJ, EC, ng in (
        ("transmon-20", "20", "1", "0.31"),
        ("transmon-50", "12.5", "0.25", "0.5"),
        ("transmon-neg", "4.1", "1.3", "-0.2"),
        ("box-regime", "0.17", "1", "0.48"),
    ):
        sheet = f"EJ = {EJ}\nEC = {EC}\nng = {ng}\nH = 4*EC*p^2 - EJ*cos(phi)\nphi in ring(0, 2*pi), phase -ng\n"
        out.append(
            waves(name, FAM, sheet, 4 * mpf(EC), -mpf(ng), {1: -mpf(EJ)}, [0, 1, 2, 3, 4, 5], -float(EJ), [(0, "2*pi", 40)])
        )
    sheet = "EJ = 9.7\nEC = 0.41\nng = 0.27\nH = 4*EC*(p - ng)^2 - EJ*cos(phi)\nphi in ring(-pi, pi)\n"
    out.append(waves("transmon-gauge", FAM, sheet, 4 * mpf("0.41"), mpf("-0.27"), {1: mpf("-9.7")}, [0, 1, 2, 3, 4], -9.7))
    F, V3, V6 = mpf("27.64684"), mpf("373.5546"), mpf("-1.3")
    sheet = (
        "F = 27.64684\nV3 = 373.5546\nV6 = -1.3\nH = F*p^2 + V3/2*(1 - cos(3*t)) + V6/2*(1 - cos(6*t))\nt in ring(0, 2*pi)\n"
    )
    out.append(
        waves(
            "torsion-v3-v6",
            FAM,
            sheet,
            F,
            0,
            {0: (V3 + V6) / 2, 3: -V3 / 2, 6: -V6 / 2},
            [0, 1, 2, 3, 4, 5, 6, 7, 8],
            0,
            [(0, "2*pi", 40)],
            "; differences in check-values section 6",
        )
    )
    sheet = "F = 10.684\nV3 = 1024\nH = F*p^2 + V3/2*(1 - cos(3*t))\nt in ring(0, 2*pi)\n"
    out.append(
        waves("torsion-ethane", FAM, sheet, "10.684", 0, {0: 512, 3: -512}, [0, 1, 2, 3, 4, 5, 6, 12], 0, [(0, "2*pi", 50)])
    )
    for name, phase, text in (("optical-20", 0, "0"), ("optical-20-edge", "0.5", "1/2")):
        sheet = f"V0 = 20\nH = p^2 + V0*sin(x)^2\nx in ring(0, pi), phase {text}\n"
        out.append(waves(name, FAM, sheet, 4, phase, {0: 10, 1: -10}, [0, 1, 2, 3, 4], 0, [(0, "pi", 24)]))
    sheet = "H = p^2/2 + 3*cos(x) + 1.1*cos(2*x - 0) - 0.6*cos(4*x)\nx in ring(0, 2*pi), phase 0.07\n"
    out.append(
        waves(
            "three-harmonics",
            FAM,
            sheet.replace(" - 0)", ")"),
            "0.5",
            "0.07",
            {1: 3, 2: "1.1", 4: "-0.6"},
            [0, 1, 2, 3, 4, 9],
            -2.6,
            [(0, "2*pi", 40)],
        )
    )
    return out


def transfer():
    """Rings of layers with jumps in V and in mass: 2 cos(2 pi phase) = trace of the transfer matrix."""
    out = []
    rows = "layers x: thickness, V, m\n  5   0    0.067\n  2   300  0.092\n"
    for name, phase in (("kp-mass-0.2", "0.2"), ("kp-mass-third", "1/3"), ("kp-mass-0.49", "0.49")):
        sheet = f"units: energy meV, length nm, mass m_e\nH = p*(1/(2*m))*p + V\n{rows}x in ring(0, 7), phase {phase}\n"
        out.append(ring(name, sheet, [(0, 5, 5), (5, 7, 4)], phase, [0, 1, 2, 3, 4], 0))
    sheet = (
        "a = 1234.5\nV = where(abs(x - a) < 0.35, 8.5, 0) - where(abs(x - a - 1) < 0.2, 3, 0)\n"
        "H = p^2/2 + V\nx in ring(1233.5, 1236), phase 0.15\n"
    )
    c = mpf("1234.5")
    edges = [c + mpf(v) for v in ("-1", "-0.35", "0.35", "0.8", "1.2", "1.5")]
    out.append(
        ring(
            "kp-two-steps-far",
            sheet,
            [(a, b, 3) for a, b in pairwise(edges)],
            "0.15",
            [0, 1, 2, 3, 4, 8],
            -3,
        )
    )
    sheet = "H = p^2 + 6*abs(x)\nx in ring(-1, 1), phase 0.31\n"
    out.append(ring("zigzag", sheet, [(-1, 0, 8), (0, 1, 8)], "0.31", [0, 1, 2, 3, 7], 0))
    sheet = "H = p*(1 + 0.5*cos(x))*p + sin(x)\nx in ring(0, 2*pi), phase 0.22\n"
    out.append(ring("mass-ring", sheet, [(0, "2*pi", 40)], "0.22", [0, 1, 2, 3, 7], -1))
    return out


def ring(name, sheet, pieces, phase, indices, bottom):
    """Roots of trace(E) = 2 cos(2 pi phase) on two meshes, from elements on the ring."""
    text = Sheet(sheet)
    angle = text.number(phase)
    meshes = [shooting.mesh(text, [(a, b, n * k) for a, b, n in pieces]) for k in (2, 3)]
    found = shooting.elements(meshes[0], max(indices) + 1, bottom - 1.0, phase=float(angle))
    values, target = {}, 2 * mp.cos(2 * mp.pi * angle)
    for k in indices:
        size = max(abs(found[k]), found[0] - bottom)
        coarse, values[k] = (
            shooting.root(lambda E, m=m: shooting.trace(m, E) - target, found[k], size * 1e-11) for m in meshes
        )
        if abs(coarse - values[k]) > size * mpf(10) ** -24:
            raise ArithmeticError(f"{name}: meshes differ at level {k}")
    agree(name, values, found, found[0] - bottom, 1e-9 if abs(float(pieces[0][0])) < 100 else 1e-7)
    return make(
        name,
        FAM,
        sheet,
        values,
        "trace of the transfer matrix (mpmath), two meshes; second method Legendre elements on the ring",
        values[0] - bottom,
        digits=23,
    )


def lattices():
    """Integer coordinates: open chain, angular momentum chain, one impurity on an endless chain."""
    out = []
    sheet = "t = 1.3\nH = -t*(S + dagger(S)) + 0.4\nn in lattice(1, 20)\n"
    levels = {k: mpf("0.4") - 2 * mpf("1.3") * mp.cos((k + 1) * mp.pi / 21) for k in (0, 1, 2, 9, 19)}
    out.append(make("chain-20", "lattice", sheet, levels, "closed form -2t cos(k pi/(N + 1))", mpf("2.58")))
    sheet = "j = 6\nA = S*sqrt((j + n + 1)*(j - n))\nH = (A + dagger(A))/2 + 0.75*n\nn in lattice(-6, 6)\n"
    levels = {k: mpf("1.25") * (k - 6) for k in range(13)}
    out.append(
        make("spin-6", "lattice", sheet, levels, "closed form: a rotated angular momentum, sqrt(1 + 0.75^2) m", mpf("7.5"))
    )
    return out


def cases():
    """All cases of this theme."""
    return cosines() + transfer() + lattices()
