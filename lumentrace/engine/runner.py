"""Tracing a world: blocks on threads, merged in block order as they come.

At most a bounded window of blocks is in flight, so that memory does not grow with the run.
"""

import os
from collections import deque
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor

import numpy as np

from lumentrace.engine.merge import Totals, merge_block, new_ledger, new_scratch
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
from lumentrace.engine.worker import Worker
from lumentrace.errors import UserError
from lumentrace.world.arrays import BATCHES, BLOCK_RAYS, ROUND_RAYS
from lumentrace.world.world import World

PATHS_MAX = 16384
WHAT_IF_LEAST = 2**30  # bytes that the what-if sums may take however small map_memory is


def _what_if_shape(world: World) -> tuple[int, ...]:
    """Of the what-if sums. Raises UserError where they would take more than there may be."""
    groups, detectors = len(world.group_names), len(world.detector_names)
    keys = what_if_keys(len(world.tag_names), len(world.part_names))
    shape = detectors, groups, BATCHES, keys, REPEATS_MAX + 2
    size = 8.0 * np.prod(shape, dtype=float)
    if size > max(world.scene.trace.map_memory, WHAT_IF_LEAST):
        raise UserError(
            f"{world.scene.path.name}: trace.map_memory: the sums of {groups} groups of sources at "
            f"{detectors} detectors over {len(world.tag_names)} tags take {size / 2**30:.1f} GiB; "
            "give sources that are dimmed together one `group`, or raise map_memory"
        )
    return shape


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
            cell_block_square=np.zeros((2, groups, 0 if kept else cells)),
            cell_square=np.zeros((groups, cells)),
            cell_block=np.zeros((groups, 0 if kept else cells)),
            what_if=np.zeros(_what_if_shape(world)),
            lost=np.zeros(LOST_KEPT, LOST),
            lost_count=np.zeros(1, np.int64),
        )
        self.ledger = new_ledger(detectors, groups, PATHS_MAX)
        self._scratch = new_scratch(detectors, cells, PATHS_MAX, tags, parts)

    def add(self, block: int, tally) -> None:
        """Merge the next block; blocks come in order."""
        arrays = self.world.arrays
        merge_block(
            block, tally, arrays.sources.group, arrays.tags.part, self.totals, self.ledger,
            self._scratch,
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
    idle = [Worker(world) for _ in range(2 * threads)]
    last = planned * BATCHES
    look = 1
    with ThreadPoolExecutor(threads) as pool:
        waiting: deque = deque()
        submitted = 0
        try:
            while sums.blocks < last:
                # Never past the next look: what was traced beyond it would be thrown away.
                limit = min(last, look * BATCHES) if enough else last
                while submitted < limit and idle:
                    worker = idle.pop()
                    first = submitted * BLOCK_RAYS
                    waiting.append((worker, pool.submit(worker.trace, first, first + BLOCK_RAYS)))
                    submitted += 1
                worker, done = waiting.popleft()
                sums.add(sums.blocks, done.result())
                idle.append(worker)
                if progress:
                    progress(sums.blocks * BLOCK_RAYS, planned * ROUND_RAYS)
                if enough and sums.blocks == look * BATCHES:
                    if enough(sums.taken()):
                        break
                    look *= 2
        finally:
            pool.shutdown(wait=True, cancel_futures=True)
    return sums.taken()
