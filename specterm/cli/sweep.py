"""The verb `sweep`: levels and what follows from them against one parameter, or against two as a map."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, glyphs_of
from specterm.cli.progress import Progress
from specterm.cli.source import Source, overrides
from specterm.errors import SheetError

if TYPE_CHECKING:
    from specterm.analysis.sweep import Sweep, SweepRequest
    from specterm.analysis.sweep_work import Crew


def sweep(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `sweep`."""
    from specterm.analysis.sweep import sweep as swept  # noqa: PLC0415 - heavy
    from specterm.session.records.sweeps import sweep_record  # noqa: PLC0415

    request = request_of(arguments, source)
    with Progress() as progress:
        found = swept(
            request,
            crew=_crew(arguments),
            journal=None if arguments.journal is None else Path(arguments.journal),
            gaps=arguments.gaps,
            progress=progress.tell,
        )
    rough = any("unresolved" in row for row in found.kinds)
    status = int(rough or not found.complete)
    return answered(arguments, sweep_record(found), lambda: _text(arguments, found), status, found.notes)


def request_of(arguments: argparse.Namespace, source: Source) -> SweepRequest:
    """Return what is asked for; SheetError where it cannot be understood."""
    from specterm.analysis.sweep_request import SweepRequest, axis_of, quantity_of  # noqa: PLC0415 - heavy

    return SweepRequest(
        source.text,
        tuple(axis_of(text) for text in arguments.ranges),
        str(source.folder.absolute()),
        tuple(sorted(overrides(arguments.overrides).items())),
        arguments.count,
        arguments.near,
        arguments.tol,
        quantity_of(arguments.quantity, arguments.start or 0),
    )


def _crew(arguments: argparse.Namespace) -> Crew | None:
    """Return who does the work, None for this process."""
    from specterm.analysis.sweep_crews import cluster, processes  # noqa: PLC0415 - only now

    if arguments.cluster is not None:
        if arguments.workers is not None:
            raise SheetError("--workers and --cluster do not go together", mend="a cluster has its own workers")
        return cluster(arguments.cluster)
    return None if arguments.workers in (None, 1) else processes(arguments.workers)


def _text(arguments: argparse.Namespace, found: Sweep) -> str:
    """Return the ends of the sweep, its gaps, and the figure."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.sweep_figure import ends_table, gap_table, map_rows, sweep_rows  # noqa: PLC0415

    glyphs = glyphs_of(arguments.glyphs)
    if len(found.request.axes) == 2:
        return plain(map_rows(found, arguments.width, arguments.level, glyphs))
    drawn = plain(sweep_rows(found, arguments.width, arguments.height, arguments.level, None, glyphs))
    gaps = gap_table(found)
    return "\n".join([ends_table(found), *(["", "smallest gaps", gaps] if gaps else []), "", drawn])
