"""What is legal but often a mistake, or beyond what the physics can say."""

from collections.abc import Sequence

import numpy as np

from lumentrace.errors import Notice
from lumentrace.scene.model import Detector, Scene, Source
from lumentrace.world.arrays import TRANSPARENT, Mesh
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import pierced
from lumentrace.world.frames import corners
from lumentrace.world.geometry import face_boxes
from lumentrace.world.materials import AIR, tag_finish
from lumentrace.world.sources import source_key
from lumentrace.world.start_media import StartMedium, shown
from lumentrace.world.words import counted, notice, shown_point

_IN_A_ROW = 3  # transparent bodies, one behind the other, from which a stack is suspected
_FLAT = 1.5  # times its smallest extent: no more than that is how deep a plate is along a stack


def start_doubts(scene: Scene, source: Source, media: Sequence[StartMedium]) -> list[Notice]:
    """A source that starts in something else than air, and light that cannot leave."""
    if all(start.medium == AIR for start in media):
        return []
    notices = [
        notice(
            "doubtful",
            source.place,
            source_key(source),
            f"starts in {shown(scene, media)}: flux and pattern are those in there",
        )
    ]
    around = scene.media[scene.study.surroundings].index
    for start in media:
        medium = scene.media[start.medium]
        if start.part is not None and medium.absorption == 0 and medium.index > around:
            notices.append(
                notice(
                    "doubtful",
                    source.place,
                    source_key(source),
                    f"shines inside {start.part}, which absorbs nothing ({start.medium}): total "
                    "reflection may trap light there until events_max",
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
    extent = upper - lower
    longest: list[int] = []
    for axis in range(3):
        flat = extent[:, axis] <= _FLAT * extent.min(axis=1)
        low, high = lower[flat], upper[flat]
        low[:, axis] = high[:, axis] = 0.0
        middle = 0.5 * (low + high)
        row, met = box_pairs(middle, middle, low, high)
        stack = met[row == np.bincount(row, minlength=1).argmax()]
        if len(stack) > len(longest):
            stack = np.flatnonzero(flat)[stack]
            longest = stack[np.argsort(lower[stack, axis], kind="stable")].tolist()
    if len(longest) < _IN_A_ROW:
        return []
    first, last = clear[longest[0]], clear[longest[-1]]
    return [
        notice(
            "doubtful",
            parts[first.part].part.place,
            "medium",
            f"{len(longest)} transparent bodies stand in a row, from {first.name} to {last.name}: "
            "light is taken as unpolarised at each surface, which is approximate where it passes "
            "several at a slant",
        )
    ]


def _any_uncoated(scene: Scene, built: BuiltPart) -> bool:
    return any(scene.finishes[tag_finish(built, t).front].uncoated for t in built.tags.names)


def detector_doubts(
    detector: Detector, place, half, mesh: Mesh, bodies: Sequence[Body], distance: float
) -> list[Notice]:
    """A detector that parts pass through; one that touches them, within `distance`, does not.

    place, half: of `frames.detector_frame`.
    """
    rim = corners(place, half - 2 * distance)  # so that a face along the rim is not met
    lower, upper = face_boxes(mesh.vertex, mesh.corner)
    meets = (upper >= rim.min(axis=0) - distance) & (lower <= rim.max(axis=0) + distance)
    faces = np.flatnonzero(meets.all(axis=1))
    triangle = mesh.vertex[mesh.corner[faces]]
    found = [
        *(
            _through_plane(triangle[:, k], triangle[:, k - 1], place, half, distance)
            for k in range(3)
        ),
        *(_through_faces(rim[k], rim[k - 1], triangle, distance) for k in range(4)),
    ]
    row = np.concatenate([rows for rows, _ in found])
    if not len(row):
        return []
    first = int(np.argmin(row))
    name = bodies[mesh.body[faces[row[first]]]].name
    near = shown_point(np.concatenate([points for _, points in found])[first])
    return [
        notice(
            "doubtful",
            detector.place,
            "plane",
            f"passes through {name} near {near}: some of its cells lie inside that part or behind "
            "it",
        )
    ]


def _through_plane(start, end, place, half, distance):
    """(row, point) of edges, (n, 3), that pass through a rectangle, farther than distance from
    its rim and with ends farther than that from its plane."""
    center, normal, sides = place[0], place[1], place[2:]
    before, after = (start - center) @ normal, (end - center) @ normal
    through = (before * after < 0) & (np.minimum(abs(before), abs(after)) > distance)
    row = np.flatnonzero(through)
    share = before[row] / (before[row] - after[row])
    point = start[row] + share[:, None] * (end[row] - start[row])
    inner = (np.abs((point - center) @ sides.T) < half - distance).all(axis=1)
    return row[inner], point[inner]


def _through_faces(start, end, triangle, distance):
    """(row, point) of triangles that one edge passes through, not touching with an end."""
    starts, ends = (np.broadcast_to(end_, (len(triangle), 3)) for end_ in (start, end))
    row, share = pierced(starts, ends, triangle, distance)
    inner = (share > 0) & (share < 1)
    return row[inner], start + share[inner][:, None] * (end - start)


def rounding_doubts(parts: Sequence[BuiltPart], bodies: Sequence[Body], altitude) -> list[Notice]:
    """Faces that are lost because a copy stands too far from the origin. altitude: (F,)."""
    notices: dict[int, Notice] = {}  # one for each part
    for body in bodies:
        built = parts[body.part]
        lost = altitude[body.first_face : body.first_face + len(body.corner)] == 0
        lost &= built.mesh.facets.altitude > 0
        if lost.any() and body.part not in notices:
            notices[body.part] = notice(
                "doubtful",
                built.part.place,
                "at",
                f"{body.name} stands so far from the origin that rounding there swallows "
                f"{counted(lost.sum(), 'face')}: never hit",
            )
    return list(notices.values())
