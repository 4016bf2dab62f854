"""Imports flow one way (design.md section 5), also those inside functions and under TYPE_CHECKING; heavy ones come late."""

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent / "specterm"
ORDER = [
    "errors", "stopping", "regular", "arrays", "units", "language", "model", "discrete", "spectrum", "analysis", "session",
    "views",
]  # fmt: skip
"""From the bottom up; each may import what stands before it. `arrays` holds names for types of arrays."""
SHELLS = {"tui", "cli", "__main__"}
FILES = sorted(ROOT.rglob("*.py"))


def part_of(path: Path) -> str:
    """Return the part of the house a file belongs to: its folder below specterm, or its own name."""
    inside = path.relative_to(ROOT)
    return inside.parts[0] if len(inside.parts) > 1 else inside.stem


def imports(path: Path):
    """Return all imports of a file as (dotted name, line, whether it runs when the module is imported)."""
    found = []

    def walk(node, outer):
        for child in ast.iter_child_nodes(node):
            inner = outer and not isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
            if isinstance(child, ast.Import):
                found.extend((alias.name, child.lineno, outer) for alias in child.names)
            elif isinstance(child, ast.ImportFrom):
                assert child.level == 0, f"{path}:{child.lineno}: relative import"
                found.extend((f"{child.module}.{alias.name}", child.lineno, outer) for alias in child.names)
            elif isinstance(child, ast.Call) and ast.unparse(child.func).endswith(("__import__", "import_module")):
                raise AssertionError(f"{path}:{child.lineno}: an import this test cannot see")
            walk(child, inner)

    walk(ast.parse(path.read_text()), True)
    return found


def own_part(name: str) -> str | None:
    """Return the part of specterm an imported name belongs to, or None for other packages."""
    words = name.split(".")
    if words[0] != "specterm":
        return None
    return words[1] if len(words) > 1 else "__init__"


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(ROOT)))
def test_nothing_imports_upwards(path):
    """A file imports only parts that stand below its own; the shells on top import each other only where cli opens the tui."""
    here = part_of(path)
    if here == "__init__":
        allowed = set()
    elif here in SHELLS:
        allowed = {*ORDER, here} | {"cli": {"tui"}, "tui": set(), "__main__": {"cli"}}[here]
    else:
        assert here in ORDER, f"{here} has no place in the order"
        allowed = {here, *ORDER[: ORDER.index(here)]}
    wrong = [(name, row) for name, row, _ in imports(path) if (part := own_part(name)) is not None and part not in allowed]
    assert not wrong


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(ROOT)))
def test_textual_stays_in_the_terminal_interface(path):
    """Only files of the tui import textual or rich, not even inside a function elsewhere."""
    if part_of(path) == "tui":
        return
    assert not [(name, row) for name, row, _ in imports(path) if name.split(".")[0] in {"textual", "rich"}]


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(ROOT)))
def test_heavy_packages_load_late(path):
    """Scipy and plotext are imported inside the functions that need them, so that starting costs nothing."""
    assert not [(name, row) for name, row, first in imports(path) if first and name.split(".")[0] in {"scipy", "plotext"}]


@pytest.mark.parametrize("path", [f for f in FILES if part_of(f) == "cli"], ids=lambda p: str(p.relative_to(ROOT)))
def test_the_command_line_loads_the_screen_only_to_open_it(path):
    """The cli imports the tui inside a function only: levels in a batch job never load textual."""
    assert not [(name, row) for name, row, first in imports(path) if first and own_part(name) == "tui"]
