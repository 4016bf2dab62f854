"""Put one case together and hold its values against a second method."""

from __future__ import annotations

import shooting
from mpmath import mp, mpf
from sheets import Sheet


def make(name, family, sheet, levels, source, scale, digits=26, **more):
    """A case in the format of levels.json; `levels` maps index -> number, `scale` is lowest level minus potential's minimum."""
    text = {str(k): decimal(v, digits) for k, v in sorted(levels.items())}
    return {"id": name, "family": family, "sheet": sheet, "levels": text, "digits": digits,
            "scale": float(mp.nstr(mpf(scale), 4)), **more, "source": source}


def decimal(value, digits):
    """Decimal text of a number with so many figures."""
    return mp.nstr(mpf(value), digits, strip_zeros=False, min_fixed=-20, max_fixed=30)


def checked(name, family, sheet, levels, source, scale, pieces, floor, tolerance=1e-9, left="wall", right="wall", **more):
    """A case with known values, held against Legendre elements in doubles."""
    m = shooting.mesh(Sheet(sheet), pieces, left, right)
    found = shooting.elements(m, max(levels) + 1, floor)
    agree(name, levels, found, scale, tolerance)
    return make(name, family, sheet, levels, source, scale, **more)


def agree(name, levels, found, scale, tolerance):
    """Raise unless elements and values agree relative to the scale."""
    for index, value in levels.items():
        off = abs(found[index] - float(value)) / max(abs(float(value)), float(scale))
        if not off < tolerance:
            raise ArithmeticError(f"{name}: level {index} is {decimal(value, 20)}, elements give {found[index]:.15g} ({off:.1e})")


def shot(name, family, sheet, indices, source, pieces, floor, bottom, ends=("wall", "wall"), tolerance=1e-9, match=None, element_pieces=None, element_ends=None, **more):
    """A case whose values are shot: starts from elements (which give the index), polished with Taylor steps on two meshes."""
    text = Sheet(sheet)
    m = shooting.mesh(text, pieces, *ends, match=match)
    found = shooting.elements(shooting.mesh(text, element_pieces or pieces, *(element_ends or ends)), max(indices) + 1, floor)
    finer = [(a, b, -(-n * 7 // 5), *how) for a, b, n, *how in pieces]
    scale = found[0] - bottom
    values, digits = polish([m, shooting.mesh(text, finer, *ends, match=match)], {k: found[k] for k in indices}, scale)
    agree(name, values, found, scale, tolerance)
    return make(name, family, sheet, values, source, values.get(0, found[0]) - bottom, digits=digits, **more)


def polish(meshes, starts, scale):
    """Roots on two meshes and the figures on which they agree (24 at most; fewer than 15 is an error)."""
    values, digits = {}, 24
    for index, guess in starts.items():
        size = max(abs(guess), scale)
        coarse, fine = (shooting.root(lambda E, m=m: shooting.characteristic(m, E), guess, size * 1e-11) for m in meshes)
        off = abs(coarse - fine) / mp.mpf(size)
        digits = min(digits, int(-mp.log10(off)) - 1 if off else 24)
        values[index] = fine
    if digits < 15:
        raise ArithmeticError(f"meshes agree on {digits} figures only: {values}")
    ordered = sorted(values)
    if any(values[a] >= values[b] for a, b in zip(ordered, ordered[1:], strict=False)):
        raise ArithmeticError(f"levels out of order: {values}")
    return values, digits
