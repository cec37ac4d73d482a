"""Placed copies of parts."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lumentrace.scene.model import OPAQUE, SHEET, Part
from lumentrace.world import arrays
from lumentrace.world.geometry import file_rounding
from lumentrace.world.meshes import PartMesh
from lumentrace.world.placement import copies, n_copies
from lumentrace.world.tags import PartTags

_MOST = 2**31 - 1  # faces are numbered by int32


@dataclass(frozen=True)
class BuiltPart:
    """A part in use, with its mesh and the tags of its faces."""

    part: Part
    mesh: PartMesh
    tags: PartTags
    first_tag: int  # row of its first tag among those of all parts

    @property
    def kind(self) -> int:
        """OPAQUE, SHEET or TRANSPARENT of `world.arrays`."""
        return {OPAQUE: arrays.OPAQUE, SHEET: arrays.SHEET}.get(
            self.part.medium, arrays.TRANSPARENT
        )


@dataclass(frozen=True)
class Body:
    """One placed copy of a part."""

    name: str  # "die", or "die (3)" for the third copy
    part: int  # row of the parts in use
    vertex: np.ndarray  # (V, 3) float64 in the scene's frame
    corner: np.ndarray  # (F, 3) int64 rows of its own vertices
    first_face: int  # of its faces among those of all bodies
    lower: np.ndarray  # (3,)
    upper: np.ndarray  # (3,)
    rounding: float  # how far rounding of its file may have moved its faces


def placed(parts: Sequence[BuiltPart]) -> list[Body]:
    """All copies of all parts, in the order of the file, copies of a part together.

    Raises UserError where they have more faces than can be numbered.
    """
    bodies: list[Body] = []
    first_face = 0
    for row, built in enumerate(parts):
        part, mesh = built.part, built.mesh
        count = n_copies(part)
        total = first_face + count * max(len(mesh.corner), len(mesh.vertex))
        if total > _MOST:
            raise part.place.error(
                "repeat",
                f"{count} copies of {len(mesh.corner)} faces are too many; allowed: {_MOST}",
            )
        scaled = mesh.vertex * part.scale
        rounding = file_rounding(scaled)
        for number, pose in enumerate(copies(part), 1):
            vertex = pose.points(scaled)
            name = part.name if count == 1 else f"{part.name} ({number})"
            lower, upper = vertex.min(axis=0), vertex.max(axis=0)
            bodies.append(Body(name, row, vertex, mesh.corner, first_face, lower, upper, rounding))
            first_face += len(mesh.corner)
    return bodies
