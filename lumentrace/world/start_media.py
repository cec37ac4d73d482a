"""What the rays of a source start in."""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from lumentrace.scene.model import Faces, Point, Scene
from lumentrace.world.arrays import DRY, TRANSPARENT, Mesh
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.frames import spread
from lumentrace.world.geometry import triangle_distance
from lumentrace.world.inside import winding
from lumentrace.world.materials import AIR
from lumentrace.world.sources import Lit

BEFORE = 4.0  # distances of touch before a surface at which its medium is looked up
_FACES_ASKED = 16  # emitting faces of one source that are looked at


class StartMedium(NamedTuple):
    """One medium that rays of a source start in."""

    medium: str  # name
    part: str | None  # the part that it fills; None: the surroundings, or the air of a gap
    gap: str | None  # the part across the dry gap that the rays start in


def start_media(
    lit: Lit, parts: Sequence[BuiltPart], bodies: Sequence[Body], rank, mesh: Mesh, touch, around
) -> tuple[StartMedium, ...]:
    """The media that rays of a source start in, at some of its points, in the order found.

    Rays of a face start in the air of a dry gap, where one lies on the face, else just before it,
    outside of all that touches it. rank, touch: (B,) of the bodies; around: name of the medium of
    the surroundings.
    """
    if not isinstance(lit.source.shape, Faces):
        points = start_points(lit, touch)
        return tuple(dict.fromkeys(_holding(points, parts, bodies, rank, around)))
    asked = lit.faces[np.unique(np.linspace(0, len(lit.faces) - 1, _FACES_ASKED).astype(int))]
    found = []
    for face in asked:
        point = mesh.vertex[mesh.corner[face]].mean(axis=0)
        across = _across_gap(point, face, mesh, touch)
        if across is not None:
            part = parts[bodies[mesh.body[across]].part].part
            found.append(StartMedium(AIR, None, part.name))
            continue
        before = point + BEFORE * touch[mesh.body[face]] * mesh.normal[face]
        found.extend(_holding(before[None], parts, bodies, rank, around))
    return tuple(dict.fromkeys(found))


def start_points(lit: Lit, touch):
    """(n, 3) points just before a point, a disc or a rectangle, where its rays start."""
    points = spread(lit.source, lit.place, lit.size)
    if isinstance(lit.source.shape, Point):
        return points
    return points + BEFORE * touch.max(initial=0.0) * lit.place[1]


def _across_gap(point, face, mesh: Mesh, touch):
    """The face that lies dry on a point of an emitting face, or None."""
    rows = np.arange(mesh.pair_first[face], mesh.pair_first[face + 1])
    rows = rows[mesh.pair_kind[rows] == DRY]
    others = mesh.pair_prim[rows]
    distance = triangle_distance(
        np.broadcast_to(point, (len(others), 3)), mesh.vertex[mesh.corner[others]]
    )
    reach = np.maximum(touch[mesh.body[face]], touch[mesh.body[others]])
    near = others[distance <= reach]
    return near[0] if len(near) else None


def _holding(points, parts, bodies, rank, around):
    """The medium that acts at each of the points, (n, 3)."""
    best = np.full(len(points), -1)
    for number, body in enumerate(bodies):
        if parts[body.part].kind != TRANSPARENT:
            continue
        maybe = np.flatnonzero(((points > body.lower) & (points < body.upper)).all(axis=1))
        inside = maybe[winding(points[maybe], body.vertex, body.corner) != 0]
        higher = inside[(best[inside] < 0) | (rank[number] > rank[best[inside]])]
        best[higher] = number
    outside = StartMedium(around, None, None)
    return [_of_part(parts[bodies[row].part]) if row >= 0 else outside for row in best]


def _of_part(built: BuiltPart) -> StartMedium:
    return StartMedium(built.part.medium, built.part.name, None)


def shown(scene: Scene, media: Sequence[StartMedium]) -> str:
    """As `check` shows it: ``index 1.492 (pmma of cover)``; plain ``index 1`` in open air."""
    return " and ".join(_shown(scene, start) for start in media)


def _shown(scene: Scene, start: StartMedium) -> str:
    index = f"index {scene.media[start.medium].index:g}"
    if start.gap is not None:
        return f"{index} (air of the gap to {start.gap})"
    if start.part is not None:
        return f"{index} ({start.medium} of {start.part})"
    return index if start.medium == AIR else f"{index} ({start.medium})"
