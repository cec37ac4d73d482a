"""Is the surface of a part fit for what fills it? Its winding, its holes, its crossings."""

from lumentrace.errors import Notice, UserError
from lumentrace.scene.model import OPAQUE, SHEET, Part
from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import is_star, self_crossings, surfaces_cross
from lumentrace.world.geometry import file_rounding
from lumentrace.world.topology import (
    edges_of,
    inside_out,
    reverse,
    shell_boxes,
    shell_faces,
    to_reverse,
    unbalanced,
)
from lumentrace.world.words import counted, notice, shown_point


def mesh_fault(part: Part, text: str) -> UserError:
    """The error about a part's mesh file."""
    return part.place.error("mesh", f'"{part.mesh.name}" {text}')


def mesh_told(part: Part, text: str) -> Notice:
    """The remark about a part's mesh file."""
    return notice("told", part.place, "mesh", f'"{part.mesh.name}" {text}')


def wound(part: Part, vertex, corner, notices: list[Notice]):
    """(corner, closed): faces wound so that normals point outward, as far as there is an outside.

    A sheet is left as the file has it, but for `flip`. Adds to the notices what was changed.
    Raises UserError where a medium fills what is not closed, or crosses itself.
    """
    turn, two_sided = to_reverse(corner)
    if part.medium == SHEET:
        if turn.any() or not two_sided:
            notices.append(_no_one_front(part, turn))
        corner = corner[:, ::-1] if part.flip else corner
        return corner, not unbalanced(edges_of(corner)).any()
    if turn.any():
        notices.append(
            mesh_told(
                part, f"has {counted(turn.sum(), 'face')} wound against the neighbours: turned"
            )
        )
        corner = reverse(corner, turn)
    edges = edges_of(corner)
    is_open = unbalanced(edges)
    if part.medium != OPAQUE:
        _require_solid(part, vertex, edges, is_open, two_sided)
    if is_open.any():
        at = shown_point(vertex[edges.ends[is_open][0]].mean(axis=0))
        notices.append(
            mesh_told(
                part,
                f"is open at {counted(is_open.sum(), 'edge')}, the first at {at}: used as it is",
            )
        )
    elif part.flip:
        raise part.place.error(
            "flip",
            f'"{part.mesh.name}" is closed: its normals point outward; only those of a sheet or of '
            "an open part can be turned",
        )
    corner = _outward(part, vertex, corner[:, ::-1] if part.flip else corner, notices)
    if part.medium != OPAQUE:
        _refuse_crossing(part, vertex, corner)
    return corner, not is_open.any()


def _no_one_front(part, turn):
    return notice(
        "doubtful",
        part.place,
        "mesh",
        f'neighbouring faces of "{part.mesh.name}" disagree on the front '
        f"({turn.sum()} of {len(turn)} face the other way)",
    )


def _outward(part, vertex, corner, notices):
    """The faces with those of closed shells that are inside out turned, and told."""
    wrong = inside_out(vertex, corner, file_rounding(vertex))
    if wrong.all():
        notices.append(mesh_told(part, "is inside out: turned"))
    elif wrong.any():
        notices.append(
            mesh_told(
                part, f"has closed surfaces of {counted(wrong.sum(), 'face')} inside out: turned"
            )
        )
    return reverse(corner, wrong)


def _require_solid(part, vertex, edges, is_open, two_sided):
    """Refuses a surface that does not tell inside from outside."""
    crowded = edges.count > 2
    for wrong, text in (
        (is_open & ~crowded, "is open: {n} with a face on one side only"),
        (crowded, "has {n} with more than two faces"),
    ):
        if wrong.any():
            at = shown_point(vertex[edges.ends[wrong][0]].mean(axis=0))
            raise mesh_fault(
                part,
                f"{text.format(n=counted(wrong.sum(), 'edge'))}, the first at {at}; a medium "
                f"({part.medium}) needs a closed surface: mend it in CAD, or make the part "
                '"opaque" or a "sheet"',
            )
    if not two_sided:
        raise mesh_fault(part, f"has one side only; a medium ({part.medium}) needs an inside")


def _refuse_crossing(part, vertex, corner):
    """Refuses a surface around a medium that crosses itself."""
    rounding = file_rounding(vertex)
    shells = [corner[faces] for faces in shell_faces(corner)]
    points = []
    if not all(is_star(vertex, shell) for shell in shells):  # cheap, and true of most lenses
        points = self_crossings(vertex, corner, rounding)
    if not len(points):
        points = _shells_crossing(vertex, shells, rounding)
    if len(points):
        at = shown_point(points[0])
        raise mesh_fault(
            part,
            f"crosses itself in {counted(len(points), 'place')}, the first at {at}; a medium "
            f"({part.medium}) needs a surface that does not: unite the bodies in CAD",
        )


def _shells_crossing(vertex, shells, rounding):
    """Points, one a pair, where closed shells of one mesh lie in one another."""
    i, j = box_pairs(*shell_boxes(vertex, shells), *shell_boxes(vertex, shells))
    found = (
        surfaces_cross(vertex, shells[a], vertex, shells[b], rounding)
        for a, b in zip(i[i < j], j[i < j], strict=True)
    )
    return [point for point in found if point is not None]
