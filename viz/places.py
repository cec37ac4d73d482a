"""Where things of a world stand, as points."""

import numpy as np

from lumentrace.world.frames import corners
from lumentrace.world.world import World

_ROUND = 48  # corners of a disc's outline


def part_box(world: World, part: int) -> np.ndarray:
    """(2, 3) smallest and largest coordinates of all copies of a part."""
    mesh = world.arrays.mesh
    faces = world.arrays.bodies.part[mesh.body] == part
    points = mesh.vertex[mesh.corner[faces].ravel()]
    return np.stack([points.min(axis=0), points.max(axis=0)])


def detector_corners(world: World, detector: int) -> np.ndarray:
    """(4, 3)"""
    table = world.arrays.detectors
    return corners(table.place[detector], table.size[detector])


def source_faces(world: World, source: int) -> np.ndarray:
    """(n, 3, 3) corners of the faces that emit; none for other sources."""
    table, mesh = world.arrays.sources, world.arrays.mesh
    own = table.face[table.face_first[source] : table.face_first[source + 1]]
    return mesh.vertex[mesh.corner[own]]


def source_outline(world: World, source: int) -> np.ndarray:
    """(n, 3) of a disc, a rectangle, a point (n = 1), or the corners of emitting faces."""
    faces = source_faces(world, source)
    if len(faces):
        return faces.reshape(-1, 3)
    place, size = world.arrays.sources.place[source], world.arrays.sources.size[source]
    if not size.any():
        return place[:1]
    if size[1]:
        return corners(place, size)
    angle = 2.0 * np.pi * np.arange(_ROUND) / _ROUND
    return place[0] + size[0] * np.stack([np.cos(angle), np.sin(angle)], axis=-1) @ place[2:]


def glowing_parts(world: World) -> set[int]:
    """Parts with faces that emit."""
    mesh, faces = world.arrays.mesh, world.arrays.sources.face
    return set(world.arrays.bodies.part[mesh.body[faces]].tolist())


def heart(world: World, way: np.ndarray | None) -> np.ndarray:
    """(3,) where to cut: the middle of the faces that the way starts from, else its first event;
    without a way the middle of the first source."""
    mesh, faces = world.arrays.mesh, world.arrays.sources.face
    start = source_outline(world, 0).mean(axis=0) if way is None else way[0]
    if not len(faces):
        return start if way is None else way[1]
    centres = mesh.vertex[mesh.corner[faces]].mean(axis=1)
    body = mesh.body[faces]
    nearest = body[np.linalg.norm(centres - start, axis=1).argmin()]
    points = mesh.vertex[mesh.corner[faces[body == nearest]].ravel()]
    return (points.min(axis=0) + points.max(axis=0)) / 2.0
