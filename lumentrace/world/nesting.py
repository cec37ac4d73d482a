"""Which transparent body acts where several share a place: ranks by priority and nesting."""

import heapq
from collections.abc import Sequence

import numpy as np

from lumentrace.world import arrays
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import surfaces_cross
from lumentrace.world.inside import is_inside
from lumentrace.world.topology import shell_faces
from lumentrace.world.words import shown_point


def ranks(parts: Sequence[BuiltPart], bodies: Sequence[Body], touch):
    """(B,) int32: the larger acts; different for all transparent bodies, -1 for all others.

    The larger priority acts; of equal ones a body wholly inside another; then the first in the
    file. touch: (B,) distance within which surfaces count as touching. Raises UserError where
    surfaces of bodies of equal priority cross by more than that.
    """
    clear = [i for i, body in enumerate(bodies) if parts[body.part].kind == arrays.TRANSPARENT]
    priority = {i: parts[bodies[i].part].part.priority for i in clear}
    around: dict[int, list[int]] = {i: [] for i in clear}
    blocked = dict.fromkeys(clear, 0)
    for inner, outer in _nested(parts, bodies, touch, clear, priority):
        around[inner].append(outer)
        blocked[outer] += 1
    rank = np.full(len(bodies), -1, np.int32)
    ready = [(-priority[i], i) for i in clear if blocked[i] == 0]
    heapq.heapify(ready)
    for left in range(len(clear) - 1, -1, -1):
        _, i = heapq.heappop(ready)
        rank[i] = left
        for outer in around[i]:
            blocked[outer] -= 1
            if blocked[outer] == 0:
                heapq.heappush(ready, (-priority[outer], outer))
    return rank


def _nested(parts, bodies, touch, clear, priority):
    """(inner, outer) of bodies of equal priority of which one lies wholly inside the other."""
    lower = np.array([bodies[i].lower for i in clear]).reshape(-1, 3)
    upper = np.array([bodies[i].upper for i in clear]).reshape(-1, 3)
    for row_a, row_b in zip(*box_pairs(lower, upper, lower, upper), strict=True):
        i, j = clear[row_a], clear[row_b]
        if i >= j or priority[i] != priority[j]:
            continue
        a, b, distance = bodies[i], bodies[j], max(touch[i], touch[j])
        shared = np.minimum(a.upper, b.upper) - np.maximum(a.lower, b.lower)
        if (shared <= 2 * distance).any():  # too thin to hold more than a touch
            continue
        point = surfaces_cross(a.vertex, a.corner, b.vertex, b.corner, distance)
        if point is not None:
            raise parts[b.part].part.place.error(
                "priority",
                f'"{a.name}" and "{b.name}" cross near {shown_point(point)} and both have priority '
                f"{priority[i]}; the larger priority fills what they share",
            )
        if wholly_inside(a, b, distance):
            yield i, j
        elif wholly_inside(b, a, distance):
            yield j, i


def wholly_inside(a: Body, b: Body, distance) -> bool:
    """Whether every shell of a lies within b, which is closed and which a does not cross."""
    return all(
        is_inside(a.vertex, a.corner[faces], b.vertex, b.corner, distance)
        for faces in shell_faces(a.corner)
    )
