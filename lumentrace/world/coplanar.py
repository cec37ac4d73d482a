"""Pairs of flat faces of different owners that lie on one another."""

from typing import NamedTuple

import numpy as np

from lumentrace.world.boxes import box_pairs
from lumentrace.world.geometry import triangle_distance
from lumentrace.world.overlap import overlap

_AT_ONCE = 100_000  # pairs compared at once, to bound the memory
_THIN = 1e-12  # area over square of the perimeter below which an overlap is rounding
_STEEPEST = 0.05  # sine between planes above which faces are not called parallel, however small


class Faces(NamedTuple):
    """N triangles of several owners."""

    triangle: np.ndarray  # (N, 3, 3)
    normal: np.ndarray  # (N, 3) unit vectors, zeros where there is no area
    edge: np.ndarray  # (N,) longest edge
    altitude: np.ndarray  # (N,) smallest altitude
    owner: np.ndarray  # (N,) int64
    touch: np.ndarray  # (N,) distance within which a face touches another


class Pairs(NamedTuple):
    """P pairs of faces that lie on one another, each once, ordered by a, then by b."""

    a: np.ndarray  # (P,) int64
    b: np.ndarray  # (P,) int64, larger than a
    area: np.ndarray  # (P,) of the overlap
    gap: np.ndarray  # (P,) largest distance between the planes there
    opposed: np.ndarray  # (P,) bool: the normals point against each other


def coplanar_pairs(faces: Faces) -> Pairs:
    """All pairs of faces of different owners that overlap with their planes within touch there.

    The larger touch of two faces holds. Planes may differ in direction as far as that distance
    over their smallest altitudes explains. Owners that meet along a line only, in overlaps
    narrower than that distance, are not in contact. Of owners in contact the pairs of faces that
    lie side by side in one plane, and meet in an edge or a corner, are there too, with area 0.
    """
    a, b = _candidates(faces)
    found = [
        _compared(faces, a[i : i + _AT_ONCE], b[i : i + _AT_ONCE])
        for i in range(0, len(a), _AT_ONCE)
    ]
    if not found:
        none = np.empty(0, np.int64)
        return Pairs(none, none, np.empty(0), np.empty(0), np.empty(0, bool))
    pairs, wide = (
        Pairs(*(np.concatenate(column) for column in zip(*(p for p, _ in found), strict=True))),
        np.concatenate([w for _, w in found]),
    )
    n_owners = int(faces.owner.max()) + 1
    low, high = np.sort([faces.owner[pairs.a], faces.owner[pairs.b]], axis=0)
    owners = low * n_owners + high
    kept = np.isin(owners, owners[wide])
    return Pairs(*(column[kept] for column in pairs))


def _candidates(faces: Faces):
    """(a, b), a < b: faces with area, of different owners, whose boxes meet within touch."""
    rows = np.flatnonzero(faces.altitude > 0)
    if not len(rows):
        return rows, rows
    lower = faces.triangle[rows].min(axis=1) - faces.touch[rows, None]
    upper = faces.triangle[rows].max(axis=1) + faces.touch[rows, None]
    owner = faces.owner[rows]
    near = _near_other_owner(lower, upper, owner)
    rows, lower, upper, owner = rows[near], lower[near], upper[near], owner[near]
    i, j = box_pairs(lower, upper, lower, upper)
    different = (i < j) & (owner[i] != owner[j])
    return rows[i[different]], rows[j[different]]


def _near_other_owner(lower, upper, owner):
    """(N,) bool: the boxes that meet the box of another owner."""
    n = int(owner.max()) + 1
    owner_lower, owner_upper = np.full((n, 3), np.inf), np.full((n, 3), -np.inf)
    np.minimum.at(owner_lower, owner, lower)
    np.maximum.at(owner_upper, owner, upper)
    present = np.unique(owner)
    i, j = box_pairs(lower, upper, owner_lower[present], owner_upper[present])
    near = np.zeros(len(owner), bool)
    near[i[owner[i] != present[j]]] = True
    return near


def _compared(faces: Faces, a, b):
    """(pairs, wide): those of the candidates that lie on one another; wide: by more than touch."""
    distance = np.maximum(faces.touch[a], faces.touch[b])
    sine = np.linalg.norm(np.cross(faces.normal[a], faces.normal[b]), axis=1)
    steepest = distance * (1.0 / faces.altitude[a] + 1.0 / faces.altitude[b])
    height = ((faces.triangle[b, 0] - faces.triangle[a, 0]) * faces.normal[a]).sum(axis=1)
    reach = distance + sine * (faces.edge[a] + faces.edge[b])
    likely = (sine <= np.minimum(steepest, _STEEPEST)) & (np.abs(height) <= reach)
    a, b, distance = a[likely], b[likely], distance[likely]
    common = overlap(faces.triangle[a], faces.normal[a], faces.triangle[b], faces.normal[b])
    met = (common.area > _THIN * common.perimeter**2) & (common.gap <= distance)
    opposed = (faces.normal[a] * faces.normal[b]).sum(axis=1) < 0
    # Faces side by side in one plane that meet in an edge or a corner only: no area is in contact,
    # but a ray that leaves one there is not to meet the other in the same place.
    apart = np.full(len(a), np.inf)
    for one, other in ((a, b), (b, a)):
        for k in range(3):
            apart = np.minimum(
                apart, triangle_distance(faces.triangle[one, k], faces.triangle[other])
            )
    beside = ~met & (apart <= distance)
    area = np.where(beside, 0.0, common.area)
    gap = np.where(beside, apart, common.gap)
    met = met | beside
    pairs = Pairs(a[met], b[met], area[met], gap[met], opposed[met])
    # A strip of width w and any length has an area of w/2 times its perimeter.
    return pairs, (~beside & (common.area > 0.5 * distance * common.perimeter))[met]
