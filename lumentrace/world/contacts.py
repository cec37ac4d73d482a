"""What touches what, and what light does there."""

from collections.abc import Sequence

import numpy as np

from lumentrace.scene.model import DEFAULT, Scene
from lumentrace.world.arrays import DRY, OPAQUE, OPTICAL, TRANSPARENT
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.geometry import EPSILON
from lumentrace.world.world import ContactFacts

# Further kinds, beside those of the engine's arrays.
FLUSH = 2  # a face of an opaque part that lies within a transparent one, in a face of that
NO_LIGHT = 3  # between parts without light inside
TAKEN = {
    DRY: "dry",
    OPTICAL: "optical contact",
    FLUSH: "flush, the opaque face acts",
    NO_LIGHT: "no light between",
}


def touch_distances(bodies: Sequence[Body], touch: float | None, size: float):
    """(B,) distance within which each body touches others.

    That of the study, or the rounding of the body's file (`geometry.file_rounding`); and 16
    roundings of the scene's largest coordinate `size`, for placing the bodies.
    """
    distance = np.array([body.rounding if touch is None else touch for body in bodies])
    return distance + 16 * EPSILON * size


def kinds(parts: Sequence[BuiltPart], part_a, part_b, opposed):
    """(P,) kind of each contact of faces of two parts: DRY, OPTICAL, FLUSH or NO_LIGHT.

    Two transparent parts are in optical contact. What has no inside lies dry on a transparent part;
    but where the normals of both point the same way, a closed opaque part lies within the
    transparent one with a face flush, and there is no gap for light to enter.
    """
    kind = np.array([built.kind for built in parts], np.int64)
    solid = np.array([built.kind == OPAQUE and built.mesh.closed for built in parts], bool)
    clear_a, clear_b = kind[part_a] == TRANSPARENT, kind[part_b] == TRANSPARENT
    flush = ~opposed & (solid[part_a] | solid[part_b])
    one_clear = np.where(flush, FLUSH, DRY)
    return np.where(clear_a & clear_b, OPTICAL, np.where(clear_a | clear_b, one_clear, NO_LIGHT))


def contact_facts(parts: Sequence[BuiltPart], part_a, part_b, kind, area, gap):
    """Contacts between parts over all copies, in the order of the file; arguments are (P,)."""
    keys = np.stack([np.minimum(part_a, part_b), np.maximum(part_a, part_b), kind], axis=1)
    rows, of_row = np.unique(keys, axis=0, return_inverse=True)
    total = np.bincount(of_row, weights=area, minlength=len(rows))
    largest = np.zeros(len(rows))
    np.maximum.at(largest, of_row, gap)
    return tuple(
        ContactFacts((parts[a].part.name, parts[b].part.name), float(t), float(g), TAKEN[k])
        for (a, b, k), t, g in zip(rows.tolist(), total, largest, strict=True)
    )


def refuse_two_finishes(scene: Scene, parts: Sequence[BuiltPart], tag_a, tag_b, kind):
    """Raises UserError where two faces in optical contact both name a finish, at equal priority.

    tag_a, tag_b: (P,) rows of the tags of all parts.
    """
    owner = [built for built in parts for _ in built.tags.names]
    name = [tag for built in parts for tag in built.tags.names]
    for a, b in np.unique(np.stack([tag_a, tag_b], axis=1)[kind == OPTICAL], axis=0).tolist():
        one, other = owner[a], owner[b]
        same = one.part.priority == other.part.priority
        if one.kind == other.kind == TRANSPARENT and same:
            finishes = [_finish(scene, owner[t], name[t]) for t in (a, b)]
            if all(finishes):
                raise other.part.place.error(
                    "finish",
                    f'"{other.part.name}:{name[b]}" ({finishes[1]}) and '
                    f'"{one.part.name}:{name[a]}" ({finishes[0]}) lie on one another and both name '
                    "a finish; leave one of them uncoated, or give one part a larger priority",
                )


def _finish(scene: Scene, built: BuiltPart, tag: str) -> str | None:
    """The finish that a tag names, None where it is uncoated."""
    finish = built.part.finish.get(tag, built.part.finish[DEFAULT]).front
    return None if scene.finishes[finish].uncoated else finish


def pair_table(n_prims: int, a, b, gap, kind):
    """The `pair_*` and `widest_gap` of `arrays.Mesh` by name: each pair from both ends.

    FLUSH becomes OPTICAL, one event in which the opaque face outranks. NO_LIGHT becomes DRY: light
    that a source emits into the gap of two opaque faces, or that a sheet lets through onto one,
    stays in the gap.
    """
    kind = np.where(kind == FLUSH, OPTICAL, np.where(kind == NO_LIGHT, DRY, kind))
    start, end = np.concatenate([a, b]), np.concatenate([b, a])
    order = np.lexsort((end, start))
    first = np.zeros(n_prims + 1, np.int32)
    first[1:] = np.cumsum(np.bincount(start, minlength=n_prims))
    both = np.concatenate([gap, gap])
    widest = np.zeros(n_prims)
    np.maximum.at(widest, start, both)
    return {
        "pair_first": first,
        "pair_prim": end[order].astype(np.int32),
        "pair_gap": both[order],
        "widest_gap": widest,
        "pair_kind": np.concatenate([kind, kind])[order].astype(np.int32),
    }
