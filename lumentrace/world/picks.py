"""The geometry of a pick: which faces of a mesh, in the mesh file's own frame and unit."""

import numpy as np

from lumentrace.scene.model import Pick, Tube
from lumentrace.world.geometry import Facets, angle_between, file_rounding, triangle_distance
from lumentrace.world.topology import components, edges_of, neighbours, partners

_ANGLE_ROUNDING = 1e-9  # degrees


def picked(pick: Pick, vertex, corner, facets: Facets, own, free):
    """(F,) bool: the faces for which every key of a pick holds.

    own: (F,) bool, the faces of the pick's `tag`. free: (F,) bool, the faces that no rule has
    taken; growth passes through these only. Coordinates that rounding of the file put outside a box
    or a tube count as inside. Growth goes its way without regard to the other keys.
    """
    slack = file_rounding(vertex)
    chosen = own.copy()
    if pick.facing is not None:
        angle = angle_between(facets.normal, np.array(pick.facing))
        chosen &= (angle <= pick.within + _ANGLE_ROUNDING) & (facets.area > 0)
    if pick.box is not None:
        lower, upper = np.array(pick.box[0]) - slack, np.array(pick.box[1]) + slack
        chosen &= ((vertex >= lower) & (vertex <= upper)).all(axis=1)[corner].all(axis=1)
    if pick.tube is not None:
        chosen &= _in_tube(pick.tube, vertex, slack)[corner].all(axis=1)
    if pick.grow_from is not None:
        start = nearest_face(pick.grow_from, vertex, corner)
        chosen &= grown(vertex, corner, facets, start, pick.over, free)
    return chosen


def _in_tube(tube: Tube, point, slack):
    """(n,) bool: points between two coaxial cylinders and their two ends."""
    start = np.array(tube.from_)
    axis = np.array(tube.to) - start
    length = np.linalg.norm(axis)
    along = (point - start) @ axis / length
    radius = np.linalg.norm(point - start - along[:, None] * axis / length, axis=1)
    return (
        (along >= -slack)
        & (along <= length + slack)
        & (radius >= tube.inner - slack)
        & (radius <= tube.outer + slack)
    )


def nearest_face(point, vertex, corner) -> int:
    """The face that comes nearest to a point; the first of several."""
    points = np.broadcast_to(np.array(point, np.float64), (len(corner), 3))
    return int(np.argmin(triangle_distance(points, vertex[corner])))


def grown(vertex, corner, facets: Facets, start: int, over: float, free):
    """(F,) bool: faces reached from `start` through free faces, across edges that bend less than
    `over` degrees. Nothing where `start` itself is not free.

    Where two faces are wound against one another the bend is that of the surface, not of normals.
    """
    f, g, alike = neighbours(edges_of(corner))
    normal = _normals_of_slivers_too(vertex, corner, facets)
    facing = np.where(alike[:, None], -normal[g], normal[g])
    passes = (angle_between(normal[f], facing) < over) & free[f] & free[g]
    group = components(len(corner), f[passes], g[passes])
    return (group == group[start]) & free & free[start]


def _normals_of_slivers_too(vertex, corner, facets: Facets):
    """Normals in which a sliver takes that of the face beyond its longest edge.

    So growth passes a sliver as if the two faces that it parts met in one edge. Of a face that is
    no higher than the rounding of its file the normal says nothing, and it is a sliver here.
    """
    normal = facets.normal.copy()
    edges = edges_of(corner)
    across = partners(edges)
    length = np.linalg.norm(np.diff(vertex[edges.ends], axis=1)[:, 0], axis=1)
    todo = np.flatnonzero(facets.altitude <= file_rounding(vertex))
    normal[todo] = 0.0  # one that finds no other normal bends nothing
    longest = 3 * todo + np.argmax(length[edges.of_half].reshape(-1, 3)[todo], axis=1)
    todo, longest = todo[across[longest] >= 0], longest[across[longest] >= 0]
    beyond = across[longest] // 3
    sign = np.where(edges.forward[longest] == edges.forward[across[longest]], -1.0, 1.0)
    for _ in todo:  # slivers beside slivers: once more for each of them, at most
        before = normal[todo]
        normal[todo] = sign[:, None] * normal[beyond]
        if (normal[todo] == before).all():
            break
    return normal
