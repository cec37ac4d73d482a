"""Sources and detectors that closed opaque parts swallow."""

from collections.abc import Sequence

import numpy as np

from lumentrace.errors import Notice
from lumentrace.scene.model import Detector, Faces
from lumentrace.world.arrays import OPAQUE
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.frames import corners, spread_plane
from lumentrace.world.inside import winding
from lumentrace.world.sources import Lit, source_key
from lumentrace.world.start_media import BEFORE, start_points
from lumentrace.world.words import notice


def buried_source(
    lit: Lit, parts: Sequence[BuiltPart], bodies: Sequence[Body], touch
) -> list[Notice]:
    """A point, disc or rectangle all of whose rays start inside opaque parts. touch: (B,)."""
    if isinstance(lit.source.shape, Faces):
        return []
    part = _swallowing(start_points(lit, touch), parts, bodies)
    if part is None:
        return []
    source = lit.source
    text = f"starts inside {part}, which is opaque: no light leaves it"
    return [notice("doubtful", source.place, source_key(source), text)]


def buried_detector(
    detector: Detector,
    place,
    half,
    parts: Sequence[BuiltPart],
    bodies: Sequence[Body],
    distance: float,
) -> list[Notice]:
    """A detector whose counted side lies inside opaque parts.

    place, half: of `frames.detector_frame`; distance: within which bodies touch.
    """
    points = np.concatenate([spread_plane(place, half), corners(place, half - 2 * distance)])
    step = BEFORE * distance * place[1]
    front = _swallowing(points + step, parts, bodies)
    behind = _swallowing(points - step, parts, bodies)
    if front is None or (behind is None and detector.side == "both"):
        return []
    if behind is None:
        text = f"faces into {front}, which is opaque: no light from outside reaches its front"
    else:
        text = f"lies inside {front}, which is opaque: no light from outside reaches it"
    return [notice("doubtful", detector.place, "plane", text)]


def _swallowing(points, parts: Sequence[BuiltPart], bodies: Sequence[Body]) -> str | None:
    """The part that holds the first of the points, (n, 3), if closed opaque parts hold all."""
    holder = np.full(len(points), -1)
    for number, body in enumerate(bodies):
        built = parts[body.part]
        if built.kind != OPAQUE or not built.mesh.closed:
            continue
        maybe = np.flatnonzero(((points > body.lower) & (points < body.upper)).all(axis=1))
        maybe = maybe[holder[maybe] < 0]
        if len(maybe):
            inside = winding(points[maybe], body.vertex, body.corner) != 0
            holder[maybe[inside]] = number
    return bodies[holder[0]].name if (holder >= 0).all() else None
