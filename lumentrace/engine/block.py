"""One block of rays: the unit of work, of merging and of resuming."""

from lumentrace.engine.emit import start
from lumentrace.engine.history import follow, lose
from lumentrace.engine.state import settle
from lumentrace.engine.sums import TOO_DEEP
from lumentrace.jit import kernel
from lumentrace.world.arrays import BLOCK_RAYS


@kernel
def clear(tally):
    """Empty the tally for the next block."""
    for group in range(tally.account.shape[0]):
        for row in range(tally.account.shape[1]):
            tally.account[group, row] = 0.0
            tally.square[group, row] = 0.0
    for i in range(len(tally.used)):
        tally.used[i] = 0


@kernel
def trace_ray(world, rows, ray, ray_number, hits, tally):
    """Start and follow one ray of the run, and enter its totals in the block's account."""
    if start(world, ray, ray_number, hits):
        follow(world, rows, ray, 0, ray_number, hits, tally)
    else:
        lose(tally, rows, ray, 0, ray_number, TOO_DEEP, -1)
    settle(tally, world.sources.group[ray.source[0]])


@kernel
def trace_block(world, rows, block, ray, hits, tally):
    """Trace the rays of one block into an emptied tally."""
    clear(tally)
    for place in range(BLOCK_RAYS):
        trace_ray(world, rows, ray, block * BLOCK_RAYS + place, hits, tally)
