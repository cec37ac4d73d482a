"""What the engine keeps of a ray while it follows it, and of a block while it traces it."""

from typing import NamedTuple

import numpy as np

from lumentrace.engine.query import HITS_MAX
from lumentrace.engine.sums import LOST_KEPT, STEPS_MAX, account_rows
from lumentrace.jit import kernel
from lumentrace.models.events import EVENTS

BRANCHES = 1  # depth of the stack of branches of a ray: one, since nothing splits yet
INSIDE_MAX = 16  # transparent bodies that a ray can be inside at once


class Ray(NamedTuple):
    """A ray: a stack of branches, one row each. Reset by `start`, changed by the engine alone."""

    source: np.ndarray  # (BRANCHES,) int32
    number: np.ndarray  # (BRANCHES,) int64 within the source
    wavelength: np.ndarray  # (BRANCHES,) float64 nm
    origin: np.ndarray  # (BRANCHES, 3) float64
    direction: np.ndarray  # (BRANCHES, 3) float64 unit
    weight: np.ndarray  # (BRANCHES,) float64 W
    optical: np.ndarray  # (BRANCHES,) float64 optical length, relative to air
    group: np.ndarray  # (BRANCHES,) float64 group length, relative to air
    events: np.ndarray  # (BRANCHES,) int64 surface events so far
    inside: np.ndarray  # (BRANCHES, INSIDE_MAX) int32 transparent bodies that it is in
    n_inside: np.ndarray  # (BRANCHES,) int32
    after: np.ndarray  # (BRANCHES, INSIDE_MAX) int32 as `inside`, once it is through the surface
    n_after: np.ndarray  # (BRANCHES,) int32
    face: np.ndarray  # (BRANCHES,) int32 face that it leaves, -1: none
    side: np.ndarray  # (BRANCHES,) float64 side of that face, +1 or -1
    fresh: np.ndarray  # (BRANCHES,) bool: it has just been emitted by that face
    skipped: np.ndarray  # (BRANCHES, HITS_MAX) int32 other primitives of the last event
    n_skipped: np.ndarray  # (BRANCHES,) int32
    clear: np.ndarray  # (BRANCHES,) int32 face of the dry gap that it is in, the clear one if any, -1: no gap
    cover: np.ndarray  # (BRANCHES,) int32 face on the gap's other side: opaque, or of a sheet
    step: np.ndarray  # (BRANCHES, STEPS_MAX) int64 tag << 4 | event, runs collapsed
    run: np.ndarray  # (BRANCHES, STEPS_MAX) int32 length of each step's run
    n_steps: np.ndarray  # (BRANCHES,) int32; more than STEPS_MAX: the path is too long to keep
    reflections: np.ndarray  # (BRANCHES,) int32
    scatters: np.ndarray  # (BRANCHES,) int32
    repeats: np.ndarray  # (BRANCHES, T * EVENTS) int32 how often each (tag, event) was met
    met: np.ndarray  # (BRANCHES, T * EVENTS) int32 the keys that were met
    n_met: np.ndarray  # (BRANCHES,) int32


def new_ray(n_tags: int) -> Ray:
    """Scratch for the rays of one thread."""
    b, keys = BRANCHES, n_tags * len(EVENTS)
    return Ray(
        source=np.zeros(b, np.int32),
        number=np.zeros(b, np.int64),
        wavelength=np.zeros(b),
        origin=np.zeros((b, 3)),
        direction=np.zeros((b, 3)),
        weight=np.zeros(b),
        optical=np.zeros(b),
        group=np.zeros(b),
        events=np.zeros(b, np.int64),
        inside=np.zeros((b, INSIDE_MAX), np.int32),
        n_inside=np.zeros(b, np.int32),
        after=np.zeros((b, INSIDE_MAX), np.int32),
        n_after=np.zeros(b, np.int32),
        face=np.zeros(b, np.int32),
        side=np.zeros(b),
        fresh=np.zeros(b, np.bool_),
        skipped=np.zeros((b, HITS_MAX), np.int32),
        n_skipped=np.zeros(b, np.int32),
        clear=np.zeros(b, np.int32),
        cover=np.zeros(b, np.int32),
        step=np.zeros((b, STEPS_MAX), np.int64),
        run=np.zeros((b, STEPS_MAX), np.int32),
        n_steps=np.zeros(b, np.int32),
        reflections=np.zeros(b, np.int32),
        scatters=np.zeros(b, np.int32),
        repeats=np.zeros((b, keys), np.int32),
        met=np.zeros((b, keys), np.int32),
        n_met=np.zeros(b, np.int32),
    )


class Tally(NamedTuple):
    """What one block adds up and lists; its lists are merged into the sums in block order."""

    account: np.ndarray  # (G, A) float64 sums of the block
    square: np.ndarray  # (G, A) float64 sums over rays of (the ray's total)^2
    ray_total: np.ndarray  # (A,) float64 of the ray that is being followed
    touched: np.ndarray  # (A,) int32 rows of ray_total that are not zero
    n_touched: np.ndarray  # (1,) int64
    used: np.ndarray  # (5,) int64 rows in use: arrivals, steps, keys, lost, trail
    # One row an arrival at a detector:
    ray: np.ndarray  # (N,) int64 number of the ray in the run
    detector: np.ndarray  # (N,) int32
    source: np.ndarray  # (N,) int32
    cell: np.ndarray  # (N,) int64 among the cells of all detectors
    amount: np.ndarray  # (N,) float64 weight x response
    optical: np.ndarray  # (N,) float64
    group: np.ndarray  # (N,) float64
    reflections: np.ndarray  # (N,) int32
    scatters: np.ndarray  # (N,) int32
    marks: np.ndarray  # (N,) int64 places of the ray's trail up to this arrival
    last_step: np.ndarray  # (N,) int64 end of its steps in `step`; they start where the last ended
    too_long: np.ndarray  # (N,) bool: the path has more steps than are kept
    last_key: np.ndarray  # (N,) int64 end of its keys in `key`
    step: np.ndarray  # (N_steps,) int64
    run: np.ndarray  # (N_steps,) int32
    key: np.ndarray  # (N_keys,) int32 tag * EVENTS + event
    repeats: np.ndarray  # (N_keys,) int32
    # Rays that could not be followed to their end:
    lost_ray: np.ndarray  # (LOST_KEPT,) int64
    lost_reason: np.ndarray  # (LOST_KEPT,) int32
    lost_weight: np.ndarray  # (LOST_KEPT,) float64
    lost_place: np.ndarray  # (LOST_KEPT, 3) float64
    lost_tag: np.ndarray  # (LOST_KEPT,) int32
    # The way of a ray that is traced again; without rows where none is wanted:
    trail: np.ndarray  # (N_trail, 3) float64


ARRIVALS, STEPS, KEYS, LOST, TRAIL = range(5)


def new_tally(n_groups: int, n_tags: int, n_parts: int, room: int, trail: int = 0) -> Tally:
    """Scratch for one block with room for so many arrivals."""
    rows = account_rows(n_tags, n_parts).count
    return Tally(
        account=np.zeros((n_groups, rows)),
        square=np.zeros((n_groups, rows)),
        ray_total=np.zeros(rows),
        touched=np.zeros(rows, np.int32),
        n_touched=np.zeros(1, np.int64),
        used=np.zeros(5, np.int64),
        ray=np.zeros(room, np.int64),
        detector=np.zeros(room, np.int32),
        source=np.zeros(room, np.int32),
        cell=np.zeros(room, np.int64),
        amount=np.zeros(room),
        optical=np.zeros(room),
        group=np.zeros(room),
        reflections=np.zeros(room, np.int32),
        scatters=np.zeros(room, np.int32),
        marks=np.zeros(room, np.int64),
        last_step=np.zeros(room, np.int64),
        too_long=np.zeros(room, np.bool_),
        last_key=np.zeros(room, np.int64),
        step=np.zeros(8 * room, np.int64),
        run=np.zeros(8 * room, np.int32),
        key=np.zeros(8 * room, np.int32),
        repeats=np.zeros(8 * room, np.int32),
        lost_ray=np.zeros(LOST_KEPT, np.int64),
        lost_reason=np.zeros(LOST_KEPT, np.int32),
        lost_weight=np.zeros(LOST_KEPT),
        lost_place=np.zeros((LOST_KEPT, 3)),
        lost_tag=np.zeros(LOST_KEPT, np.int32),
        trail=np.zeros((trail, 3)),
    )


@kernel
def deposit(tally, row, weight):
    """Add the weight to a row of the account, for the ray that is being followed."""
    if tally.ray_total[row] == 0.0 and weight != 0.0:
        tally.touched[tally.n_touched[0]] = row
        tally.n_touched[0] += 1
    tally.ray_total[row] += weight


@kernel
def settle(tally, group):
    """Enter the ray's totals in the block's account, and forget them."""
    for i in range(tally.n_touched[0]):
        row = tally.touched[i]
        total = tally.ray_total[row]
        tally.account[group, row] += total
        tally.square[group, row] += total * total
        tally.ray_total[row] = 0.0
    tally.n_touched[0] = 0
