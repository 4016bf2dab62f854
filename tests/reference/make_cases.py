#!/usr/bin/env python3
"""Compute the reference cases beside this file: `make_cases.py [THEME ...]` writes
cases/THEME.json for the themes named (all without).

Values come from closed forms, transcendental equations and Taylor steps in high precision (mpmath), and are held against
a second method where there is one; nothing of specterm is used. Deterministic.
"""

from __future__ import annotations

import importlib
import json
import sys
from pathlib import Path

from mpmath import mp

CASES = Path(__file__).parent / "cases"
THEMES = {"first": "closed", "wells": "wells", "anharmonic": "anharmonic", "sturm": "slp", "rings": "rings", "tables": "tables"}


def main(names):
    """Write the themes named."""
    sys.path.insert(0, str(CASES))
    mp.dps = 60
    for name in names or THEMES:
        cases = importlib.import_module(THEMES[name]).cases()
        (CASES / f"{name}.json").write_text(json.dumps(cases, indent=1) + "\n")
        print(f"{name}: {len(cases)} cases, {sum(len(c['levels']) for c in cases)} levels")


if __name__ == "__main__":
    main(sys.argv[1:])
