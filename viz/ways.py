"""The strongest paths to a detector, with the ways of some of their rays through the scene."""

from dataclasses import dataclass

import numpy as np

from lumentrace.analysis.ledger import PathRow, paths
from lumentrace.engine.retrace import retrace
from lumentrace.run.run import Run
from lumentrace.world.world import World

_WAYS = 4  # of a path, more hide one another


@dataclass(frozen=True)
class Drawn:
    """A path, and ways of rays along it, from the source to the detector."""

    row: PathRow
    ways: tuple[np.ndarray, ...]  # (n, 3) each


def strongest(run: Run, world: World, detector: str, number: int) -> list[Drawn]:
    """The strongest paths to a detector, their kept rays traced again."""
    rows = [row for row in paths(run, detector) if row.source is not None][:number]
    return [Drawn(row, tuple(_ways(world, row))) for row in rows]


def _ways(world: World, row: PathRow):
    detector = world.detector_names.index(row.detector)
    for ray in row.rays[:_WAYS]:
        way = retrace(world, ray).up_to(detector, row.hash)
        if way is not None:
            yield way
