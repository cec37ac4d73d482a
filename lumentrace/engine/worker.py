"""Tracing some rays in turn, with lists that grow when they are too short."""

from lumentrace.engine.block import trace_rays
from lumentrace.engine.query import new_hits
from lumentrace.engine.state import ARRIVALS, KEYS, STEPS, Tally, new_rays, new_tally
from lumentrace.engine.sums import account_rows
from lumentrace.world.world import World

ROOM = 4096  # arrivals that the lists hold at first
_LARGE = 16 * ROOM  # lists that have grown beyond this are given back


class Worker:
    """Scratch for one thread. trail: places of a ray's way that are kept, none by default."""

    def __init__(self, world: World, trail: int = 0):
        self._arrays = world.arrays
        self._sizes = world.arrays.settings.groups, len(world.tag_names), len(world.part_names)
        self._rows = account_rows(*self._sizes[1:])
        self._rays, self._hits, self._trail = new_rays(), new_hits(), trail
        self._make_room(ROOM)

    def _make_room(self, room: int) -> None:
        self.room = room
        self.tally = new_tally(*self._sizes, room, self._trail)

    def trace(self, first: int, last: int) -> Tally:
        """Trace rays [first, last) of the run; where the lists were too short, with longer ones
        again: the same numbers. What is returned holds until the next call."""
        if self.room > _LARGE:
            self._make_room(ROOM)
        while True:
            trace_rays(self._arrays, self._rows, first, last, self._rays, self._hits, self.tally)
            used = self.tally.used
            need = max(used[ARRIVALS], used[STEPS] / 8, used[KEYS] / 8)
            if need <= self.room:
                return self.tally
            self._make_room(int(2 * need))
