"""Any ray again, by its number, with its way through the scene."""

from dataclasses import dataclass

import numpy as np

from lumentrace.engine.merge import path_hash
from lumentrace.engine.state import ARRIVALS, TRAIL
from lumentrace.engine.worker import Worker
from lumentrace.world.world import World

_TRAIL_MAX = 4096  # places of a way that are kept


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
    tally = Worker(world, _TRAIL_MAX).trace(ray_number, ray_number + 1)
    arrivals = []
    first = 0
    for arrival in tally.arrival[: tally.used[ARRIVALS]]:
        last = arrival["last_step"]
        digest = path_hash(arrival["detector"], arrival["source"], tally.step, first, last)
        arrivals.append(Arrival(int(arrival["detector"]), int(digest), int(arrival["marks"])))
        first = last
    return Way(tally.trail[: tally.used[TRAIL]].copy(), tuple(arrivals))
