"""Which tag each face of a part has: the rules of the scene file, then the mesh file's own."""

from dataclasses import dataclass

import numpy as np

from lumentrace.errors import nearest
from lumentrace.scene.model import DEFAULT, Part, Pick, TagRule
from lumentrace.world.meshes import PartMesh, tag_name
from lumentrace.world.picks import nearest_face, picked

_FREE = -1


@dataclass(frozen=True)
class PartTags:
    """The tags of a part that have faces: rules in their order, the file's own, DEFAULT last."""

    names: tuple[str, ...]
    row: np.ndarray  # (F,) int64 row of names


def part_tags(part: Part, mesh: PartMesh) -> PartTags:
    """Tags of the faces of a part.

    Raises UserError for a rule that takes no face, and for a finish whose tag has no face.
    """
    names = list(dict.fromkeys([*(rule.name for rule in part.tags), *mesh.tag_names]))
    names = [*(name for name in names if name != DEFAULT), DEFAULT]
    row = np.full(len(mesh.corner), _FREE, np.int64)
    for rule in part.tags:
        row[_taken(part, rule, mesh, row, names)] = names.index(rule.name)
    own = np.array([names.index(name) for name in mesh.tag_names], np.int64)
    used, row = np.unique(np.where(row == _FREE, own[mesh.tag], row), return_inverse=True)
    tags = PartTags(tuple(names[i] for i in used), row)
    for name in part.finish:
        if name != DEFAULT and name not in tags.names:
            raise part.place.error(
                f"finish.{name}",
                f'no face of the part has the tag "{name}"; {nearest(name, tags.names)}',
            )
    return tags


def _taken(part: Part, rule: TagRule, mesh: PartMesh, row, names):
    """(F,) bool: the faces that a rule takes, of those that no rule before it took."""
    free = row == _FREE
    chosen = np.zeros(len(row), bool)
    for pick in rule.picks:
        own = _own(part, rule, pick, mesh)
        chosen |= picked(pick, mesh.vertex, mesh.corner, mesh.facets, own, free)
    if not (chosen & free).any():
        raise rule.place.error("pick", _why_none(rule, mesh, chosen, row, names))
    return chosen & free


def _own(part: Part, rule: TagRule, pick: Pick, mesh: PartMesh):
    """(F,) bool: the faces that the mesh file itself gives the tag of a pick."""
    if pick.tag is None:
        return np.ones(len(mesh.corner), bool)
    name = tag_name(pick.tag)
    if name not in mesh.tag_names:
        raise rule.place.error(
            "pick",
            f'"{part.mesh.name}" has no tag "{pick.tag}"; {nearest(name, mesh.tag_names)}',
        )
    return mesh.tag == mesh.tag_names.index(name)


def _why_none(rule: TagRule, mesh: PartMesh, chosen, row, names):
    """Why a rule takes no face: others took them, or it fits none."""
    starts = [
        nearest_face(pick.grow_from, mesh.vertex, mesh.corner)
        for pick in rule.picks
        if pick.grow_from is not None
    ]
    gone = np.flatnonzero(chosen & (row != _FREE))
    gone = [*gone, *(face for face in starts if row[face] != _FREE)]
    if gone:
        return f'takes no face: the tag "{names[row[gone[0]]]}", which stands before, has them'
    lower, upper = mesh.vertex.min(axis=0), mesh.vertex.max(axis=0)
    size = ", ".join(f"{a:.6g} to {b:.6g}" for a, b in zip(lower, upper, strict=True))
    return f"takes no face; the mesh file's own frame spans {size} in x, y, z"
