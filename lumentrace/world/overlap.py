"""Overlap of pairs of nearly coplanar triangles."""

from typing import NamedTuple

import numpy as np


class Overlap(NamedTuple):
    """What n pairs of triangles have in common, seen along the normal of the first."""

    area: np.ndarray  # (n,)
    perimeter: np.ndarray  # (n,)
    gap: np.ndarray  # (n,) largest distance there from the first one's plane to the second's


def overlap(triangle_a, normal_a, triangle_b, normal_b) -> Overlap:
    """Overlap of triangles, (n, 3, 3) with unit normals (n, 3), row by row.

    The second, projected onto the plane of the first, is clipped by each edge of the first
    (Sutherland and Hodgman, Communications of the ACM 17, 32 (1974)).
    """
    origin = triangle_a[:, :1]
    along = triangle_a[:, 1] - triangle_a[:, 0]
    along = along / np.linalg.norm(along, axis=1)[:, None]
    axes = np.stack([along, np.cross(normal_a, along)], axis=2)
    a = (triangle_a - origin) @ axes
    b = (triangle_b - origin) @ axes
    turned = (normal_a * normal_b).sum(axis=1) < 0
    polygon = np.where(turned[:, None, None], b[:, ::-1], b)
    count = np.full(len(a), 3)
    for k in range(3):
        polygon, count = _clipped(polygon, count, a[:, k], a[:, (k + 1) % 3])
    slot = np.arange(polygon.shape[1])
    valid = slot < count[:, None]
    after = _after(polygon, count)
    area = 0.5 * np.where(valid, _cross(polygon, after), 0.0).sum(axis=1)
    perimeter = np.where(valid, np.linalg.norm(after - polygon, axis=2), 0.0).sum(axis=1)
    point = polygon @ axes.transpose(0, 2, 1) + origin - triangle_b[:, :1]
    height = np.abs((point * normal_b[:, None]).sum(axis=2))
    return Overlap(area, perimeter, np.where(valid, height, 0.0).max(axis=1))


def _cross(u, v):
    return u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]


def _after(values, count):
    """Each entry's successor in the ring of the first `count` of a row, (n, m, ...)."""
    slot = np.arange(values.shape[1])
    follower = np.where(slot + 1 < count[:, None], slot + 1, 0)
    return values[np.arange(len(values))[:, None], follower]


def _clipped(polygon, count, start, end):
    """The part of convex polygons to the left of the lines start -> end.

    polygon: (n, m, 2), of which the first `count` in each row count; returns one slot more.
    """
    n, m = polygon.shape[:2]
    valid = np.arange(m) < count[:, None]
    side = _cross((end - start)[:, None], polygon - start[:, None])
    after, side_after = _after(polygon, count), _after(side, count)
    kept = valid & (side >= 0)
    cut = valid & ((side >= 0) != (side_after >= 0))
    share = np.where(cut, side / np.where(cut, side - side_after, 1.0), 0.0)
    crossing = polygon + share[..., None] * (after - polygon)
    points = np.stack([polygon, crossing], axis=2).reshape(n, 2 * m, 2)
    there = np.stack([kept, cut], axis=2).reshape(n, 2 * m)
    order = np.argsort(~there, axis=1, kind="stable")[:, : m + 1]
    return np.take_along_axis(points, order[..., None], axis=1), there.sum(axis=1)
