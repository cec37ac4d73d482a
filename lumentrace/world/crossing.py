"""Do two closed surfaces cross, or does one cross itself?

Only edges need asking: where two surfaces of triangles cross, an edge of one pierces a face of the
other. A surface that merely touches another is pierced too, so the pieces into which an edge is cut
decide: one must lie inside the other surface and one outside, farther from it than the tolerance.
"""

import numpy as np

from lumentrace.world.boxes import box_pairs
from lumentrace.world.geometry import face_boxes, triangle_distance
from lumentrace.world.inside import is_near, winding
from lumentrace.world.topology import edges_of, shell_faces, unbalanced

_AT_ONCE = 256  # points asked at once, so that a plain crossing is found without asking them all


def pierced(start, end, triangle, distance):
    """Where edges pass through triangles: three sets of rows and shares of the way.

    start, end: (n, 3); triangle: (n, 3, 3), row by row. An end within `distance` of the plane
    counts as passing through, and so does what misses the triangle by no more than that; an edge
    that lies in the plane does not. Returns (row, share), share in [0, 1].
    """
    normal = np.cross(triangle[:, 1] - triangle[:, 0], triangle[:, 2] - triangle[:, 0])
    length = np.linalg.norm(normal, axis=1)
    normal = normal / np.where(length > 0, length, 1.0)[:, None]
    from_start = ((start - triangle[:, 0]) * normal).sum(axis=1)
    from_end = ((end - triangle[:, 0]) * normal).sum(axis=1)
    at_start, at_end = np.abs(from_start) <= distance, np.abs(from_end) <= distance
    through = (from_start < 0) != (from_end < 0)
    step = from_start - from_end
    share = np.where(at_start, 0.0, from_start / np.where(step != 0, step, 1.0))
    share = np.where(at_end, 1.0, share)
    row = np.flatnonzero((length > 0) & (at_start ^ at_end | ~at_start & ~at_end & through))
    share = np.clip(share[row], 0, 1)
    point = start[row] + share[:, None] * (end[row] - start[row])
    met = triangle_distance(point, triangle[row]) <= distance
    return row[met], share[met]


def surfaces_cross(vertex_a, corner_a, vertex_b, corner_b, distance):
    """A point where two closed surfaces cross by more than `distance`, or None.

    They cross where a shell of one has points inside the other and points outside, both farther
    from it than `distance`. A shell wholly within the other surface is no crossing.
    """
    for one, other in (
        ((vertex_a, corner_a), (vertex_b, corner_b)),
        ((vertex_b, corner_b), (vertex_a, corner_a)),
    ):
        point = surface_enters(*one, *other, distance)
        if point is not None:
            return point
    return None


def surface_enters(vertex_a, corner_a, vertex_b, corner_b, distance):
    """A point where an edge of surface a, open or closed, enters closed surface b, or None.

    Connected faces of a have points inside b and points outside, both farther from it than
    `distance`. Faces that do not meet the box of b are left out: those that enter b do.
    """
    corner_a = _in_box(vertex_a, corner_a, vertex_b, corner_b, distance)
    for faces in shell_faces(corner_a) if len(corner_a) else ():
        shell = corner_a[faces]
        probes = _probes(vertex_a, shell, vertex_b, corner_b, distance)
        point = _first_inside(probes, vertex_b, corner_b, distance)
        if point is not None:
            ends = vertex_a[np.unique(shell)]
            if _any_outside(np.concatenate([ends, probes]), vertex_b, corner_b, distance):
                return point
    return None


def open_pierced(vertex_a, corner_a, vertex_b, corner_b, distance) -> bool:
    """Whether an edge of surface a passes through open surface b: with ends on either side of a
    face, farther than `distance` from it, and as far from the rim of b."""
    corner_a = _in_box(vertex_a, corner_a, vertex_b, corner_b, distance)
    ends = edges_of(corner_a).ends
    start, end = vertex_a[ends[:, 0]], vertex_a[ends[:, 1]]
    lower, upper = face_boxes(vertex_b, corner_b)
    edge, face = box_pairs(np.minimum(start, end), np.maximum(start, end), lower, upper)
    row, share = pierced(start[edge], end[edge], vertex_b[corner_b[face]], distance)
    inner = (share > 0) & (share < 1)
    edge, share = edge[row[inner]], share[inner]
    point = start[edge] + share[:, None] * (end[edge] - start[edge])
    edges = edges_of(corner_b)
    rim = edges.ends[unbalanced(edges)][:, [0, 1, 1]]  # as triangles without area
    return not is_near(point, vertex_b, rim, distance).all()


def _in_box(vertex, corner, vertex_b, corner_b, distance):
    """The faces of a whose boxes meet the box of b."""
    lower, upper = face_boxes(vertex, corner)
    point = vertex_b[corner_b].reshape(-1, 3)
    meets = (upper >= point.min(axis=0) - distance) & (lower <= point.max(axis=0) + distance)
    return corner[meets.all(axis=1)]


def _probes(vertex_a, corner_a, vertex_b, corner_b, distance):
    """Points of surface a that are inside b if the two cross, (n, 3): middles of the pieces of
    edges that pierce b, and of faces that have all their corners on b."""
    ends = edges_of(corner_a).ends
    start, end = vertex_a[ends[:, 0]], vertex_a[ends[:, 1]]
    low, high = np.minimum(start, end), np.maximum(start, end)
    lower, upper = face_boxes(vertex_b, corner_b)
    edge, face = box_pairs(low - distance, high + distance, lower, upper)
    row, share = pierced(start[edge], end[edge], vertex_b[corner_b[face]], distance)
    middles = _piece_middles(start, end, edge[row], share)
    used = np.unique(corner_a)
    on_b = np.zeros(len(vertex_a), bool)
    on_b[used] = is_near(vertex_a[used], vertex_b, corner_b, distance)
    return np.concatenate([middles, vertex_a[corner_a[on_b[corner_a].all(axis=1)]].mean(axis=1)])


def _piece_middles(start, end, edge, share):
    """Middles of the pieces of each edge that is cut at least once, (n, 3)."""
    cut = np.unique(edge)
    edge = np.concatenate([edge, cut, cut])
    share = np.concatenate([share, np.zeros(len(cut)), np.ones(len(cut))])
    order = np.lexsort((share, edge))
    edge, share = edge[order], share[order]
    same = np.flatnonzero((edge[1:] == edge[:-1]) & (share[1:] > share[:-1]))
    middle = 0.5 * (share[same] + share[same + 1])
    edge = edge[same]
    return start[edge] + middle[:, None] * (end[edge] - start[edge])


def _first_inside(point, vertex, corner, distance):
    """The first of the points that is inside the surface, farther from it than `distance`."""
    box = vertex[corner].reshape(-1, 3)
    point = point[((point > box.min(axis=0)) & (point < box.max(axis=0))).all(axis=1)]
    for first in range(0, len(point), _AT_ONCE):
        some = point[first : first + _AT_ONCE]
        some = some[~is_near(some, vertex, corner, distance)]
        inside = np.flatnonzero(winding(some, vertex, corner))
        if len(inside):
            return some[inside[0]]
    return None


def _any_outside(point, vertex, corner, distance) -> bool:
    """Whether any of the points is outside the surface, farther from it than `distance`."""
    box = vertex[corner].reshape(-1, 3)
    beyond = (point < box.min(axis=0) - distance) | (point > box.max(axis=0) + distance)
    if beyond.any():
        return True
    for first in range(0, len(point), _AT_ONCE):
        some = point[first : first + _AT_ONCE]
        some = some[~is_near(some, vertex, corner, distance)]
        if (winding(some, vertex, corner) == 0).any():
            return True
    return False


def is_star(vertex, corner) -> bool:
    """Whether all of a closed surface can be seen from the middle of its box.

    Every face then turns its inner side to that point, and the surface goes round it once: it is a
    sphere drawn in and out along rays, and cannot cross itself. False says nothing.
    """
    points = vertex[corner].reshape(-1, 3)
    middle = 0.5 * (points.min(axis=0) + points.max(axis=0))
    a, b, c = (vertex[corner[:, k]] - middle for k in range(3))
    if not ((a * np.cross(b, c)).sum(axis=1) > 0).all():
        return False
    return bool(winding(middle[None], vertex, corner)[0] == 1)


def self_crossings(vertex, corner, distance):
    """(n, 3) points where edges of a mesh pierce faces that they share no corner with.

    An edge pierces a face where its ends lie on either side, farther than `distance` from it.
    """
    ends = edges_of(corner).ends
    start, end = vertex[ends[:, 0]], vertex[ends[:, 1]]
    lower, upper = face_boxes(vertex, corner)
    edge, face = box_pairs(np.minimum(start, end), np.maximum(start, end), lower, upper)
    apart = (ends[edge][:, :, None] != corner[face][:, None, :]).all(axis=(1, 2))
    edge, face = edge[apart], face[apart]
    row, share = pierced(start[edge], end[edge], vertex[corner[face]], distance)
    inner = (share > 0) & (share < 1)
    edge, share = edge[row[inner]], share[inner]
    return start[edge] + share[:, None] * (end[edge] - start[edge])
