"""What a ray hits: one traversal for the closest hit, any hit, and all hits of one event.

Primitives are numbered through: faces first, then detectors. A hit holds the primitive, the
distance along the ray, its place on the primitive, the side, and its reach: the bound on the error
of the distance, which is the primitive's bound on its plane over |cosine|.
"""

from math import inf
from typing import NamedTuple

import numpy as np

from lumentrace.jit import inlined_kernel, kernel
from lumentrace.kernels.hierarchy import STACK_DEPTH, enters_box
from lumentrace.kernels.triangle import drawn_back, intersect, shear
from lumentrace.kernels.vectors import take
from lumentrace.models.dispatch import detector_intersect
from lumentrace.world.arrays import DRY

HITS_MAX = 24  # bodies (from either side) and detectors that may meet in one place


HIT = np.dtype(
    [
        ("prim", "i4"),  # face, or n_faces + detector
        ("owner", "i4"),  # body, or -1 - detector
        ("front", "?"),  # hit from the side of the normal
        ("crossed", "?"),  # a transparent body is entered or left here
        ("t", "f8"),  # distance
        ("u", "f8"),  # weight of the second corner | share across
        ("v", "f8"),  # weight of the third corner | share up
        ("reach", "f8"),
    ],
    align=True,
)  # fmt: skip
NODE = np.dtype([("index", "i4"), ("t", "f8")], align=True)  # to visit, and where the ray enters


class Hits(NamedTuple):
    """Scratch of one thread."""

    hit: np.ndarray  # (HITS_MAX,) HIT: those of one event, nearest first, once `hit_set` returns
    node: np.ndarray  # (STACK_DEPTH,) NODE: still to visit


class Leaving(NamedTuple):
    """What a ray starts from, and must not hit again."""

    face: int  # the face that it leaves, -1: none
    side: float  # +1 on the side of that face's normal, -1 behind it
    fresh: bool  # it comes out of that face, emitted or through a sheet: perhaps into a dry gap


NOWHERE = Leaving(-1, 1.0, False)


def new_hits() -> Hits:
    """Empty scratch for `hit_set`."""
    return Hits(np.zeros(HITS_MAX, HIT), np.zeros(STACK_DEPTH, NODE))


@kernel
def cosine_of(mesh, detectors, prim, direction):
    """direction . normal: negative where the ray arrives on the side of the normal."""
    x, y, z = direction
    n_faces = len(mesh.body)
    if prim < n_faces:
        normal = mesh.normal
        return x * normal[prim, 0] + y * normal[prim, 1] + z * normal[prim, 2]
    place, d = detectors.place, prim - n_faces
    return x * place[d, 1, 0] + y * place[d, 1, 1] + z * place[d, 1, 2]


@kernel
def find_pair(mesh, prim, other):
    """Row of the contact of two primitives, or -1 where there is none; rows go by primitive."""
    first, end = mesh.pair_first[prim], mesh.pair_first[prim + 1]
    last = end
    while first < last:
        middle = (first + last) >> 1
        if mesh.pair_prim[middle] < other:
            first = middle + 1
        else:
            last = middle
    return first if first < end and mesh.pair_prim[first] == other else -1


@inlined_kernel
def _is_concave(mesh, face, side, other):
    """Whether two faces that join stand in a hollow, seen from that side of `face`.

    They do if they share a corner and the middle of `face` lies on that side of the plane of
    `other`.
    """
    height = 0.0
    join = False
    corner = mesh.corner[other, 0]
    for i in range(3):
        vertex = mesh.corner[face, i]
        for k in range(3):
            join = join or mesh.corner[other, k] == vertex
            height += (mesh.vertex[vertex, k] - mesh.vertex[corner, k]) * mesh.normal[other, k]
    return join and height * side > 0.0


@inlined_kernel
def _start(mesh, leaving, prim, t, cosine, reach):
    """Distance at which a ray that leaves a face meets a primitive, or inf where it does not.

    Ahead is ahead, but what is in contact with the face belongs to the event that is over. A closed
    body is met next on the side on which the ray left it; by rounding, a ray that just clears a
    convex edge seems to come to the face behind it from within. A face of the same body that seems
    to lie behind, by no more than the error of its distance, is met here if it stands at a concave
    edge or corner.
    """
    if leaving.face < 0:
        return t if t > reach else inf  # what a source lies on is behind it
    row = find_pair(mesh, leaving.face, prim)
    if row >= 0 and abs(t) <= reach + mesh.pair_gap[row] / abs(cosine):
        two_sided = not mesh.closed[mesh.body[prim]] if prim < len(mesh.body) else False
        across = mesh.pair_kind[row] == DRY and (cosine < 0.0 or two_sided)
        return max(t, 0.0) if leaving.fresh and across else inf
    body = mesh.body[leaving.face]
    if prim >= len(mesh.body) or mesh.body[prim] != body:
        return t if t > 0.0 else inf
    same_side = cosine * leaving.side < 0.0
    if t > 0.0:
        return t if same_side or not mesh.closed[body] else inf
    here = same_side and t >= -reach and _is_concave(mesh, leaving.face, leaving.side, prim)
    return 0.0 if here else inf


@inlined_kernel
def _meet(mesh, detectors, origin, direction, sheared, leaving, prim):
    """The hit of one primitive: (t, u, v, cosine, reach); t is inf where there is none."""
    cosine = cosine_of(mesh, detectors, prim, direction)
    if cosine == 0.0:
        return inf, 0.0, 0.0, cosine, 0.0
    n_faces = len(mesh.body)
    if prim < n_faces:
        corner = mesh.corner
        t, u, v = intersect(
            origin, sheared, mesh.vertex, corner[prim, 0], corner[prim, 1], corner[prim, 2]
        )
        # What lies on a face is no farther off than the face is long, which the margin tells.
        reach = mesh.error[prim] * min(1.0 / abs(cosine), 64.0 / mesh.margin[prim])
    else:
        d = prim - n_faces
        t, u, v = detector_intersect(detectors.model[d], detectors, d, origin, direction)
        reach = detectors.error[d] / abs(cosine)
    if t < inf:
        t = _start(mesh, leaving, prim, t, cosine, reach)
    return t, u, v, cosine, reach


@kernel
def _after(hit, t, prim):
    """Whether a hit comes after one at t on a primitive, in the order of an event."""
    return hit.t > t or (hit.t == t and hit.prim > prim)


@kernel
def _insert(hits, count, t_far, prim, owner, front, t, u, v, reach):
    """Keep a hit, in order of (t, primitive); returns the number kept, -1: no room.

    Of the hits of one body from one side only the first stays, and none that lies beyond t_far by
    more than its reach.
    """
    kept = 0
    superseded = False
    for i in range(count):
        hit = hits[i]
        if hit.t > t_far + hit.reach:
            continue
        if hit.owner == owner and hit.front == front:
            if _after(hit, t, prim):
                continue
            superseded = True
        if kept != i:
            hits[kept] = hit
        kept += 1
    if superseded:
        return kept
    if kept == HITS_MAX:
        return -1
    place = kept
    while place > 0 and _after(hits[place - 1], t, prim):
        hits[place] = hits[place - 1]
        place -= 1
    hit = hits[place]
    hit.prim, hit.owner, hit.front = prim, owner, front
    hit.t, hit.u, hit.v, hit.reach = t, u, v, reach
    return kept + 1


@kernel
def _is_among(prim, skipped, n_skipped):
    for i in range(n_skipped):
        if skipped[i] == prim:
            return True
    return False


@kernel
def hit_set(mesh, tree, detectors, origin, direction, leaving, skipped, n_skipped, hits):
    """All hits of the event that the ray comes to next, nearest first, in `hits`.

    One event are the hits that lie no farther behind the nearest than their two reaches, and those
    in contact with it by no more than the gap along the ray. skipped[:n_skipped]: primitives of the
    event that the ray comes from. Returns their number; 0: nothing ahead; -1: more than HITS_MAX.
    """
    if len(tree.order) == 0:
        return 0
    sheared = shear(direction[0], direction[1], direction[2])
    inverse = 1.0 / direction[0], 1.0 / direction[1], 1.0 / direction[2]
    count = 0
    t_far = inf
    nodes = hits.node
    nodes[0].index, nodes[0].t = 0, 0.0
    waiting = 1
    while waiting > 0:
        waiting -= 1
        node = nodes[waiting].index
        if nodes[waiting].t > t_far:
            continue
        first = tree.child[node]
        if tree.count[node] == 0:
            left = enters_box(tree.lower, tree.upper, first, origin, inverse, t_far)
            right = enters_box(tree.lower, tree.upper, first + 1, origin, inverse, t_far)
            near, far = (first, first + 1) if left <= right else (first + 1, first)
            for child, t_child in ((far, max(left, right)), (near, min(left, right))):
                if t_child < inf:
                    nodes[waiting].index, nodes[waiting].t = child, t_child
                    waiting += 1
            continue
        for i in range(first, first + tree.count[node]):
            prim = tree.order[i]
            if prim == leaving.face or _is_among(prim, skipped, n_skipped):
                continue
            t, u, v, cosine, reach = _meet(
                mesh, detectors, origin, direction, sheared, leaving, prim
            )
            if t == inf or t > t_far + reach:
                continue
            if count == 0 or t < hits.hit[0].t:
                t_far = t + reach + mesh.widest_gap[prim] / abs(cosine)
            n_faces = len(mesh.body)
            owner = mesh.body[prim] if prim < n_faces else n_faces - prim - 1
            count = _insert(hits.hit, count, t_far, prim, owner, cosine < 0.0, t, u, v, reach)
            if count < 0:
                return -1
    return _one_event(mesh, detectors, direction, hits.hit, count)


@kernel
def _one_event(mesh, detectors, direction, hits, count):
    """Keep the hits that belong to the event of the nearest; returns their number."""
    kept = min(count, 1)
    for i in range(1, count):
        nearest, hit = hits[0], hits[i]
        behind = hit.t - nearest.t - nearest.reach - hit.reach
        if behind > 0.0:
            row = find_pair(mesh, nearest.prim, hit.prim)
            cosine = abs(cosine_of(mesh, detectors, nearest.prim, direction))
            if row < 0 or behind > mesh.pair_gap[row] / cosine:
                continue
        if kept != i:
            hits[kept] = hit
        kept += 1
    return kept


@kernel
def point_of(mesh, hit):
    """Where a hit lies on its face, kept off the face's edges by the error of the intersection."""
    u, v = drawn_back(hit.u, hit.v, mesh.margin[hit.prim])
    w = 1.0 - u - v
    a = take(mesh.vertex, mesh.corner[hit.prim, 0])
    b = take(mesh.vertex, mesh.corner[hit.prim, 1])
    c = take(mesh.vertex, mesh.corner[hit.prim, 2])
    return (
        w * a[0] + u * b[0] + v * c[0],
        w * a[1] + u * b[1] + v * c[1],
        w * a[2] + u * b[2] + v * c[2],
    )


@kernel
def closest_hit(mesh, tree, detectors, origin, direction, hits):
    """The nearest primitive ahead and its distance; (-1, inf) where there is none."""
    if hit_set(mesh, tree, detectors, origin, direction, NOWHERE, mesh.body, 0, hits) == 0:
        return -1, inf
    return hits.hit[0].prim, hits.hit[0].t
