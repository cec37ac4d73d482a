"""What is legal but often a mistake, or beyond what the physics can say."""

from collections.abc import Sequence

import numpy as np

from lumentrace.errors import Notice
from lumentrace.scene.model import Detector, Scene
from lumentrace.world.arrays import TRANSPARENT, Mesh
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import pierced
from lumentrace.world.frames import corners
from lumentrace.world.geometry import face_boxes, shown_point
from lumentrace.world.materials import AIR, tag_finish
from lumentrace.world.start_media import StartMedium, shown

_IN_A_ROW = 3  # transparent bodies, one behind the other, from which a stack is suspected


def _doubtful(text: str) -> Notice:
    return Notice("doubtful", text)


def start_doubts(scene: Scene, name: str, media: Sequence[StartMedium]) -> list[Notice]:
    """A source that starts in something else than air, and light that cannot leave."""
    if all(start.medium == AIR for start in media):
        return []
    notices = [
        _doubtful(
            f"source {name} starts in {shown(scene, media)}: its flux and pattern are those in there"
        )
    ]
    around = scene.media[scene.study.surroundings].index
    for start in media:
        medium = scene.media[start.medium]
        if start.part is not None and medium.absorption == 0 and medium.index > around:
            notices.append(
                _doubtful(
                    f"source {name} shines inside {start.part}, which absorbs nothing "
                    f"({start.medium}): total reflection may trap light there until events_max"
                )
            )
    return notices


def stack_doubts(scene: Scene, parts: Sequence[BuiltPart], bodies: Sequence[Body]) -> list[Notice]:
    """Refraction at many surfaces in a row, each taken as if the light were unpolarised again."""
    clear = [
        body
        for body in bodies
        if parts[body.part].kind == TRANSPARENT and _any_uncoated(scene, parts[body.part])
    ]
    lower = np.array([body.lower for body in clear]).reshape(-1, 3)
    upper = np.array([body.upper for body in clear]).reshape(-1, 3)
    most = 0
    for axis in range(3):
        low, high = lower.copy(), upper.copy()
        low[:, axis] = high[:, axis] = 0.0
        middle = 0.5 * (low + high)
        row, _ = box_pairs(middle, middle, low, high)
        most = max(most, int(np.bincount(row, minlength=1).max()))
    if most < _IN_A_ROW:
        return []
    return [
        _doubtful(
            f"{most} transparent bodies stand in a row: light is taken as unpolarised at each surface, "
            "which is approximate where it passes several at a slant"
        )
    ]


def _any_uncoated(scene: Scene, built: BuiltPart) -> bool:
    return any(scene.finishes[tag_finish(built, t).front].uncoated for t in built.tags.names)


def detector_doubts(
    detector: Detector, place, size, mesh: Mesh, bodies: Sequence[Body], distance: float
) -> list[Notice]:
    """A detector that faces of parts cross; one that lies on a face is meant to."""
    rim = corners(place, size)
    planes = rim[[[0, 1, 2], [0, 2, 3]]]
    box = np.stack([rim.min(axis=0) - distance, rim.max(axis=0) + distance])
    lower, upper = face_boxes(mesh.vertex, mesh.corner)
    faces = np.flatnonzero(((upper >= box[0]) & (lower <= box[1])).all(axis=1))
    triangle = mesh.vertex[mesh.corner[faces]]
    points, owners = [], []
    for k in range(3):
        for plane in planes:
            start, end = triangle[:, k], triangle[:, (k + 1) % 3]
            row, share = pierced(start, end, np.broadcast_to(plane, triangle.shape), distance)
            points.append(_between(start, end, row, share))
            owners.append(mesh.body[faces[row]][_truly(share)])
    for k in range(4):
        start, end = (np.broadcast_to(rim[(k + i) % 4], (len(faces), 3)) for i in (0, 1))
        row, share = pierced(start, end, triangle, distance)
        points.append(_between(start, end, row, share))
        owners.append(mesh.body[faces[row]][_truly(share)])
    owner = np.concatenate(owners)
    if not len(owner):
        return []
    first = int(np.argmin(owner))
    near = shown_point(np.concatenate(points)[first])
    return [
        _doubtful(
            f"detector {detector.name} is crossed by {bodies[owner[first]].name} near {near}: what "
            "lies inside or behind it counts nothing, or light inside it is counted"
        )
    ]


def _truly(share):
    """Pierced between the ends, not touched by one."""
    return (share > 0) & (share < 1)


def _between(start, end, row, share):
    inner = _truly(share)
    row, share = row[inner], share[inner]
    return start[row] + share[:, None] * (end[row] - start[row])


def rounding_doubts(
    parts: Sequence[BuiltPart], bodies: Sequence[Body], altitude
) -> list[Notice]:
    """Faces that are lost because a copy stands too far from the origin. altitude: (F,)."""
    notices = []
    for body in bodies:
        built = parts[body.part]
        lost = altitude[body.first_face : body.first_face + len(body.corner)] == 0
        lost &= built.mesh.facets.altitude > 0
        if lost.any():
            notices.append(
                _doubtful(
                    f"part {body.name} stands so far from the origin that {lost.sum()} of its faces "
                    "are smaller than rounding there and are never hit"
                )
            )
    return notices
