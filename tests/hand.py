"""Rays by hand: origins and directions of one's own through the engine, in a world that was built.

No source is asked; each ray starts in what its origin lies in, with a weight of 1 W.
"""

from concurrent.futures import ThreadPoolExecutor
from typing import NamedTuple

import numpy as np

from lumentrace.engine.block import clear
from lumentrace.engine.emit import begin, find_inside
from lumentrace.engine.history import follow
from lumentrace.engine.query import closest_hit, new_hits
from lumentrace.engine.state import LOSSES, new_rays, new_tally, settle
from lumentrace.engine.sums import LOST_KEPT, account_rows
from lumentrace.jit import kernel
from lumentrace.kernels import rng, sampling
from lumentrace.kernels.vectors import set_vector

_ROOM = 16  # arrivals that are listed; what is beyond is only counted


class Fate(NamedTuple):
    """Where the weight of the rays went, in W, and which rays were lost."""

    emitted: float
    absorbed: float  # at faces and in media
    detected: float
    escaped: float
    cut_off: float
    unresolved: float
    sampling: float
    lost: tuple[int, ...]  # row of the rays; the first of each thread

    @property
    def open(self) -> float:
        """What the account does not explain, as a share of what was emitted."""
        return abs(self.emitted - sum(self[1:-1])) / self.emitted


@kernel
def _begin(world, origin, direction, i, ray, hits, tally):
    """Start a ray; what it is inside is asked along another line than that which may be aimed."""
    place = (origin[i, 0], origin[i, 1], origin[i, 2])
    chance = rng.uniforms(1, np.uint64(2), i, 0, 0, rng.DIRECTION)
    begin(ray, tally, place, sampling.sphere(chance[0], chance[1]), -1)
    ray.source = 0
    ray.number = i
    ray.wavelength = 555.0
    ray.weight = 1.0
    find_inside(world, ray, hits)
    set_vector(ray.direction, (direction[i, 0], direction[i, 1], direction[i, 2]))


@kernel
def _follow_rays(world, rows, origin, direction, rays, hits, tally):
    clear(tally)
    ray = rays[0]
    for i in range(len(origin)):
        _begin(world, origin, direction, i, ray, hits, tally)
        follow(world, rows, ray, i, hits, tally)
        settle(tally, 0)


@kernel
def _starts(world, origin, rays, hits, tally, inside):
    ray = rays[0]
    for i in range(len(origin)):
        _begin(world, origin, origin, i, ray, hits, tally)
        for k in range(ray.n_inside):
            inside[i, ray.inside[k]] += 1


@kernel
def _closest(mesh, tree, detectors, origin, direction, hits, prim, distance):
    for i in range(len(origin)):
        prim[i], distance[i] = closest_hit(
            mesh,
            tree,
            detectors,
            (origin[i, 0], origin[i, 1], origin[i, 2]),
            (direction[i, 0], direction[i, 1], direction[i, 2]),
            hits,
        )


def unit(vectors):
    """Rows (n, 3) made to length 1."""
    vectors = np.asarray(vectors, float)
    return np.ascontiguousarray(vectors / np.linalg.norm(vectors, axis=1, keepdims=True))


def follow_rays(world, origin, direction, threads: int = 1) -> Fate:
    """Follow rays (n, 3), (n, 3) to their end; the same numbers for the same rows of a thread."""
    with ThreadPoolExecutor(threads) as pool:
        rows = np.array_split(np.arange(len(origin)), threads)
        parts = list(pool.map(lambda row: _followed(world, origin[row], direction[row]), rows))
    return Fate(
        *(sum(part[k] for part in parts) for k in range(len(Fate._fields) - 1)),
        tuple(int(row[i]) for row, part in zip(rows, parts, strict=True) for i in part.lost),
    )


def _scratch(world):
    tags, parts = len(world.tag_names), len(world.part_names)
    return new_rays(), new_hits(), new_tally(world.arrays.settings.groups, tags, parts, _ROOM)


def _followed(world, origin, direction) -> Fate:
    rows = account_rows(len(world.tag_names), len(world.part_names))
    rays, hits, tally = _scratch(world)
    _follow_rays(world.arrays, rows, origin, direction, rays, hits, tally)
    account = tally.account[0]
    ended = [float(account[getattr(rows, name)]) for name in Fate._fields[2:-1]]
    lost = tally.lost["ray"][: min(int(tally.used[LOSSES]), LOST_KEPT)]
    absorbed = float(account[: rows.part].sum())
    return Fate(float(len(origin)), absorbed, *ended, tuple(lost.tolist()))


def started_inside(world, origin):
    """(n, B) how often each body is among those that a ray starts in."""
    inside = np.zeros((len(origin), len(world.body_names)), np.int64)
    _starts(world.arrays, origin, *_scratch(world), inside)
    return inside


def closest_hits(world, origin, direction):
    """(primitive, distance), each (n,); -1 and inf where there is nothing."""
    prim, distance = np.empty(len(origin), np.int64), np.empty(len(origin))
    arrays = world.arrays
    _closest(
        arrays.mesh, arrays.tree, arrays.detectors, origin, direction, new_hits(), prim, distance
    )
    return prim, distance
