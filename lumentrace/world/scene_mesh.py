"""All bodies as one mesh, and the detectors beside it: what touches what, and the hierarchy."""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from lumentrace.scene.model import Scene
from lumentrace.world.arrays import OPTICAL, Detectors, Mesh
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.bounds import edge_margin, plane_error
from lumentrace.world.contacts import (
    contact_facts,
    kinds,
    pair_table,
    refuse_two_finishes,
)
from lumentrace.world.coplanar import Faces, coplanar_pairs
from lumentrace.world.frames import corners
from lumentrace.world.geometry import Facets, facets, largest


class Joined(NamedTuple):
    """The faces of all bodies, one after another."""

    vertex: np.ndarray  # (V, 3) float64
    corner: np.ndarray  # (F, 3) int64
    body: np.ndarray  # (F,) int64
    tag: np.ndarray  # (F,) int64 row of the tags of all parts
    facets: Facets  # slivers of the file are slivers here


def joined(parts: Sequence[BuiltPart], bodies: Sequence[Body]) -> Joined:
    """The meshes of all bodies in one."""
    counts = np.array([len(body.vertex) for body in bodies], np.int64)
    first = np.concatenate([[0], np.cumsum(counts)])
    each = [_facets(parts[body.part], body) for body in bodies]
    none = np.empty((0, 3))
    return Joined(
        np.concatenate([none, *(body.vertex for body in bodies)]),
        np.concatenate(
            [none.astype(np.int64), *(b.corner + f for b, f in zip(bodies, first, strict=False))]
        ),
        np.repeat(np.arange(len(bodies)), [len(body.corner) for body in bodies]),
        np.concatenate(
            [
                np.empty(0, np.int64),
                *(parts[b.part].tags.row + parts[b.part].first_tag for b in bodies),
            ]
        ),
        Facets(
            np.concatenate([none, *(f.normal for f in each)]),
            *(np.concatenate([np.empty(0), *(f[k] for f in each)]) for k in (1, 2, 3)),
        ),
    )


def _facets(built: BuiltPart, body: Body) -> Facets:
    scale = max(largest(body.vertex), built.part.scale * largest(built.mesh.vertex))
    here = facets(body.vertex, body.corner, scale)
    solid = built.mesh.facets.area > 0
    return Facets(
        np.where(solid[:, None], here.normal, 0.0),
        np.where(solid, here.area, 0.0),
        here.edge,
        np.where(solid, here.altitude, 0.0),
    )


def touching(
    scene: Scene,
    parts: Sequence[BuiltPart],
    bodies: Sequence[Body],
    whole: Joined,
    detectors: Detectors,
    touch,
):
    """(table, facts): the pairs of `arrays.Mesh`, and the contacts between parts.

    touch: (B,). Raises UserError where two faces in optical contact both name a finish.
    """
    n_faces, n_bodies, n_detectors = len(whole.corner), len(bodies), len(detectors.model)
    pairs = coplanar_pairs(_all_faces(whole, n_bodies, detectors, touch))
    between = pairs.b < n_faces  # a detector's triangles come last, so that a is a face
    a, b = pairs.a[between], pairs.b[between]
    part_of = np.array([body.part for body in bodies], np.int64)
    part_a, part_b = part_of[whole.body[a]], part_of[whole.body[b]]
    kind = kinds(parts, part_a, part_b, pairs.opposed[between])
    area, gaps = pairs.area[between], pairs.gap[between]
    on_it = area > 0  # not side by side only
    refuse_two_finishes(scene, parts, whole.tag[a[on_it]], whole.tag[b[on_it]], kind[on_it])
    facts = contact_facts(
        parts, part_a[on_it], part_b[on_it], kind[on_it], area[on_it], gaps[on_it]
    )
    on, detector, gap = _on_detectors(
        pairs.a[~between], (pairs.b[~between] - n_faces) // 2, pairs.gap[~between], n_detectors
    )
    table = pair_table(
        n_faces + n_detectors,
        np.concatenate([a, on]),
        np.concatenate([b, n_faces + detector]),
        np.concatenate([gaps, gap]),
        np.concatenate([kind, np.full(len(on), OPTICAL)]),
    )
    return table, facts


def _all_faces(whole: Joined, n_bodies: int, detectors: Detectors, touch) -> Faces:
    """The faces of all bodies, then two triangles for each detector, which are one owner."""
    n = len(detectors.model)
    rim = np.array(
        [corners(p, s) for p, s in zip(detectors.place, detectors.size, strict=True)]
    ).reshape(n, 4, 3)
    halves = rim[:, [[0, 1, 2], [0, 2, 3]]].reshape(2 * n, 3, 3)
    size = np.repeat(2 * detectors.size, 2, axis=0).reshape(2 * n, 2)
    diagonal = np.linalg.norm(size, axis=1)
    return Faces(
        np.concatenate([whole.vertex[whole.corner], halves]),
        np.concatenate([whole.facets.normal, np.repeat(detectors.place[:, 1], 2, axis=0)]),
        np.concatenate([whole.facets.edge, diagonal]),
        np.concatenate([whole.facets.altitude, size.prod(axis=1) / np.maximum(diagonal, 1e-300)]),
        np.concatenate([whole.body, np.full(2 * n, n_bodies)]),
        np.concatenate([touch[whole.body], np.zeros(2 * n)]),
    )


def _on_detectors(face, detector, gap, n_detectors):
    """(face, detector, gap), each pair once: a detector's two triangles are one plane."""
    keys, row = np.unique(face * max(n_detectors, 1) + detector, return_inverse=True)
    largest_gap = np.zeros(len(keys))
    np.maximum.at(largest_gap, row, gap)
    return keys // max(n_detectors, 1), keys % max(n_detectors, 1), largest_gap


def mesh_arrays(whole: Joined, closed, table, size: float) -> Mesh:
    """The mesh as the engine wants it. closed: (B,); size: largest coordinate of the scene."""
    return Mesh(
        vertex=whole.vertex,
        corner=whole.corner.astype(np.int32),
        normal=whole.facets.normal,
        error=plane_error(size, whole.facets.edge, whole.facets.altitude),
        margin=edge_margin(size, whole.facets.altitude),
        body=whole.body.astype(np.int32),
        tag=whole.tag.astype(np.int32),
        closed=closed,
        **table,
    )
