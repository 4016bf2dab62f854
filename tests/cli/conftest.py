"""The fixture that runs commands."""

import pytest
from command_line import Runner


@pytest.fixture
def run(capsys, monkeypatch):
    """Return a function that runs a command and returns status, output and errors."""
    return Runner(capsys, monkeypatch)
