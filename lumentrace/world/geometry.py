"""Measures of triangles and points, row by row, in numpy."""

from typing import NamedTuple

import numpy as np

EPSILON = 2.0**-52
# A face whose smallest altitude is below this many roundings of its coordinates has no direction.
_SLIVER_ROUNDINGS = 8.0


def largest(vertex) -> float:
    """Largest absolute coordinate of (n, 3) points; 0 for none."""
    return float(np.abs(vertex).max(initial=0.0))


def face_boxes(vertex, corner):
    """Lower and upper corners of the boxes of faces, two (F, 3) arrays."""
    triangle = vertex[corner]
    return triangle.min(axis=1), triangle.max(axis=1)


class Facets(NamedTuple):
    """Plane and size of each of F triangles."""

    normal: np.ndarray  # (F, 3) unit vectors, counter-clockwise; zeros where there is no area
    area: np.ndarray  # (F,)
    edge: np.ndarray  # (F,) longest edge
    altitude: np.ndarray  # (F,) smallest altitude; 0 where there is no area


def facets(vertex, corner, scale) -> Facets:
    """Facets of faces; those without area are slivers of a few roundings of `scale`.

    scale: largest absolute coordinate that went into the corners, a float or (F,).
    """
    a, b, c = (vertex[corner[:, k]] for k in range(3))
    cross = np.cross(b - a, c - a)
    double = np.linalg.norm(cross, axis=1)
    edge = np.sqrt(np.max([(d * d).sum(axis=1) for d in (b - a, c - b, a - c)], axis=0))
    solid = double > _SLIVER_ROUNDINGS * EPSILON * scale * edge
    normal = np.where(solid[:, None], cross, 0.0) / np.where(solid, double, 1.0)[:, None]
    double = np.where(solid, double, 0.0)
    return Facets(normal, 0.5 * double, edge, double / np.where(solid, edge, 1.0))


def angle_between(a, b):
    """Angle in degrees between vectors, (n, 3) and (n, 3) or (3,), accurate near 0 and 180."""
    sine = np.linalg.norm(np.cross(a, b), axis=-1)
    return np.degrees(np.arctan2(sine, (a * b).sum(axis=-1)))


def signed_volume(vertex, corner) -> float:
    """Volume that closed faces enclose, positive when their normals point outward."""
    triangle = vertex[corner] - vertex[corner].reshape(-1, 3).mean(axis=0)
    return float(np.einsum("ij,ij->", triangle[:, 0], np.cross(triangle[:, 1], triangle[:, 2])) / 6)


def _to_segment(point, start, end):
    """Distance of points from segments, row by row, all (n, 3)."""
    along = end - start
    length = (along * along).sum(axis=1)
    share = ((point - start) * along).sum(axis=1) / np.where(length > 0, length, 1.0)
    return np.linalg.norm(point - start - np.clip(share, 0, 1)[:, None] * along, axis=1)


def triangle_distance(point, triangle):
    """Distance of each point from its triangle: (n, 3) and (n, 3, 3) -> (n,)."""
    a, b, c = triangle[:, 0], triangle[:, 1], triangle[:, 2]
    cross = np.cross(b - a, c - a)
    double = np.linalg.norm(cross, axis=1)
    above = np.full(len(point), double > 0)
    for start, end in ((a, b), (b, c), (c, a)):
        above &= (np.cross(end - start, point - start) * cross).sum(axis=1) >= 0
    height = np.abs(((point - a) * cross).sum(axis=1)) / np.where(double > 0, double, 1.0)
    rim = np.minimum(_to_segment(point, a, b), _to_segment(point, b, c))
    return np.where(above, height, np.minimum(rim, _to_segment(point, c, a)))


def file_rounding(vertex) -> float:
    """How far two planes that are meant to be one may stand apart: 2^-22 of the largest coordinate.

    Rounding to float32 moves a coordinate by at most 2^-24 of itself (half a unit in the last
    place, just above a power of two), a corner by sqrt(3) of that, a point within a face by no more
    than its corners, and two faces by twice as much: less than 4 x 2^-24.
    """
    return 2.0**-22 * largest(vertex)
