"""The study as checked, frozen objects: what the scene file says once every name is resolved.

All lengths are in the study's unit, but those of a `Pick`, which are in the mesh file's own frame
and unit. Angles are in degrees, wavelengths in nm, absorption per study's unit of length.
Directions have length 1. Nothing here needs a mesh.
"""

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from lumentrace.errors import Notice
from lumentrace.scene.place import Place

Vector = tuple[float, float, float]

OPAQUE = "opaque"  # the medium of a part with no light inside
SHEET = "sheet"  # the medium of a thin two-sided surface
UNCOATED = "uncoated"  # the built-in finish: Fresnel
DEFAULT = "default"  # the tag of the faces that no rule and no name of the mesh file takes
BULK = "bulk"  # the medium of a part, where a tag is named


def _place():
    """Where it stands; two objects that say the same are equal wherever they stand."""
    return field(compare=False, repr=False)


@dataclass(frozen=True)
class Study:
    title: str
    length: str  # "mm", "cm", "m", "in", "ft"
    metre: float  # metres in one unit of length
    seed: int
    surroundings: str  # name of a medium
    touch: float | None  # tolerance within which parts touch; None: rounding of the files
    place: Place = _place()


@dataclass(frozen=True)
class Medium:
    name: str
    index: float  # relative to air
    absorption: float  # 1 / unit of length
    place: Place | None = _place()  # None: built in


@dataclass(frozen=True)
class Finish:
    """Shares of the incident light; what they leave of 1 is absorbed. Uncoated: Fresnel."""

    name: str
    diffuse: float
    mirror: float
    diffuse_through: float
    uncoated: bool
    place: Place | None = _place()  # None: built in


@dataclass(frozen=True)
class SideFinish:
    """Names of the finishes seen from the front (where normals point) and from behind."""

    front: str
    back: str


@dataclass(frozen=True)
class Turn:
    """Right-handed rotation about an axis through the origin."""

    axis: Vector
    degrees: float


@dataclass(frozen=True)
class Grid:
    """Copies along the scene's axes, the first where the part stands."""

    count: tuple[int, int, int]
    step: Vector


@dataclass(frozen=True)
class Ring:
    """Copies turned one after another about an axis through the center."""

    count: int
    axis: Vector
    degrees: float  # from one copy to the next
    center: Vector


@dataclass(frozen=True)
class Tube:
    """The space between two coaxial cylinders that end at `from_` and `to`."""

    from_: Vector
    to: Vector
    inner: float
    outer: float


@dataclass(frozen=True)
class Pick:
    """A choice of faces in the mesh file's own frame and unit; all that is not None must hold."""

    facing: Vector | None
    within: float | None  # degrees from `facing`
    box: tuple[Vector, Vector] | None  # smallest and largest corner
    grow_from: Vector | None
    over: float | None  # degrees: growth crosses edges that bend less
    tube: Tube | None
    tag: str | None  # a name of the mesh file's own


@dataclass(frozen=True)
class TagRule:
    name: str
    picks: tuple[Pick, ...]  # any of them
    place: Place = _place()


@dataclass(frozen=True)
class Part:
    name: str
    mesh: Path  # absolute
    medium: str  # name of a medium, OPAQUE or SHEET
    finish: dict[str, SideFinish]  # by tag; always holds DEFAULT
    turn: tuple[Turn, ...]  # in this order, about the mesh's own origin
    at: Vector  # then moved there
    repeat: Grid | Ring | None
    take: tuple[str, ...] | None  # names of the mesh file; None: all of it
    scale: float  # study's units in one unit of the mesh file
    use: bool
    priority: int
    flip: bool
    tags: tuple[TagRule, ...]
    place: Place = _place()


@dataclass(frozen=True)
class Point:
    at: Vector


@dataclass(frozen=True)
class Faces:
    part: str
    tag: str | None  # None: all faces of the part


@dataclass(frozen=True)
class Disc:
    center: Vector
    normal: Vector
    radius: float


@dataclass(frozen=True)
class Rectangle:
    center: Vector
    normal: Vector
    across: Vector  # not parallel to the normal; need not be at right angles to it
    size: tuple[float, float]  # along `across`, along normal x across


@dataclass(frozen=True)
class Flux:
    kind: Literal["watts", "lumens", "irradiance"]  # W, lm, W/m2
    value: float
    each: bool  # of every copy of the part instead of over all


@dataclass(frozen=True)
class Pattern:
    kind: Literal["lambertian", "isotropic", "cosine_power", "collimated"]
    value: float  # exponent m of cos^m | half-angle in degrees | 0


@dataclass(frozen=True)
class Source:
    """`turn` and `at`, about the scene's origin, are still to be applied to `shape`."""

    name: str
    shape: Point | Faces | Disc | Rectangle
    flux: Flux
    pattern: Pattern
    wavelength: float  # nm
    group: str  # its own name unless it names one
    share: float
    turn: tuple[Turn, ...]
    at: Vector
    use: bool
    place: Place = _place()


@dataclass(frozen=True)
class Detector:
    """A plane with cells; `turn` and `at`, about the scene's origin, are still to be applied."""

    name: str
    center: Vector
    normal: Vector
    across: Vector  # not parallel to the normal; need not be at right angles to it
    size: tuple[float, float]  # along `across`, along normal x across
    cells: tuple[int, int]
    counts: Literal["irradiance", "illuminance"]
    side: Literal["front", "both"]
    catch: bool
    turn: tuple[Turn, ...]
    at: Vector
    use: bool
    place: Place = _place()


@dataclass(frozen=True)
class Until:
    measure: str
    relative_error: float


@dataclass(frozen=True)
class TraceSettings:
    rays: int
    until: Until | None
    rays_max: int
    events_max: int  # of one ray
    map_memory: int  # bytes
    place: Place = _place()


@dataclass(frozen=True)
class Limit:
    measure: str
    at_least: float | None  # in the measure's unit
    at_most: float | None
    note: str
    place: Place = _place()


@dataclass(frozen=True)
class Scene:
    """A whole study. Objects with `use` False are kept here and left out of the world."""

    path: Path  # absolute
    digest: str  # sha256 over the bytes of the scene file and of all included files
    study: Study
    media: dict[str, Medium]  # built-in ones too
    finishes: dict[str, Finish]  # built-in ones too
    parts: tuple[Part, ...]
    sources: tuple[Source, ...]
    detectors: tuple[Detector, ...]
    trace: TraceSettings
    limits: tuple[Limit, ...]
    notices: tuple[Notice, ...]
