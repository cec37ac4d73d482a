"""Tracing a world: blocks on threads, merged in block order as they come.

At most a bounded window of blocks is in flight, so that memory does not grow with the run.
"""

import os
from collections import deque
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from queue import SimpleQueue

import numpy as np

from lumentrace.engine.block import trace_rays
from lumentrace.engine.merge import Totals, merge_block, new_ledger
from lumentrace.engine.query import new_hits
from lumentrace.engine.state import ARRIVALS, KEYS, STEPS, new_rays, new_tally
from lumentrace.engine.sums import (
    LOST,
    LOST_KEPT,
    REPEATS_MAX,
    AccountRows,
    PathSums,
    Sums,
    account_rows,
    what_if_keys,
)
from lumentrace.world.arrays import BATCHES, BLOCK_RAYS, ROUND_RAYS, WorldArrays
from lumentrace.world.world import World

PATHS_MAX = 16384
_ROOM = 4096  # arrivals of a block that the lists hold at first; they grow when it takes more


class _Worker:
    """Scratch for one block at a time."""

    def __init__(self, arrays: WorldArrays, n_parts: int):
        self.arrays = arrays
        self.n_tags, self.n_parts = len(arrays.tags.part), n_parts
        self.rows = account_rows(self.n_tags, n_parts)
        self.rays = new_rays()
        self.hits = new_hits()
        self._make_room(_ROOM)

    def _make_room(self, room: int) -> None:
        self.room = room
        self.tally = new_tally(self.arrays.settings.groups, self.n_tags, self.n_parts, room)

    def trace(self, block: int) -> "_Worker":
        """Trace a block; where the lists were too short, with longer ones again: same numbers."""
        while True:
            trace_rays(
                self.arrays, self.rows, block * BLOCK_RAYS, (block + 1) * BLOCK_RAYS,
                self.rays, self.hits, self.tally,
            )  # fmt: skip
            used = self.tally.used
            need = max(used[ARRIVALS], used[STEPS] / 8, used[KEYS] / 8)
            if need <= self.room:
                return self
            self._make_room(int(2 * need))


class _Sums:
    """The run's sums as they grow."""

    def __init__(self, world: World):
        arrays = world.arrays
        self.world = world
        self.rows: AccountRows = account_rows(len(world.tag_names), len(world.part_names))
        groups, detectors = arrays.settings.groups, len(world.detector_names)
        tags, parts = len(world.tag_names), len(world.part_names)
        cells = int(arrays.detectors.cell_first[-1])
        kept = cells * groups * BATCHES * 8 <= world.scene.trace.map_memory
        self.blocks = 0
        self.totals = Totals(
            account=np.zeros((groups, self.rows.count, BATCHES)),
            account_square=np.zeros((groups, self.rows.count)),
            flux=np.zeros((detectors, groups, BATCHES)),
            flux_square=np.zeros((detectors, groups)),
            flux_count=np.zeros((detectors, groups), np.int64),
            flux_most=np.zeros(detectors, np.int64),
            cell_most=np.zeros(detectors, np.int64),
            cell_batch=np.zeros((groups, cells if kept else 0, BATCHES)),
            cell_half=np.zeros((2, groups, cells)),
            cell_block_square=np.zeros((groups, 0 if kept else cells)),
            cell_square=np.zeros((groups, cells)),
            cell_block=np.zeros((groups, 0 if kept else cells)),
            what_if=np.zeros(
                (detectors, groups, BATCHES, what_if_keys(tags, parts), REPEATS_MAX + 2)
            ),
            lost=np.zeros(LOST_KEPT, LOST),
            lost_count=np.zeros(1, np.int64),
        )
        self.ledger = new_ledger(detectors, groups, PATHS_MAX)
        self._tag_repeats = np.zeros(tags, np.int64)
        self._part_repeats = np.zeros(parts, np.int64)

    def add(self, block: int, tally) -> None:
        """Merge the next block; blocks come in order."""
        arrays = self.world.arrays
        merge_block(
            block, tally, arrays.sources.group, arrays.tags.part, self.totals, self.ledger,
            self._tag_repeats, self._part_repeats,
        )  # fmt: skip
        self.blocks += 1

    def taken(self) -> Sums:
        """What has been summed up; the arrays are shared, the rows of paths are cut to size."""
        totals, ledger = self.totals, self.ledger
        arrays = self.world.arrays
        sources = arrays.sources
        emitted = np.zeros(arrays.settings.groups)
        np.add.at(emitted, sources.group, sources.ray_flux * np.diff(sources.ray_first))
        n = int(ledger.rows[0])
        kept = totals.cell_batch.shape[1] > 0 or totals.cell_half.shape[2] == 0
        n_lost = min(int(totals.lost_count[0]), LOST_KEPT)
        return Sums(
            rounds=self.blocks // BATCHES,
            emitted=emitted,
            account=totals.account,
            account_square=totals.account_square,
            flux=totals.flux,
            flux_square=totals.flux_square,
            flux_count=totals.flux_count,
            flux_most=totals.flux_most,
            cell_most=totals.cell_most,
            cell_batch=totals.cell_batch if kept else None,
            cell_half=totals.cell_half,
            cell_block_square=None if kept else totals.cell_block_square,
            cell_square=totals.cell_square,
            paths=PathSums(
                **{
                    name: getattr(ledger, name)[:n]
                    for name in PathSums.__dataclass_fields__
                    if not name.startswith("other")
                },
                other=ledger.other,
                other_count=ledger.other_count,
            ),
            what_if=totals.what_if,
            lost=totals.lost[:n_lost],
            lost_count=int(totals.lost_count[0]),
        )


def whole_rounds(rays: float) -> int:
    """Rounds of 65,536 rays that hold at least so many rays, and at least one."""
    return max(1, -(-int(rays) // ROUND_RAYS))


def default_threads() -> int:
    """The processors that this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def trace_world(
    world: World,
    rays: float,
    threads: int | None = None,
    progress: Callable[[int, int], None] | None = None,
    enough: Callable[[Sums], bool] | None = None,
) -> Sums:
    """Trace a world with `rays` rays, rounded up to whole rounds of 65,536.

    progress(done, planned) is called as rays are done. enough(sums), where given, is asked at the
    looks at 65,536 x 2^k rays, and ends the trace when it says so. The sums are the same to the
    bit for any number of threads. An exception in either callback, KeyboardInterrupt among them,
    ends all work and is passed on.
    """
    planned = whole_rounds(rays)
    threads = threads or default_threads()
    sums = _Sums(world)
    idle: SimpleQueue = SimpleQueue()
    for _ in range(3 * threads):
        idle.put(_Worker(world.arrays, len(world.part_names)))
    last = planned * BATCHES
    look = 1
    with ThreadPoolExecutor(threads) as pool:
        waiting: deque = deque()
        submitted = 0
        try:
            while sums.blocks < last:
                # Never past the next look: what was traced beyond it would be thrown away.
                limit = min(last, look * BATCHES) if enough else last
                while submitted < limit and len(waiting) < 2 * threads:
                    waiting.append(pool.submit(idle.get().trace, submitted))
                    submitted += 1
                worker = waiting.popleft().result()
                sums.add(sums.blocks, worker.tally)
                idle.put(worker)
                if progress:
                    progress(sums.blocks * BLOCK_RAYS, planned * ROUND_RAYS)
                if enough and sums.blocks == look * BATCHES:
                    if enough(sums.taken()):
                        break
                    look *= 2
        finally:
            pool.shutdown(wait=True, cancel_futures=True)
    return sums.taken()
