"""Everything the screen's tests share: a still terminal, an engine that answers at once, an app around it."""

import asyncio
import inspect
import os
import sys
from pathlib import Path

import pytest

os.environ["TEXTUAL_THEME"] = "ansi-dark"
os.environ["TEXTUAL_ANIMATIONS"] = "none"
sys.path.insert(0, str(Path(__file__).parent.parent / "views"))


@pytest.fixture(autouse=True)
def _own_state(tmp_path, monkeypatch):
    """Keep rescued texts of the tests away from the user's."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))


@pytest.hookimpl(tryfirst=True)
def pytest_pyfunc_call(pyfuncitem):
    """Run a test that is a coroutine in an event loop of its own."""
    if not inspect.iscoroutinefunction(pyfuncitem.obj):
        return None
    names = pyfuncitem._fixtureinfo.argnames
    asyncio.run(pyfuncitem.obj(**{name: pyfuncitem.funcargs[name] for name in names}))
    return True


@pytest.fixture(params=[(80, 24), (120, 40)], ids=["80x24", "120x40"])
def size(request):
    """Return the size of the screen."""
    return request.param
