"""Adding the lists of one block to the sums of the run, block after block, on one thread.

The order of all additions is the order of blocks, and within a block that of its rays: the same
bits for any number of threads.
"""

from typing import NamedTuple

import numpy as np

from lumentrace.engine.state import ARRIVALS, LOSSES
from lumentrace.engine.sums import KEPT_RAYS, LOST_KEPT, REPEATS_MAX, STEPS_MAX
from lumentrace.jit import allocating_kernel, kernel
from lumentrace.models.events import BULK, EVENTS, THROUGH
from lumentrace.world.arrays import BATCHES

N_EVENTS = len(EVENTS)
_FNV_OFFSET = np.uint64(0xCBF29CE484222325)
_FNV_PRIME = np.uint64(0x100000001B3)


class Ledger(NamedTuple):
    """Rows of the paths met so far, and an open table of their hashes; see sums.PathSums."""

    slot: np.ndarray  # (power of two,) int32 row + 1 of a hash, 0: free
    rows: np.ndarray  # (1,) int64 rows in use
    hash: np.ndarray
    detector: np.ndarray
    source: np.ndarray
    n_steps: np.ndarray
    step: np.ndarray
    run_sum: np.ndarray
    batch: np.ndarray
    square: np.ndarray
    count: np.ndarray
    optical: np.ndarray
    group: np.ndarray
    reflections: np.ndarray
    scatters: np.ndarray
    ray: np.ndarray
    other: np.ndarray
    other_count: np.ndarray


class Totals(NamedTuple):
    """The sums of the run as plain arrays; see sums.Sums."""

    account: np.ndarray
    account_square: np.ndarray
    flux: np.ndarray
    flux_square: np.ndarray
    flux_count: np.ndarray
    flux_most: np.ndarray
    cell_most: np.ndarray
    cell_batch: np.ndarray  # without cells where batches are not kept
    cell_half: np.ndarray
    cell_block_square: np.ndarray  # without cells where batches are kept
    cell_square: np.ndarray
    cell_block: np.ndarray  # (G, C) float64 of this block, where batches are not kept
    what_if: np.ndarray
    lost: np.ndarray
    lost_count: np.ndarray  # (1,) int64


class OfRay(NamedTuple):
    """What one ray has added to some rows so far, zeros between rays."""

    total: np.ndarray  # (n,) float64
    count: np.ndarray  # (n,) int64
    touched: np.ndarray  # (n,) int64 the rows with a count, in any order


class Scratch(NamedTuple):
    """For `merge_block`; everything is zero between blocks."""

    detector: OfRay
    cell: OfRay
    path: OfRay
    tag_repeats: np.ndarray  # (T,) int64
    part_repeats: np.ndarray  # (P,) int64


@kernel
def path_hash(detector, source, steps, first, last):
    """64-bit FNV-1a digest of a path: detector, source, and each step with its run up to three.

    Fowler, Noll, Vo: the FNV non-cryptographic hash algorithm (RFC 9923), by words, not bytes.
    """
    digest = (_FNV_OFFSET ^ np.uint64(detector)) * _FNV_PRIME
    digest = (digest ^ np.uint64(source)) * _FNV_PRIME
    for i in range(first, last):
        digest = (digest ^ np.uint64(signed_step(steps[i]))) * _FNV_PRIME
        digest ^= digest >> np.uint64(32)
    return digest


@kernel
def signed_step(step):
    """A STEP as it stands in the signature: tag, event, and a run of one, two, or three or more."""
    return (step.step << 4) | min(step.run, 3)


@kernel
def row_of(ledger, detector, source, tally, first, last):
    """Row of a path, made if it is new and there is room; -1: neither."""
    digest = path_hash(detector, source, tally.step, first, last)
    mask = np.uint64(len(ledger.slot) - 1)
    place = digest & mask
    while ledger.slot[place] > 0:
        row = ledger.slot[place] - 1
        if ledger.hash[row] == digest:
            return row
        place = (place + np.uint64(1)) & mask
    row = ledger.rows[0]
    if row == len(ledger.hash):
        return -1
    ledger.rows[0] += 1
    ledger.slot[place] = row + 1
    ledger.hash[row] = digest
    ledger.detector[row] = detector
    ledger.source[row] = source
    ledger.n_steps[row] = last - first
    for i in range(last - first):
        ledger.step[row, i] = signed_step(tally.step[first + i])
    return row


@kernel
def add_to_path(ledger, row, tally, i, first, last, batch):
    """Add arrival i of the block to its path."""
    arrival = tally.arrival[i]
    amount = arrival.amount
    ledger.batch[row, batch] += amount
    ledger.optical[row] += amount * arrival.optical
    ledger.group[row] += amount * arrival.group
    ledger.reflections[row] += amount * arrival.reflections
    ledger.scatters[row] += amount * arrival.scatters
    for k in range(first, last):
        ledger.run_sum[row, k - first] += amount * tally.step[k].run
    n = ledger.count[row]
    if n < KEPT_RAYS:
        ledger.ray[row, n] = arrival.ray
    ledger.count[row] = n + 1


@kernel
def _add_what_if(what_if, key, repeats, amount):
    """Add an arrival to the sums of a key that was met so many times."""
    if repeats <= REPEATS_MAX:
        what_if[key, repeats - 1] += amount
    else:
        what_if[key, REPEATS_MAX] += amount
        what_if[key, REPEATS_MAX + 1] += amount * repeats


@kernel
def add_what_if(what_if, tags_part, tag_repeats, part_repeats, tally, first, last, amount):
    """Add one arrival to the what-if sums of one detector, group and batch.

    tag_repeats, part_repeats: zeros, and zeros again on return.
    """
    n_tags = len(tag_repeats)
    for k in range(first, last):
        key, repeats = tally.key[k].key, tally.key[k].repeats
        _add_what_if(what_if, key, repeats, amount)
        event = key % N_EVENTS
        if event != THROUGH and event != BULK:
            tag_repeats[key // N_EVENTS] += repeats
            part_repeats[tags_part[key // N_EVENTS]] += repeats
    for k in range(first, last):
        tag = tally.key[k].key // N_EVENTS
        if tag_repeats[tag] > 0:
            _add_what_if(what_if, n_tags * N_EVENTS + tag, tag_repeats[tag], amount)
            tag_repeats[tag] = 0
        part = tags_part[tag]
        if part_repeats[part] > 0:
            key = n_tags * (N_EVENTS + 1) + part
            _add_what_if(what_if, key, part_repeats[part], amount)
            part_repeats[part] = 0


@kernel
def _gather(of_ray, n, row, amount):
    """Add to a row of what one ray adds; returns the number of rows touched, n before."""
    if of_ray.count[row] == 0:
        of_ray.touched[n] = row
        n += 1
    of_ray.total[row] += amount
    of_ray.count[row] += 1
    return n


@kernel
def _square_up(of_ray, n, squares):
    """Add the squares of what one ray added to the n touched rows, and forget it."""
    for i in range(n):
        row = of_ray.touched[i]
        squares[row] += of_ray.total[row] * of_ray.total[row]
        of_ray.total[row] = 0.0
        of_ray.count[row] = 0


@allocating_kernel
def merge_block(block, tally, group_of, tags_part, totals, ledger, scratch):
    """Add a block's account and lists to the run's sums.

    group_of: (S,) group of each source. tags_part: (T,) part of each tag. scratch: zeros, and
    zeros again on return.
    """
    batch = block % BATCHES
    for group in range(tally.account.shape[0]):
        for row in range(tally.account.shape[1]):
            totals.account[group, row, batch] += tally.account[group, row]
            totals.account_square[group, row] += tally.square[group, row]
    keeps_batches = totals.cell_batch.shape[1] > 0
    arrivals, n = tally.arrival, tally.used[ARRIVALS]
    first_step = first_key = 0
    n_detectors = n_cells = n_paths = 0  # that the ray has touched
    for i in range(n):
        arrival = arrivals[i]
        d, cell, amount = arrival.detector, arrival.cell, arrival.amount
        group = group_of[arrival.source]
        totals.flux[d, group, batch] += amount
        totals.flux_count[d, group] += 1
        totals.cell_half[batch & 1, group, cell] += amount
        if keeps_batches:
            totals.cell_batch[group, cell, batch] += amount
        else:
            totals.cell_block[group, cell] += amount
        last_step, last_key = arrival.last_step, arrival.last_key
        path = -1
        if not arrival.too_long:
            path = row_of(ledger, d, arrival.source, tally, first_step, last_step)
        if path >= 0:
            add_to_path(ledger, path, tally, i, first_step, last_step, batch)
            n_paths = _gather(scratch.path, n_paths, path, amount)
        else:
            ledger.other[d, group, batch] += amount
            ledger.other_count[d, group] += 1
        n_detectors = _gather(scratch.detector, n_detectors, d, amount)
        n_cells = _gather(scratch.cell, n_cells, cell, amount)
        totals.flux_most[d] = max(totals.flux_most[d], scratch.detector.count[d])
        totals.cell_most[d] = max(totals.cell_most[d], scratch.cell.count[cell])
        add_what_if(
            totals.what_if[d, group, batch], tags_part, scratch.tag_repeats, scratch.part_repeats,
            tally, first_key, last_key, amount,
        )  # fmt: skip
        first_step, first_key = last_step, last_key
        if i + 1 == n or arrivals[i + 1].ray != arrival.ray:
            _square_up(scratch.detector, n_detectors, totals.flux_square[:, group])
            _square_up(scratch.cell, n_cells, totals.cell_square[group])
            _square_up(scratch.path, n_paths, ledger.square)
            n_detectors = n_cells = n_paths = 0
    if not keeps_batches:
        for i in range(n):
            group, cell = group_of[arrivals[i].source], arrivals[i].cell
            total = totals.cell_block[group, cell]
            totals.cell_block_square[batch & 1, group, cell] += total * total
            totals.cell_block[group, cell] = 0.0
    _merge_lost(tally, totals)


@kernel
def _merge_lost(tally, totals):
    """Append the rays that the block lost, as far as there is room."""
    before, lost = totals.lost_count[0], tally.used[LOSSES]
    for i in range(min(lost, LOST_KEPT, LOST_KEPT - before)):
        totals.lost[before + i] = tally.lost[i]
    totals.lost_count[0] = before + lost


def new_ledger(n_detectors: int, n_groups: int, paths_max: int) -> Ledger:
    """Empty rows for at most so many paths."""
    slots = 1 << (2 * paths_max - 1).bit_length()
    p = paths_max
    return Ledger(
        slot=np.zeros(slots, np.int32),
        rows=np.zeros(1, np.int64),
        hash=np.zeros(p, np.uint64),
        detector=np.zeros(p, np.int32),
        source=np.zeros(p, np.int32),
        n_steps=np.zeros(p, np.int32),
        step=np.zeros((p, STEPS_MAX), np.int64),
        run_sum=np.zeros((p, STEPS_MAX)),
        batch=np.zeros((p, BATCHES)),
        square=np.zeros(p),
        count=np.zeros(p, np.int64),
        optical=np.zeros(p),
        group=np.zeros(p),
        reflections=np.zeros(p),
        scatters=np.zeros(p),
        ray=np.full((p, KEPT_RAYS), -1, np.int64),
        other=np.zeros((n_detectors, n_groups, BATCHES)),
        other_count=np.zeros((n_detectors, n_groups), np.int64),
    )


def new_scratch(detectors: int, cells: int, paths_max: int, tags: int, parts: int) -> Scratch:
    """Zeros for so many of each."""

    def of_ray(n):
        return OfRay(np.zeros(n), np.zeros(n, np.int64), np.zeros(n, np.int64))

    return Scratch(
        of_ray(detectors),
        of_ray(cells),
        of_ray(paths_max),
        np.zeros(tags, np.int64),
        np.zeros(parts, np.int64),
    )
