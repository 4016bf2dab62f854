"""The view of momenta: the density of the chosen level, or of the state weighed, over momentum."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell, subject_of
from specterm.tui.solving import Outcome
from specterm.views.cells import Rows

if TYPE_CHECKING:
    from specterm.analysis.momentum import MomentumDensity


@dataclass(frozen=True)
class Momenta:
    """Asks how a state is spread over momentum."""

    state: str

    def answer(self, outcome: Outcome, _: Stop, __: Tell) -> MomentaFound:
        """Return the density."""
        from specterm.analysis.momentum import momentum_density  # noqa: PLC0415 - heavy
        from specterm.analysis.prepared import prepare  # noqa: PLC0415

        assert outcome.spectrum is not None
        wave = prepare(outcome.model, outcome.spectrum, self.state, outcome.request.folder)
        return MomentaFound(self.state, momentum_density(outcome.model, wave))


@dataclass(frozen=True, eq=False)
class MomentaFound:
    """A density and whose it is."""

    state: str
    density: MomentumDensity


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Momenta | None:
    subject = subject_of(look, outcome)
    return None if subject is None else Momenta(subject)


def _rows(found: MomentaFound, room: Room) -> Rows:
    from specterm.views.momentum_figure import momentum_rows  # noqa: PLC0415 - it brings the engine

    return momentum_rows(found.density, room.width, room.height, room.glyphs, title=f"|phi|^2 of {found.state}")


def _record(found: MomentaFound, _: Room) -> Record:
    density = found.density
    rows = list(zip(density.k.tolist(), density.density.tolist(), strict=True))
    data = {
        "state": found.state, "unit": density.unit, "discrete": density.discrete, "held": density.held,
        "momenta": density.k.tolist(), "density": density.density.tolist(),
    }  # fmt: skip
    return Record(data, ("momentum", "density"), rows)


MOMENTUM = Page("momentum", _inquiry, _rows, _record, "no level: nothing to show")
