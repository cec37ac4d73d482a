"""A scene made ready for tracing: flat arrays, and the names of their rows."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lumentrace.errors import Notice
from lumentrace.scene.model import Scene
from lumentrace.world.arrays import WorldArrays
from lumentrace.world.hierarchy import hierarchy


@dataclass(frozen=True)
class PartFacts:
    """What `check` tells of one part."""

    name: str
    copies: int
    size: np.ndarray  # (3,) of one copy, in the study's unit
    faces: int
    medium: str
    closed: bool
    area: float
    volume: float | None  # of a closed mesh
    mesh_digest: str  # sha256 of the mesh file


@dataclass(frozen=True)
class TagFacts:
    """One part:tag of one copy."""

    name: str
    faces: int
    area: float  # study's unit squared
    share: float  # of the part's area
    finish: str  # as shown: "white_paint", or "front a, back b"


@dataclass(frozen=True)
class ContactFacts:
    """Two parts that touch or share room: everything that was found, over all copies."""

    parts: tuple[str, str]  # in the order of the file
    area: float | None  # on which they touch; None: they share room
    gap: float | None  # the largest, in the study's unit
    taken: str  # of a touch one of `contacts.TAKEN`; else as `shared.shared_room` says


@dataclass(frozen=True)
class World:
    scene: Scene
    tables: WorldArrays  # with an empty hierarchy: see `arrays`
    part_names: tuple[str, ...]
    tag_names: tuple[str, ...]  # "tray:default", row for row with arrays.tags
    body_names: tuple[str, ...]  # "die", or "die (3)" for the third copy
    source_names: tuple[str, ...]
    group_names: tuple[str, ...]
    detector_names: tuple[str, ...]
    source_flux: np.ndarray  # (S,) float64 W over all copies
    source_start: tuple[str, ...]  # what each source's rays start in, as `check` shows it
    parts: tuple[PartFacts, ...]
    tags: tuple[TagFacts, ...]
    contacts: tuple[ContactFacts, ...]
    notices: tuple[Notice, ...]
    touch: tuple[float, float] = (0.0, 0.0)  # smallest and largest tolerance of touching

    @cached_property
    def arrays(self) -> WorldArrays:
        """What the engine traces: the tables, with the hierarchy built.

        At first use only: that takes compiled code, and checking a scene must not wait for it.
        """
        return self.tables._replace(tree=hierarchy(self.tables.mesh, self.tables.detectors))
