"""Some consecutive rays of the run: a block, or one that is traced again."""

from lumentrace.engine.emit import find_inside, start
from lumentrace.engine.history import follow, lose
from lumentrace.engine.state import settle
from lumentrace.jit import kernel


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
def trace_rays(world, rows, first, last, rays, hits, tally):
    """Trace rays [first, last) of the run into an emptied tally, each entered in its account."""
    clear(tally)
    ray = rays[0]
    for ray_number in range(first, last):
        start(world, ray, ray_number, tally)
        fault = find_inside(world, ray, hits) if world.sources.immersed[ray.source] else -1
        if fault < 0:
            follow(world, rows, ray, ray_number, hits, tally)
        else:
            lose(tally, rows, ray, ray_number, fault, -1)
        settle(tally, world.sources.group[ray.source])
