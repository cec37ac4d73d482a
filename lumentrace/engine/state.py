"""What the engine keeps of a ray while it follows it, and of a block while it traces it."""

from typing import NamedTuple

import numpy as np

from lumentrace.engine.query import HITS_MAX
from lumentrace.engine.sums import LOST, LOST_KEPT, STEPS_MAX, account_rows
from lumentrace.jit import kernel
from lumentrace.models.events import EVENTS

BRANCHES = 1  # depth of the stack of branches of a ray: one, since nothing splits yet
INSIDE_MAX = 16  # transparent bodies that a ray can be inside at once


RAY = np.dtype(
    [
        ("source", "i4"),
        ("number", "i8"),  # within the source
        ("branch", "i4"),  # number of the branch; a child never uses its parent's random numbers
        ("wavelength", "f8"),  # nm
        ("origin", "f8", (3,)),
        ("direction", "f8", (3,)),  # unit
        ("weight", "f8"),  # W
        ("optical", "f8"),  # optical length, relative to air
        ("group", "f8"),  # group length, relative to air
        ("events", "i8"),  # surface events so far
        ("inside", "i4", (INSIDE_MAX,)),  # transparent bodies that it is in
        ("n_inside", "i4"),
        ("after", "i4", (INSIDE_MAX,)),  # the same, once it is through the surface
        ("n_after", "i4"),
        ("face", "i4"),  # face that it leaves, -1: none
        ("side", "f8"),  # side of that face: +1 on the side of the normal, -1 behind it
        ("fresh", "?"),  # it comes out of that face, emitted or through a sheet
        ("skipped", "i4", (HITS_MAX,)),  # other primitives of the last event
        ("n_skipped", "i4"),
        ("near", "i4"),  # face of the dry gap that it is in: the clear one if any; -1: no gap
        ("far", "i4"),  # the gap's other face, opaque or of a sheet; `side` is its side there
        ("step", "i8", (STEPS_MAX,)),  # tag << 4 | event, runs collapsed
        ("run", "i4", (STEPS_MAX,)),  # length of each step's run
        ("n_steps", "i4"),  # more than STEPS_MAX: the path is too long to keep
        ("reflections", "i4"),
        ("scatters", "i4"),
        ("n_met", "i4"),  # see Tally.met
    ],
    align=True,
)  # fmt: skip

ARRIVAL = np.dtype(
    [
        ("ray", "i8"),  # number of the ray in the run
        ("detector", "i4"),
        ("source", "i4"),
        ("cell", "i8"),  # among the cells of all detectors
        ("amount", "f8"),  # weight x response
        ("optical", "f8"),
        ("group", "f8"),
        ("reflections", "i4"),
        ("scatters", "i4"),
        ("marks", "i8"),  # places of the ray's trail up to here
        ("last_step", "i8"),  # end of its steps in the list; they start where the last ones ended
        ("last_key", "i8"),  # end of its keys in the list
        ("too_long", "?"),  # the path has more steps than are kept
    ],
    align=True,
)  # fmt: skip
STEP = np.dtype([("step", "i8"), ("run", "i4")], align=True)
KEY = np.dtype([("key", "i4"), ("repeats", "i4")], align=True)  # tag * EVENTS + event


class Tally(NamedTuple):
    """What one block adds up and lists; its lists are merged into the sums in block order."""

    account: np.ndarray  # (G, A) float64 sums of the block
    square: np.ndarray  # (G, A) float64 sums over rays of (the ray's total)^2
    ray_total: np.ndarray  # (A,) float64 of the ray that is being followed
    touched: np.ndarray  # (A,) int32 rows of ray_total that are not zero
    repeats: np.ndarray  # (BRANCHES, T * EVENTS) int32 how often a branch met each (tag, event)
    met: np.ndarray  # (BRANCHES, T * EVENTS) int32 the keys that it met, ray.n_met of them
    used: np.ndarray  # (6,) int64 rows in use, by the numbers below
    arrival: np.ndarray  # (N,) ARRIVAL
    step: np.ndarray  # (N_steps,) STEP
    key: np.ndarray  # (N_keys,) KEY
    lost: np.ndarray  # (LOST_KEPT,) sums.LOST: rays that could not be followed to their end
    trail: np.ndarray  # (N_trail, 3) float64 way of a ray that is traced again, if it is wanted


ARRIVALS, STEPS, KEYS, LOSSES, TRAIL, TOUCHED = range(6)


def new_rays() -> np.ndarray:
    """The stack of branches of a ray: (BRANCHES,) RAY."""
    return np.zeros(BRANCHES, RAY)


def new_tally(n_groups: int, n_tags: int, n_parts: int, room: int, trail: int = 0) -> Tally:
    """Scratch for one block with room for so many arrivals, and places of a trail."""
    rows, keys = account_rows(n_tags, n_parts).count, n_tags * len(EVENTS)
    return Tally(
        account=np.zeros((n_groups, rows)),
        square=np.zeros((n_groups, rows)),
        ray_total=np.zeros(rows),
        touched=np.zeros(rows, np.int32),
        repeats=np.zeros((BRANCHES, keys), np.int32),
        met=np.zeros((BRANCHES, keys), np.int32),
        used=np.zeros(6, np.int64),
        arrival=np.zeros(room, ARRIVAL),
        step=np.zeros(8 * room, STEP),
        key=np.zeros(8 * room, KEY),
        lost=np.zeros(LOST_KEPT, LOST),
        trail=np.zeros((trail, 3)),
    )


@kernel
def deposit(tally, row, weight):
    """Add the weight to a row of the account, for the ray that is being followed."""
    if tally.ray_total[row] == 0.0 and weight != 0.0:
        tally.touched[tally.used[TOUCHED]] = row
        tally.used[TOUCHED] += 1
    tally.ray_total[row] += weight


@kernel
def settle(tally, group):
    """Enter the ray's totals in the block's account, and forget them."""
    for i in range(tally.used[TOUCHED]):
        row = tally.touched[i]
        total = tally.ray_total[row]
        tally.account[group, row] += total
        tally.square[group, row] += total * total
        tally.ray_total[row] = 0.0
    tally.used[TOUCHED] = 0
