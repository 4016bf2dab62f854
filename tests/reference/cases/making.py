"""Put one case together and hold its values against a second method."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import shooting
from mpmath import mp, mpf
from sheets import Nodes, Sheet


def make(name, family, sheet, levels, source, scale, digits=26, **more):
    """Put a case as in levels.json; `levels` maps index -> number, `scale` is lowest level minus potential's minimum."""
    text = {str(k): decimal(v, digits) for k, v in sorted(levels.items())}
    return {
        "id": name,
        "family": family,
        "sheet": sheet,
        "levels": text,
        "digits": digits,
        "scale": float(mp.nstr(mpf(scale), 4)),
        **more,
        "source": source,
    }


def decimal(value, digits):
    """Decimal text of a number with so many figures."""
    return mp.nstr(mpf(value), digits, strip_zeros=False, min_fixed=-20, max_fixed=30)


def checked(name, family, sheet, levels, source, scale, pieces, floor, tolerance=1e-9, left="wall", right="wall", **more):
    """Make a case with known values, held against Legendre elements in doubles."""
    m = shooting.mesh(Sheet(sheet), pieces, left, right)
    found = shooting.elements(m, max(levels) + 1, floor)
    agree(name, levels, found, scale, tolerance)
    return make(name, family, sheet, levels, source, scale, **more)


def agree(name, levels, found, scale, tolerance):
    """Raise unless elements and values agree relative to the scale."""
    for index, value in levels.items():
        off = abs(found[index] - float(value)) / max(abs(float(value)), float(scale))
        if not off < tolerance:
            raise ArithmeticError(
                f"{name}: level {index} is {decimal(value, 20)}, elements give {found[index]:.15g} ({off:.1e})"
            )


def shot(
    name,
    family,
    sheet,
    indices,
    source,
    pieces,
    floor,
    bottom,
    ends=("wall", "wall"),
    tolerance=1e-9,
    match=None,
    second=None,
    second_ends=None,
    **more,
):
    """Make a case whose values are shot: starts from elements (which give the index), polished with Taylor steps on two."""
    meshes = pair(sheet, pieces, ends, match)
    found = shooting.elements(shooting.mesh(Sheet(sheet), second or pieces, *(second_ends or ends)), max(indices) + 1, floor)
    bottom = lowest(meshes[1]) if bottom is None else bottom
    scale = float(rise(found[0], bottom))
    values, digits = polish(meshes, {k: found[k] for k in indices}, scale)
    agree(name, values, found, scale, tolerance)
    return make(name, family, sheet, values, source, rise(values.get(0, found[0]), bottom), digits=digits, **more)


def mirrored(name, family, sheet, count, source, pieces, floor, bottom, right="wall", tolerance=1e-9, **more):
    """As shot, for a potential even about the left end of the pieces: count even and count odd levels from half the line."""
    values, digits = {}, 24
    for odd, left in enumerate(("free", "wall")):
        meshes = pair(sheet, pieces, (left, right), None, grow_left=False)
        found = shooting.elements(
            meshes[0] if right == "wall" else shooting.mesh(Sheet(sheet), reach(pieces), left, "wall"), count, floor
        )
        bottom = lowest(meshes[1]) if bottom is None else bottom
        part, figures = polish(meshes, dict(enumerate(found)), found[0] - bottom)
        agree(name, part, found, found[0] - bottom, tolerance)
        values.update({2 * k + odd: v for k, v in part.items()})
        digits = min(digits, figures)
    ordered = [values[k] for k in sorted(values)]
    if ordered != sorted(ordered):
        raise ArithmeticError(f"{name}: levels out of order: {[mp.nstr(v, 30) for v in ordered]}")
    return make(name, family, sheet, values, source, values[0] - mpf(bottom), digits=digits, **more)


def rise(value, bottom):
    """Distance from the potential's minimum; the size of the level itself where the minimum is (all but) bottomless."""
    return value - mpf(bottom) if bottom > -1e6 else abs(value)


def lowest(m):
    """Least value of the potential on the steps, sampled."""
    grid = np.linspace(0, 1, 41)
    points = [float(st.s) + float(st.h) * grid for st in m.steps]
    return min(
        float(np.min(m.sheet.at((np.exp(s) if st.log else s).view(Nodes), float)[1]))
        for st, s in zip(m.steps, points, strict=True)
    )


def reach(pieces, far=40):
    """Pieces continued to the right, for elements that cannot end on a plateau."""
    end = float(pieces[-1][1])
    return [*pieces, (end, end + far, 20)]


def pair(sheet, pieces, ends, match, grow_left=True):
    """Return a mesh and a finer one, which also reaches farther where an end of the domain is open."""
    text = Sheet(sheet)
    finer = [(a, b, -(-n * 7 // 5), *how) for a, b, n, *how in pieces]
    inner = text.domain.split("ring")[0]
    if grow_left and "(-inf" in inner and ends[0] == "wall":
        a, b, n, *how = finer[0]
        finer[0] = (float(a) - 0.15 * (float(b) - float(a)), b, n + n // 5, *how)
    if "inf)" in inner and ends[1] == "wall":
        a, b, n, *how = finer[-1]
        finer[-1] = (a, float(b) + 0.15 * (float(b) - float(a)), n + n // 5, *how)
    return [shooting.mesh(text, p, *ends, match=match) for p in (pieces, finer)]


def apart(m, guess, size, known):
    """Find a root near a guess, other than the known ones close by, which are divided out."""
    near = [r for r in known if abs(r - guess) < 1e-6 * size]
    return shooting.root(lambda E: shooting.characteristic(m, E) / mp.fprod(E - r for r in near), guess, size * 1e-11)


def polish(meshes, starts, scale):
    """Roots on two meshes and the figures on which they agree (24 at most; fewer than 15 is an error)."""
    values, digits, near = {}, 24, []
    for index, guess in sorted(starts.items()):
        size = max(abs(guess), scale)
        coarse, fine = (apart(m, guess, size, [r[k] for r in near]) for k, m in enumerate(meshes))
        near = [*(r for r in near if abs(r[0] - guess) < 1e-6 * size), (coarse, fine)]
        off = abs(coarse - fine) / mp.mpf(size)
        digits = min(digits, int(-mp.log10(off)) - 1 if off else 24)
        values[index] = fine
    if digits < 15:
        raise ArithmeticError(f"meshes agree on {digits} figures only: {values}")
    values = dict(zip(sorted(values), sorted(values.values()), strict=True))
    ordered = sorted(values)
    if any(values[a] >= values[b] for a, b in pairwise(ordered)):
        raise ArithmeticError(f"levels out of order: {values}")
    return values, digits
