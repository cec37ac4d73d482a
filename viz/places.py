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


def detector_grid(world: World, detector: int) -> np.ndarray:
    """(n_up + 1, n_across + 1, 3) corners of the cells."""
    table = world.arrays.detectors
    place, half, cells = table.place[detector], table.size[detector], table.cells[detector]
    across, up = (np.linspace(-h, h, n + 1) for h, n in zip(half, cells, strict=True))
    return place[0] + across[None, :, None] * place[2] + up[:, None, None] * place[3]


def source_faces(world: World, source: int) -> np.ndarray:
    """(n,) faces that emit; none for a point, disc or rectangle."""
    table = world.arrays.sources
    return table.face[table.face_first[source] : table.face_first[source + 1]]


def source_outline(world: World, source: int) -> np.ndarray:
    """(n, 3) of a disc, a rectangle, a point (n = 1), or the corners of emitting faces."""
    faces = source_faces(world, source)
    if len(faces):
        return world.arrays.mesh.vertex[world.arrays.mesh.corner[faces]].reshape(-1, 3)
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


def source_middle(world: World, source: int, near: np.ndarray | None = None) -> np.ndarray:
    """(3,) of a source; of the copy nearest to a point, of the first without one."""
    faces, mesh = source_faces(world, source), world.arrays.mesh
    if not len(faces):
        return source_outline(world, source).mean(axis=0)
    centres = mesh.vertex[mesh.corner[faces]].mean(axis=1)
    first = 0 if near is None else np.linalg.norm(centres - near, axis=1).argmin()
    copy = faces[mesh.body[faces] == mesh.body[faces[first]]]
    points = mesh.vertex[mesh.corner[copy].ravel()]
    return (points.min(axis=0) + points.max(axis=0)) / 2.0
