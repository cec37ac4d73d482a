"""Parts that share room: one cuts into another, or lies inside it."""

from collections.abc import Sequence

import numpy as np

from lumentrace.world.arrays import SHEET, TRANSPARENT
from lumentrace.world.bodies import Body, BuiltPart
from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import open_pierced, surface_enters
from lumentrace.world.geometry import face_boxes
from lumentrace.world.inside import winding
from lumentrace.world.nesting import wholly_inside
from lumentrace.world.topology import shell_faces
from lumentrace.world.world import ContactFacts


def shared_room(parts: Sequence[BuiltPart], bodies: Sequence[Body], touch) -> list[ContactFacts]:
    """Pairs of parts that overlap by more than `touch`, (B,), or of which one is inside another.

    `taken` is ``overlaps; ...`` or ``NAME inside; ...``, and then what acts in the shared room.
    Each pair is listed once for all copies. Of bodies whose boxes do not meet nothing is asked.
    """
    boxes = _Boxes(bodies)
    found: dict[tuple, ContactFacts] = {}
    apart: dict[int, list[int]] = {}  # bodies in the box of another whose surfaces do not meet
    for i, j in zip(*box_pairs(boxes.lower, boxes.upper, boxes.lower, boxes.upper), strict=True):
        a, b = bodies[i], bodies[j]
        distance = max(touch[i], touch[j])
        if i >= j or (a.part, b.part, None) in found or _only_touch(parts, a, b, distance):
            continue
        if not boxes.faces_meet(i, j, distance):
            for inner, outer in ((i, j), (j, i)):
                if parts[bodies[outer].part].mesh.closed and boxes.within(inner, outer):
                    apart.setdefault(outer, []).append(inner)
        elif _cross(parts[a.part], a, parts[b.part], b, distance):
            text = f"overlaps; {_acting(parts[a.part], parts[b.part])}"
            found[a.part, b.part, None] = _fact(parts, a, b, text)
        else:
            for inner, outer in ((a, b), (b, a)):
                if parts[outer.part].mesh.closed and wholly_inside(inner, outer, distance):
                    _add_inside(found, parts, inner, outer)
    for outer, inners in apart.items():
        for inner in _held(bodies, inners, bodies[outer]):
            _add_inside(found, parts, bodies[inner], bodies[outer])
    return list(found.values())


class _Boxes:
    """Boxes of bodies, and of the faces of those that were asked about."""

    def __init__(self, bodies: Sequence[Body]) -> None:
        self.bodies = bodies
        self.lower = np.array([body.lower for body in bodies]).reshape(-1, 3)
        self.upper = np.array([body.upper for body in bodies]).reshape(-1, 3)
        self._faces: dict[int, tuple[np.ndarray, np.ndarray]] = {}

    def within(self, i: int, j: int) -> bool:
        """Whether body i lies in the box of body j."""
        above = (self.lower[i] >= self.lower[j]).all()
        return bool(above and (self.upper[i] <= self.upper[j]).all())

    def faces_meet(self, i: int, j: int, distance: float) -> bool:
        """Whether boxes of faces of two bodies come within a distance."""
        i, j = sorted((i, j), key=lambda row: len(self.bodies[row].corner))
        lower, upper = self._of_faces(i)
        rows, _ = box_pairs(lower - distance, upper + distance, *self._of_faces(j))
        return len(rows) > 0

    def _of_faces(self, i: int):
        if i not in self._faces:
            self._faces[i] = face_boxes(self.bodies[i].vertex, self.bodies[i].corner)
        return self._faces[i]


def _held(bodies: Sequence[Body], inners: list[int], outer: Body) -> list[int]:
    """Those of the bodies that a closed one holds, whose surface none of them meets."""
    points, owner = [], []
    for inner in inners:
        body = bodies[inner]
        for faces in shell_faces(body.corner):
            points.append(body.vertex[body.corner[faces[0], 0]])
            owner.append(inner)
    inside = winding(np.array(points), outer.vertex, outer.corner) != 0
    out = {one for one, held in zip(owner, inside, strict=True) if not held}
    return [inner for inner in inners if inner not in out]


def _add_inside(found, parts, inner: Body, outer: Body) -> None:
    one, other = parts[inner.part], parts[outer.part]
    text = f"{one.part.name} inside; {_acting(one, other)}"
    found[inner.part, outer.part, "inside"] = _fact(parts, inner, outer, text)


def _fact(parts, a: Body, b: Body, taken: str) -> ContactFacts:
    one, other = (parts[row].part.name for row in sorted((a.part, b.part)))
    return ContactFacts((one, other), None, None, taken)


def _only_touch(parts, a: Body, b: Body, distance) -> bool:
    """Whether the boxes share too little for two closed bodies to do more than touch."""
    shared = np.minimum(a.upper, b.upper) - np.maximum(a.lower, b.lower)
    closed = parts[a.part].mesh.closed and parts[b.part].mesh.closed
    return closed and bool((shared <= 2 * distance).any())


def _cross(one: BuiltPart, a: Body, other: BuiltPart, b: Body, distance) -> bool:
    """Whether two bodies cross. Transparent ones of equal priority do not: `nesting` refuses it."""
    if one.kind == other.kind == TRANSPARENT and one.part.priority == other.part.priority:
        return False
    return _enters(a, other, b, distance) or _enters(b, one, a, distance)


def _enters(a: Body, other: BuiltPart, b: Body, distance) -> bool:
    surfaces = (a.vertex, a.corner, b.vertex, b.corner)
    if other.mesh.closed:
        return surface_enters(*surfaces, distance) is not None
    return open_pierced(*surfaces, distance)


def _acting(one: BuiltPart, other: BuiltPart) -> str:
    """What acts where two parts share room; of two of equal priority the first is the inner."""
    clear = [built.kind == TRANSPARENT for built in (one, other)]
    if not any(clear):
        return "no light between"
    if not all(clear):
        solid = other if clear[0] else one
        return "the sheet acts" if solid.kind == SHEET else "the opaque face acts"
    if one.part.priority == other.part.priority:
        return f"{one.part.name} acts"
    higher = max((one, other), key=lambda built: built.part.priority)
    return f"{higher.part.name} acts by priority"
