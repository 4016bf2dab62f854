"""Run the terminal interface around the fake engine; started by the tests in a pseudo-terminal of its own."""

import os
import sys
from pathlib import Path

sys.path[:0] = [str(Path(__file__).parent), str(Path(__file__).parent.parent / "views")]


def main() -> int:
    """Show the sheet named on the command line."""
    from specterm import tui  # noqa: PLC0415 - the paths are set first

    if not tui.usable():
        print("no terminal")
        return 2
    tui.terminal.settle(os.environ)
    import fake  # noqa: PLC0415 - the environment is settled first

    from specterm.tui import app  # noqa: PLC0415 - as above

    app.BuiltIn = fake.FakeEngine
    if "SPECTERM_TEST_DEFECT" in os.environ:
        app.Specterm.action_view = lambda _: 1 / 0
    path = Path(sys.argv[1])
    return tui.run(path.read_text(), path, tui.Options(glyphs="ascii"))


if __name__ == "__main__":
    sys.exit(main())
