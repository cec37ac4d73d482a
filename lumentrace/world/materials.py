"""Finishes, tags and media as tables of numbers."""

from collections.abc import Sequence

import numpy as np

from lumentrace.models.registry import LOBES, MEDIA, number
from lumentrace.scene.model import DEFAULT, UNCOATED, Finish, Medium, Scene, SideFinish
from lumentrace.world.arrays import TRANSPARENT, Finishes, Media, Tags
from lumentrace.world.bodies import BuiltPart

AIR = "air"


def tag_finish(built: BuiltPart, tag: str) -> SideFinish:
    """The finishes of the two sides of a tag."""
    return built.part.finish.get(tag, built.part.finish[DEFAULT])


def finish_tables(scene: Scene, parts: Sequence[BuiltPart]) -> tuple[Tags, Finishes]:
    """The tags of all parts in order, and the finishes that they use, the uncoated one first."""
    sides = [tag_finish(built, tag) for built in parts for tag in built.tags.names]
    used = [UNCOATED, *(name for side in sides for name in (side.front, side.back))]
    names = list(dict.fromkeys(used))
    lobes = [_lobes(scene.finishes[name]) for name in names]
    counts = [len(of_one) for of_one in lobes]
    flat = [lobe for of_one in lobes for lobe in of_one]
    finishes = Finishes(
        np.concatenate([[0], np.cumsum(counts)]).astype(np.int32),
        np.array([model for model, _ in flat], np.int32),
        np.array([share for _, share in flat], np.float64),
    )
    owner = [row for row, built in enumerate(parts) for _ in built.tags.names]
    tags = Tags(
        np.array(owner, np.int32),
        np.array([names.index(side.front) for side in sides], np.int32),
        np.array([names.index(side.back) for side in sides], np.int32),
    )
    return tags, finishes


def _lobes(finish: Finish) -> list[tuple[int, float]]:
    """(model, share) of the lobes of a finish that have a share; a black finish has none."""
    if finish.uncoated:
        return [(number(LOBES, "fresnel"), 1.0)]
    shares = {
        "lambertian": finish.diffuse,
        "mirror": finish.mirror,
        "lambertian_through": finish.diffuse_through,
    }
    return [(number(LOBES, name), share) for name, share in shares.items() if share > 0]


def medium_table(scene: Scene, parts: Sequence[BuiltPart]) -> tuple[Media, list[int]]:
    """(media, row of each part): the surroundings, air, then what fills parts; -1: nothing."""
    filled = [built.part.medium for built in parts if built.kind == TRANSPARENT]
    names = [scene.study.surroundings, AIR]  # SURROUNDINGS_ROW, AIR_ROW
    names += [name for name in dict.fromkeys(filled) if name not in names]
    media = [scene.media[name] for name in names]
    rows = [names.index(b.part.medium) if b.kind == TRANSPARENT else -1 for b in parts]
    values = np.array([_values(medium) for medium in media], np.float64)
    return Media(np.full(len(media), number(MEDIA, "uniform"), np.int32), values), rows


def _values(medium: Medium) -> tuple[float, float, float, float]:
    return medium.index, medium.absorption, 0.0, 0.0
