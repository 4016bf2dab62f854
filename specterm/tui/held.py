"""How many levels hold a share of a state."""

from __future__ import annotations

from dataclasses import dataclass

from specterm.tui.pages.page import Stop, Tell
from specterm.tui.solving import Outcome


@dataclass(frozen=True)
class Share:
    """Asks how many levels hold a share of a state."""

    state: str
    share: float

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> tuple[int, float]:
        """Return the number of levels, and the share that they really hold."""
        from specterm.analysis.capture import captured_by  # noqa: PLC0415 - heavy

        spectrum, weights = captured_by(
            outcome.model, self.state, self.share, outcome.request.folder, near=outcome.request.near,
            tolerance=outcome.request.tolerance, should_stop=should_stop,
        )  # fmt: skip
        return len(spectrum.levels), weights.captured
