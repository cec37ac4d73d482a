"""What a trace leaves behind: plain arrays of sums, unlabelled, without errors.

Every array that ends in an axis of 64 holds sums over the blocks of each batch (block number
modulo 64). A ray carries its source's flux divided by the source's rays in a block, so that one
block estimates the whole study: divide a batch sum by `rounds` to have the batch's estimate; the
run's estimate is the mean over the 64 batches.
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from lumentrace.models.events import EVENTS

STEPS_MAX = 48  # steps of a path that are kept; a longer path is counted in "other"
KEPT_RAYS = 8  # ray numbers kept of each path, to be traced again for pictures
REPEATS_MAX = 15  # what-if sums tell 1..15 passes apart

# Why a ray could not be followed (column `reason` of `lost`).
CUT_OFF, TOO_DEEP, TOO_MANY_AT_ONCE, NOT_INSIDE, STUCK = range(5)
REASONS = (
    "more events than events_max",
    "inside more transparent parts at once than the engine holds",
    "more parts meet in one place than the engine holds",
    "leaves a part that it is not inside; the mesh may be open there",
    "crosses more hidden surfaces and detectors in a row than there can be",
)


def what_if_keys(n_tags: int, n_parts: int) -> int:
    """Keys of the what-if sums: (tag, event), tags, parts."""
    return n_tags * (len(EVENTS) + 1) + n_parts


class AccountRows(NamedTuple):
    """Where things stand along the account's axis of rows; `count` is the length of the axis.

    tags, then the bulk of each part, the bulk of the surroundings, the whole of each part (its
    tags and its bulk together, so these repeat what stands before), then the study's five.
    """

    bulk: int
    surroundings: int
    part: int
    detected: int
    escaped: int
    cut_off: int
    unresolved: int
    sampling: int
    count: int


def account_rows(n_tags: int, n_parts: int) -> AccountRows:
    """The rows for so many tags and parts; tag i is row i."""
    study = n_tags + 2 * n_parts + 1
    return AccountRows(
        bulk=n_tags,
        surroundings=n_tags + n_parts,
        part=n_tags + n_parts + 1,
        detected=study,
        escaped=study + 1,
        cut_off=study + 2,
        unresolved=study + 3,
        sampling=study + 4,
        count=study + 5,
    )


def step_code(tag: int, event: int, run: int) -> int:
    """A step of a path: tag (row of Tags), event, run length 1, 2 or 3 (3 or more)."""
    return (tag << 8) | (event << 4) | run


def step_parts(code: int) -> tuple[int, int, int]:
    """The inverse of `step_code`."""
    return code >> 8, (code >> 4) & 15, code & 15


@dataclass
class PathSums:
    """The ledger: one row a path, in the order in which block order met them first."""

    detector: np.ndarray  # (R,) int32
    source: np.ndarray  # (R,) int32
    hash: np.ndarray  # (R,) uint64
    n_steps: np.ndarray  # (R,) int32
    step: np.ndarray  # (R, STEPS_MAX) int64, see step_code
    run_sum: np.ndarray  # (R, STEPS_MAX) float64 sum of w times the true length of a step's run
    batch: np.ndarray  # (R, 64) float64
    square: np.ndarray  # (R,) float64 sum over rays of (the ray's total here)^2
    count: np.ndarray  # (R,) int64 arrivals
    optical: np.ndarray  # (R,) float64 sum of w times optical length, relative to air
    group: np.ndarray  # (R,) float64 sum of w times group length, relative to air
    reflections: np.ndarray  # (R,) float64 sum of w times number of `reflect` on the whole path
    scatters: np.ndarray  # (R,) float64 sum of w times number of scatter and scatter_through
    ray: np.ndarray  # (R, KEPT_RAYS) int64 first rays on this path, -1: none
    other: np.ndarray  # (D, G, 64) float64 arrivals that found the table full or the path too long
    other_count: np.ndarray  # (D, G) int64


@dataclass
class Sums:
    """D detectors, G source groups, C cells of all detectors, A account rows, K what-if keys."""

    rounds: int  # blocks = 64 * rounds, rays = 65536 * rounds
    emitted: np.ndarray  # (G,) float64 W, exact: not sampled
    account: np.ndarray  # (G, A, 64) float64 W, rows by account_rows
    account_square: np.ndarray  # (G, A) float64 sum over rays of (the ray's total)^2
    flux: np.ndarray  # (D, G, 64) float64 response x W
    flux_square: np.ndarray  # (D, G) float64
    flux_count: np.ndarray  # (D, G) int64 arrivals
    flux_most: np.ndarray  # (D,) int64 most arrivals of one ray
    cell_most: np.ndarray  # (D,) int64 most arrivals of one ray in one cell
    cell_batch: np.ndarray | None  # (G, C, 64) float64, or None where map_memory is too small; then
    cell_half: np.ndarray  # (2, G, C) float64 sums over even and over odd batches (always there)
    cell_block_square: np.ndarray | None  # (2, G, C) float64 sums over the blocks of even and of
    #   odd batches of (the block's sum)^2
    cell_square: np.ndarray  # (G, C) float64 sum over rays of (the ray's total in the cell)^2
    paths: PathSums
    what_if: np.ndarray  # (D, G, 64, K, REPEATS_MAX + 2) float64: sum of w for k = 1..15, then of
    #   w and of w k beyond 15. Keys: [tag * len(EVENTS) + event | tags | parts]; the last two count
    #   all events but through and bulk
    lost: np.ndarray  # (L,) structured: ray, reason, weight, x, y, z, tag (-1: none); bounded
    lost_count: int  # all of them, kept or not


LOST = np.dtype(
    [
        ("ray", "i8"),
        ("reason", "i4"),  # index in REASONS
        ("weight", "f8"),
        ("x", "f8"),
        ("y", "f8"),
        ("z", "f8"),
        ("tag", "i4"),  # of the face where it was lost, -1: none
    ],
    align=True,
)  # fmt: skip
LOST_KEPT = 1000
