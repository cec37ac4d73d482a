"""From a mesh file to the mesh of a part: what is wrong is refused, what is changed is told."""

import difflib
import hashlib
from collections import Counter
from dataclasses import dataclass

import numpy as np

from lumentrace.errors import Notice, nearest
from lumentrace.scene.model import BULK, DEFAULT, Part
from lumentrace.scene.names import name_from_mesh
from lumentrace.world.geometry import Facets, facets, largest
from lumentrace.world.obj import read_obj
from lumentrace.world.raw import Labels, MeshFault, RawMesh
from lumentrace.world.stl import read_stl
from lumentrace.world.surface import mesh_fault, mesh_told, wound
from lumentrace.world.words import counted, shown_point

READERS = {".stl": read_stl, ".obj": read_obj}
_POINTER = b"version https://git-lfs"
_ABSURD = 1e12  # no coordinate in any unit is meant to be larger


@dataclass(frozen=True)
class MeshFile:
    """A mesh file as read: what it holds, and the sha256 of its bytes."""

    raw: RawMesh
    digest: str


@dataclass(frozen=True)
class PartMesh:
    """The mesh of one part in its file's own frame and unit."""

    vertex: np.ndarray  # (V, 3) float64, all different, all used
    corner: np.ndarray  # (F, 3) int64
    tag: np.ndarray  # (F,) int64 row of tag_names
    tag_names: tuple[str, ...]  # the file's own, made fit for scene files
    facets: Facets
    closed: bool  # no edge is open, and the faces agree on the outside
    digest: str


def read_file(part: Part) -> MeshFile:
    """Reads the mesh file of a part. Raises UserError where it cannot be read."""
    path = part.mesh
    if path.is_dir():
        raise mesh_fault(part, f"is a folder; allowed: a file that ends in {', '.join(READERS)}")
    reader = READERS.get(path.suffix.lower())
    if reader is None:
        raise mesh_fault(part, f'ends in "{path.suffix}"; allowed: {", ".join(READERS)}')
    if not path.exists():
        folder = path.parent
        there = [p.name for p in folder.iterdir() if p.is_file()] if folder.is_dir() else []
        close = difflib.get_close_matches(path.name, there, n=1)
        raise mesh_fault(
            part, "does not exist" + (f'; did you mean "{close[0]}"?' if close else "")
        )
    try:
        data = path.read_bytes()
    except OSError as error:
        raise mesh_fault(part, f"cannot be read: {error.strerror}") from None
    if not data:
        raise mesh_fault(part, "is empty (0 bytes); export it again")
    if data.startswith(_POINTER):
        raise mesh_fault(
            part, "is a pointer file of large-file storage, not a mesh; fetch it: git lfs pull"
        )
    try:
        raw = reader(data)
    except MeshFault as fault:
        raise mesh_fault(part, str(fault)) from None
    return MeshFile(raw, hashlib.sha256(data).hexdigest())


def part_mesh(part: Part, file: MeshFile) -> tuple[PartMesh, list[Notice]]:
    """The mesh of a part, checked against what it is made of, and what was changed on the way.

    Raises UserError for what SCENE calls refused: no face, coordinates that are no numbers, and an
    open or self-crossing surface around a transparent medium.
    """
    notices: list[Notice] = []
    raw = file.raw
    if not len(raw.corner):
        raise mesh_fault(part, "holds no face")
    _check_coordinates(part, raw)
    chosen = _taken(part, raw)
    names, rows = _own_tags(part, raw.tags, chosen, notices)
    vertex, corner, kept = _welded(part, raw, chosen, notices)
    shape = facets(vertex, corner, largest(vertex))
    if not (shape.area > 0).any():
        raise mesh_fault(part, f"has no face with an area, of {chosen.sum()}")
    _tell_slivers(part, vertex, corner, shape, notices)
    corner, closed = wound(part, vertex, corner, notices)
    mesh = PartMesh(
        vertex,
        corner,
        rows[kept],
        names,
        facets(vertex, corner, largest(vertex)),
        closed,
        file.digest,
    )
    return mesh, notices


def tag_name(name: str) -> str:
    """The tag of faces that a mesh file calls so: DEFAULT without a name, never BULK."""
    clean = name_from_mesh(name) if name else DEFAULT
    return f"{clean}_" if clean == BULK else clean


def _check_coordinates(part, raw):
    """Refuses coordinates that are not finite or beyond all sense."""
    for wrong, what in (
        (~np.isfinite(raw.vertex), "that are not finite numbers"),
        (np.abs(raw.vertex) > _ABSURD, f"beyond {_ABSURD:g}"),
    ):
        rows = np.flatnonzero(wrong.any(axis=1))
        if len(rows):
            used = np.isin(raw.corner, rows).any(axis=1)
            face = f" of face {np.flatnonzero(used)[0] + 1}" if used.any() else ""
            raise mesh_fault(
                part,
                f"has {counted(len(rows), 'corner')} with coordinates {what}, the first{face} at "
                f"{shown_point(raw.vertex[rows[0]])}; export it again",
            )


def _own_tags(part, tags: Labels, chosen, notices):
    """(names, rows): the file's own tags of the chosen faces, under names that a scene can say.

    rows: (F,) int64 of names; without a meaning for faces that are not chosen.
    """
    used = np.unique(tags.row[chosen])
    old = [tags.names[row] for row in used]
    clean = [tag_name(name) for name in old]
    names = tuple(dict.fromkeys(clean))
    pairs = [(was, now) for was, now in zip(old, clean, strict=True) if was]
    changed = [f'"{was}" is called {now}' for was, now in pairs if was != now]
    if changed:
        more = f", and {len(changed) - 4} more" if len(changed) > 4 else ""
        notices.append(
            mesh_told(part, f"names faces that need another name: {', '.join(changed[:4])}{more}")
        )
    count = Counter(now for _, now in pairs)
    merged = [name for name in names if count[name] > 1]
    if merged:
        notices.append(
            mesh_told(part, f"has several names that become one tag: {', '.join(merged)}")
        )
    row_of = np.full(len(tags.names), -1, np.int64)
    row_of[used] = [names.index(name) for name in clean]
    return names, row_of[tags.row]


def _taken(part, raw):
    """(F,) bool: the faces that `take` names, or all."""
    if part.take is None:
        return np.ones(len(raw.corner), bool)
    chosen = np.zeros(len(raw.corner), bool)
    known = {tag_name(n): n for labels in raw.labels for n in labels.names if n}
    for name in part.take:
        if tag_name(name) not in known:
            raise part.place.error(
                "take", f'"{part.mesh.name}" names nothing "{name}"; {nearest(name, known)}'
            )
        for labels in raw.labels:
            rows = [i for i, n in enumerate(labels.names) if n and tag_name(n) == tag_name(name)]
            chosen |= np.isin(labels.row, rows)
    if not chosen.any():
        raise part.place.error("take", f'"{part.mesh.name}" has no face of these names')
    return chosen


def _welded(part, raw, chosen, notices):
    """(vertex, corner, kept): equal corners made one, faces with two equal corners left out.

    kept: (F,) int64 rows of the file's faces. Vertices are in the order of their coordinates.
    """
    rows = np.flatnonzero(chosen)
    used, corner = np.unique(raw.corner[rows], return_inverse=True)
    point = raw.vertex[used] + 0.0  # -0.0 becomes 0.0
    order = np.lexsort(point.T)
    new = np.ones(len(order), bool)
    new[1:] = (point[order[1:]] != point[order[:-1]]).any(axis=1)
    same = np.empty(len(order), np.int64)
    same[order] = np.cumsum(new) - 1
    repeated = len(order) - int(new.sum())
    if repeated and not raw.repeats:
        notices.append(
            mesh_told(part, f"repeats {counted(repeated, 'vertex', 'vertices')}: welded")
        )
    corner = same[corner.reshape(-1, 3)]
    flat = (corner == np.roll(corner, 1, axis=1)).any(axis=1)
    if flat.any():
        place = shown_point(point[order[new]][corner[np.argmax(flat), 0]])
        notices.append(
            mesh_told(
                part,
                f"has {counted(flat.sum(), 'face')} with two equal corners, the first at {place}: "
                "dropped",
            )
        )
        corner, rows = corner[~flat], rows[~flat]
    left, corner = np.unique(corner, return_inverse=True)
    return point[order[new]][left], corner.reshape(-1, 3), rows


def _tell_slivers(part, vertex, corner, shape, notices):
    slivers = np.flatnonzero(shape.area == 0)
    if len(slivers):
        place = shown_point(vertex[corner[slivers[0]]].mean(axis=0))
        notices.append(
            mesh_told(
                part,
                f"has {counted(len(slivers), 'sliver')} without area, the first at {place}: never "
                "hit",
            )
        )
