"""Sources as tables of numbers: flux, rays of a block, emitting faces."""

import hashlib
from collections.abc import Sequence
from math import cos, pi, radians
from typing import NamedTuple

import numpy as np

from lumentrace.errors import nearest
from lumentrace.models.registry import PATTERNS, STARTS, number
from lumentrace.photometry import watts_of
from lumentrace.scene.model import Disc, Faces, Pattern, Point, Rectangle, Source
from lumentrace.world.arrays import Sources
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.dealing import deal_rays
from lumentrace.world.placement import n_copies

_STARTS = {Point: "point", Faces: "faces", Disc: "disc", Rectangle: "rectangle"}


class Lit(NamedTuple):
    """Where one source starts its rays."""

    source: Source
    place: np.ndarray  # (4, 3), see `frames.source_frame`
    size: np.ndarray  # (2,)
    faces: np.ndarray  # (n,) int64 emitting faces of all bodies


def emitting_faces(source: Source, parts: Sequence[BuiltPart], bodies: Sequence[Body], tag, area):
    """(n,) int64 faces with area that a source names, on all copies; none for other sources.

    tag, area: (F,) of the faces of all bodies. Raises UserError for a tag that no face has.
    """
    shape = source.shape
    if not isinstance(shape, Faces):
        return np.empty(0, np.int64)
    row = next(i for i, built in enumerate(parts) if built.part.name == shape.part)
    built = parts[row]
    if shape.tag is not None and shape.tag not in built.tags.names:
        raise source.place.error(
            "faces.tag",
            f'no face of "{shape.part}" has the tag "{shape.tag}"; '
            f"{nearest(shape.tag, built.tags.names)}",
        )
    ranges = [
        np.arange(body.first_face, body.first_face + len(body.corner))
        for body in bodies
        if body.part == row
    ]
    faces = np.concatenate(ranges)
    if shape.tag is not None:
        faces = faces[tag[faces] == built.first_tag + built.tags.names.index(shape.tag)]
    faces = faces[area[faces] > 0]
    if not len(faces):
        raise source.place.error("faces", f'the faces of "{shape.part}" it names have no area')
    return faces


def source_key(source: Source) -> str:
    """The key of the scene file under which a source's shape stands."""
    return _STARTS[type(source.shape)]


def watts(source: Source, parts: Sequence[BuiltPart], metre: float) -> float:
    """Radiant flux of a source in W, over all copies. metre: of one unit of length."""
    flux, shape = source.flux, source.shape
    value = flux.value
    if flux.kind == "lumens":
        value = watts_of(value, source.wavelength)
    elif flux.kind == "irradiance":
        area = pi * shape.radius**2 if isinstance(shape, Disc) else shape.size[0] * shape.size[1]
        value = value * area * metre**2
    if flux.each:
        value *= next(n_copies(b.part) for b in parts if b.part.name == shape.part)
    return value


def key_of(name: str) -> int:
    """What a source's random numbers are keyed by: 64 bits of the digest of its name."""
    return int.from_bytes(hashlib.blake2b(name.encode(), digest_size=8).digest(), "little")


def _pattern_value(pattern: Pattern) -> float:
    if pattern.kind == "collimated":
        return cos(radians(pattern.value))
    return pattern.value


def source_table(lit: Sequence[Lit], flux, immersed, area) -> tuple[Sources, tuple[str, ...]]:
    """(sources, names of the groups). flux: (S,) W; immersed: (S,) bool; area: (F,) of faces."""
    sources = [one.source for one in lit]
    groups = tuple(dict.fromkeys(source.group for source in sources))
    group = np.array([groups.index(source.group) for source in sources], np.int32)
    rays = deal_rays(flux, group, [source.share for source in sources])
    faces = [one.faces for one in lit]
    values = [(_pattern_value(source.pattern), 0.0) for source in sources]
    n = len(sources)
    return Sources(
        start=_numbers(STARTS, [_STARTS[type(source.shape)] for source in sources]),
        place=np.array([one.place for one in lit]).reshape(n, 4, 3),
        size=np.array([one.size for one in lit]).reshape(n, 2),
        pattern=_numbers(PATTERNS, [source.pattern.kind for source in sources]),
        pattern_values=np.array(values, np.float64).reshape(n, 2),
        wavelength=np.array([source.wavelength for source in sources], np.float64),
        ray_flux=flux / np.maximum(rays, 1),
        ray_first=_offsets(rays),
        group=group,
        key=np.array([key_of(source.name) for source in sources], np.uint64),
        immersed=immersed,
        face_first=_offsets([len(some) for some in faces]),
        face=np.concatenate([*faces, np.empty(0, np.int64)]).astype(np.int32),
        face_area=np.concatenate([*(np.cumsum(area[some]) for some in faces), np.empty(0)]),
    ), groups


def _numbers(registry, names):
    return np.array([number(registry, name) for name in names], np.int32)


def _offsets(counts):
    return np.concatenate([[0], np.cumsum(counts)]).astype(np.int32)
