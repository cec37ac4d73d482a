"""Any ray again, by its number, with its way through the scene."""

from dataclasses import dataclass

import numpy as np

from lumentrace.engine.block import clear, trace_ray
from lumentrace.engine.merge import path_hash
from lumentrace.engine.query import new_hits
from lumentrace.engine.state import ARRIVALS, TRAIL, new_ray, new_tally
from lumentrace.engine.sums import account_rows
from lumentrace.world.world import World

_TRAIL_MAX = 4096  # places of a way that are kept
_ROOM = 1024


@dataclass(frozen=True)
class Arrival:
    """Where a ray reached a detector."""

    detector: int
    path: int  # hash of the path, as in the ledger
    marks: int  # the way up to here is points[:marks]


@dataclass(frozen=True)
class Way:
    """The way of one ray; what it did is the same as in the run it is a part of."""

    points: np.ndarray  # (n, 3) float64 in the scene's frame and unit, from the source on
    arrivals: tuple[Arrival, ...]

    def up_to(self, detector: int, path: int) -> np.ndarray | None:
        """Points up to the arrival at a detector by a path, None where there is none."""
        for arrival in self.arrivals:
            if arrival.detector == detector and arrival.path == path:
                return self.points[: arrival.marks]
        return None


def retrace(world: World, ray_number: int) -> Way:
    """Trace ray `ray_number` of the run again and note its way."""
    arrays = world.arrays
    n_tags, n_parts = len(world.tag_names), len(world.part_names)
    ray, hits = new_ray(n_tags), new_hits()
    tally = new_tally(arrays.settings.groups, n_tags, n_parts, _ROOM, _TRAIL_MAX)
    clear(tally)
    trace_ray(arrays, account_rows(n_tags, n_parts), ray, ray_number, hits, tally)
    arrivals = []
    first = 0
    for i in range(min(int(tally.used[ARRIVALS]), _ROOM)):
        last = int(tally.last_step[i])
        d, source = int(tally.detector[i]), int(tally.source[i])
        digest = path_hash(d, source, tally.step, tally.run, first, last)
        arrivals.append(Arrival(d, int(digest), int(tally.marks[i])))
        first = last
    return Way(tally.trail[: tally.used[TRAIL]].copy(), tuple(arrivals))
