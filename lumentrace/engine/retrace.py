"""Any ray again, by its number, with its way through the scene."""

from dataclasses import dataclass

import numpy as np

from lumentrace.engine.block import trace_rays
from lumentrace.engine.merge import path_hash
from lumentrace.engine.query import new_hits
from lumentrace.engine.state import ARRIVALS, TRAIL, new_rays, new_tally
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
    rays, hits = new_rays(), new_hits()
    tally = new_tally(arrays.settings.groups, n_tags, n_parts, _ROOM, _TRAIL_MAX)
    rows = account_rows(n_tags, n_parts)
    trace_rays(arrays, rows, ray_number, ray_number + 1, rays, hits, tally)
    arrivals = []
    first = 0
    for i in range(min(int(tally.used[ARRIVALS]), _ROOM)):
        arrival = tally.arrival[i]
        digest = path_hash(
            arrival["detector"], arrival["source"], tally.step, first, arrival["last_step"]
        )
        arrivals.append(Arrival(int(arrival["detector"]), int(digest), int(arrival["marks"])))
        first = arrival["last_step"]
    return Way(tally.trail[: tally.used[TRAIL]].copy(), tuple(arrivals))
