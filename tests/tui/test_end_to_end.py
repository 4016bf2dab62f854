"""A user's session from end to end in a real pseudo-terminal, with the real engine: what the screen says at every step."""

import pytest
from test_terminal import Session

SHEET = """# A well with a bump (invented)
L = 3.0     # width of the well
bump = 2.0  # height of the bump
H = p^2/2 + bump*exp(-((x - L/2)/0.4)^2)
x in (0, L)
state left = where(x < L/2, sin(2*pi*x/L), 0)
"""
CODE = "import sys; from specterm.__main__ import main; sys.exit(main())"


class User(Session):
    """A session of the program itself."""

    name, text, beside = "bump.sheet", SHEET, True

    def __init__(self, folder, size):
        """Start the program; it looks for sheets in `folder`."""
        super().__init__(folder, size, command=["-c", CODE])

    def does(self, keys, words):
        """Send keys and wait until words stand on the screen."""
        self.child.send(keys)
        self.until(words, 60)


@pytest.mark.parametrize("size", [(80, 24), (120, 40)], ids=["80x24", "120x40"])
def test_a_session_from_start_to_end(tmp_path, size):
    """Open, step, edit, nudge, pin, look at every page, measure, export, save, quit: each step shows on the screen."""
    user = User(tmp_path, size)
    user.until("complete", 60)
    user.until("psi, level 0")
    user.does("k", "psi, level 1")
    user.does("s", "state left  captured")
    user.does("P", "pinned as bump.sheet")
    user.does("p", "Number to nudge")
    user.does("bump\r", "bump = 2.0, step 0.1")
    user.does("]]]", "bump = 2.3, step 0.1")
    user.until("shift")
    user.does("2", "product of the spreads")
    user.does("3", "|<a|x|b>|")
    user.does("4", "dipole x")
    user.does("5", "survival probability")
    user.does("6", "next: H could give")
    user.does("c", "measured H:")
    user.does("7", "dE/dparameter")
    user.does("8l", "Sweep NAME=first:last:how many")
    user.does("1:3:5\r", "bump = 1")
    user.does("1", "psi, level 1")
    user.does("e", "Tab back to the levels")
    user.does("# seen \t", "unsaved")
    user.does("w", "saved bump.sheet")
    assert user.path.read_text() == "# seen " + SHEET.replace("bump = 2.0", "bump = 2.3")
    user.does("E", "Export")
    user.does("levels\r", "Export to the file")
    user.does("\r", "written bump-levels.csv")
    assert (tmp_path / "bump-levels.csv").read_text().startswith("index,value,error,kind")
    user.child.send("q")
    status, raw = user.end()
    assert status == 0
    assert user.sane(raw)


def test_a_session_that_is_killed_comes_back(tmp_path):
    """After a kill in the middle of an edit the next start offers text, pins and notebook, and takes them up."""
    user = User(tmp_path, (100, 30))
    user.until("complete", 60)
    user.does("P", "pinned as")
    user.does("6c", "measured H:")
    user.does("1e", "Tab back")
    user.does("# lost?\r", "# lost?")
    user.until("unsaved")
    files = tmp_path / "state" / "specterm" / "sessions"
    for _ in range(200):
        if any("lost?" in file.read_text() for file in files.glob("*.json")):
            break
        user.until("unsaved")
    user.child.kill(9)
    user.child.wait()
    again = User.__new__(User)
    written = SHEET
    User.__init__(again, tmp_path, (100, 30))
    assert again.path.read_text() == written
    again.until("was kept earlier", 60)
    again.does("r", "# lost?")
    again.does("6", "measured H:")
    again.does("B", "Pins")
    again.until("bump.sheet")
    again.child.send("\t")
    again.does("1q", "has unsaved text")
    again.child.send("d")
    assert again.end()[0] == 0
