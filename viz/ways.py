"""The strongest paths to a detector, with the ways of some of their rays through the scene."""

from dataclasses import dataclass

import numpy as np

from lumentrace.analysis.ledger import PathRow, paths
from lumentrace.engine.merge import path_hash
from lumentrace.engine.retrace import retrace
from lumentrace.engine.state import STEP
from lumentrace.models.events import EVENTS
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
    detector, path = world.detector_names.index(row.detector), _hash(world, row)
    for ray in row.rays[:_WAYS]:
        way = retrace(world, ray).up_to(detector, path)
        if way is not None:
            yield way


def _hash(world: World, row: PathRow) -> int:
    """What the engine calls this path."""
    steps = np.zeros(len(row.steps), STEP)
    for step, (place, event) in zip(steps, row.steps, strict=True):
        name, _, run = event.partition(" x")
        step["step"] = (world.tag_names.index(place) << 4) | EVENTS.index(name)
        step["run"] = int(run.rstrip("+") or 1)
    detector, source = (
        world.detector_names.index(row.detector),
        world.source_names.index(row.source),
    )
    return int(path_hash(detector, source, steps, 0, len(steps)))
