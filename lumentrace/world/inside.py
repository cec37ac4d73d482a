"""Is a point inside a closed surface, or next to it?"""

import numpy as np

from lumentrace.world.boxes import box_pairs
from lumentrace.world.geometry import face_boxes, triangle_distance


def _side(p, q, x, y):
    """Sign of the area (p, q, point) in the plane z = 0, exactly opposite for (q, p)."""
    swap = (p[:, 0] > q[:, 0]) | ((p[:, 0] == q[:, 0]) & (p[:, 1] > q[:, 1]))
    start = np.where(swap[:, None], q, p)
    end = np.where(swap[:, None], p, q)
    area = (end[:, 0] - start[:, 0]) * (y - start[:, 1]) - (end[:, 1] - start[:, 1]) * (
        x - start[:, 0]
    )
    return np.where(swap, -area, area)


def _wraps(triangle, x, y):
    """Signed count (1, 0, -1) by which a triangle seen along z goes round a point.

    Each edge is counted by a rule that is half open in y and whose arithmetic is the same for
    both faces that share the edge, so that a closed surface never leaves a gap.
    """
    total = np.zeros(len(x), np.int64)
    for k in range(3):
        p, q = triangle[:, k], triangle[:, (k + 1) % 3]
        side = _side(p, q, x, y)
        total += ((p[:, 1] <= y) & (q[:, 1] > y) & (side > 0)).astype(np.int64)
        total -= ((p[:, 1] > y) & (q[:, 1] <= y) & (side < 0)).astype(np.int64)
    return total


def winding(point, vertex, corner):
    """How many times a closed surface goes round points: 1 inside, 0 outside, -1 if inside out.

    point: (n, 3), none of them on the surface. Returns (n,) int64: the signed count of the faces
    above each point.
    """
    lower, upper = face_boxes(vertex, corner)
    top = upper[:, 2].max(initial=-np.inf)
    high = point.copy()
    high[:, 2] = np.maximum(point[:, 2], top)
    row, face = box_pairs(point, high, lower, upper)
    triangle = vertex[corner[face]]
    at = point[row]
    turns = _wraps(triangle, at[:, 0], at[:, 1])
    cross = np.cross(triangle[:, 1] - triangle[:, 0], triangle[:, 2] - triangle[:, 0])
    rise = (cross * (triangle[:, 0] - at)).sum(axis=1)  # height above the point x cross_z
    above = (turns != 0) & (rise * cross[:, 2] > 0)
    return np.bincount(row[above], weights=turns[above], minlength=len(point)).astype(np.int64)


def is_near(point, vertex, corner, distance):
    """(n,) bool: the surface comes within a distance of the points, (n, 3)."""
    lower, upper = face_boxes(vertex, corner)
    row, face = box_pairs(point - distance, point + distance, lower, upper)
    near = np.zeros(len(point), bool)
    near[row[triangle_distance(point[row], vertex[corner[face]]) <= distance]] = True
    return near


def samples(vertex, corner):
    """Points of a surface to ask about: its vertices, then the centroids of its faces."""
    return np.concatenate([vertex[np.unique(corner)], vertex[corner].mean(axis=1)])


def is_inside(vertex_a, corner_a, vertex_b, corner_b, distance) -> bool:
    """Whether surface a, which does not cross surface b, lies within b.

    Asked of the first point of a that b does not come within `distance` of; no such point (a lies
    on b) counts as outside.
    """
    point = samples(vertex_a, corner_a)
    lower, upper = face_boxes(vertex_b, corner_b)
    within = (point >= lower.min(axis=0) - distance) & (point <= upper.max(axis=0) + distance)
    if not within.all():
        return False
    free = np.flatnonzero(~is_near(point, vertex_b, corner_b, distance))
    return bool(len(free)) and bool(winding(point[free[:1]], vertex_b, corner_b)[0] != 0)
