"""Parts as meshes to look at: coloured by their finishes, whole or cut open."""

from typing import NamedTuple

import numpy as np
import pyvista

from lumentrace.scene.model import DEFAULT
from lumentrace.world.arrays import SHEET
from lumentrace.world.world import World
from lumentrace_viz.view import Plane, View

GLOW = "#ffb000"  # what emits
_DARK, _LIGHT = 60.0, 255.0  # greys of a finish that reflects nothing, and of one that reflects all
_CREASE = 30.0  # degrees: sharper edges are drawn


class Solid(NamedTuple):
    """All copies of a part, or what a plane leaves of them."""

    kind: int  # OPAQUE, SHEET or TRANSPARENT
    filled: bool  # closed, and no sheet: it has an inside
    mesh: pyvista.PolyData  # cells carry `colour`, `tag` and `glows`
    edges: pyvista.PolyData
    cut: pyvista.PolyData  # the inside laid open
    outline: pyvista.PolyData  # where the plane meets the mesh; its lines carry what the cells do


def solid(world: World, part: int) -> Solid:
    """A part, whole. Grey as its finish in front: the more it reflects, the lighter."""
    bodies, mesh = world.arrays.bodies, world.arrays.mesh
    faces = np.flatnonzero(bodies.part[mesh.body] == part)
    vertices, corners = np.unique(mesh.corner[faces], return_inverse=True)
    seen = pyvista.PolyData.from_regular_faces(mesh.vertex[vertices], corners.reshape(-1, 3))
    glows = np.isin(faces, world.arrays.sources.face)
    seen.cell_data["tag"] = mesh.tag[faces]
    seen.cell_data["glows"] = glows.astype(np.uint8)
    glow = np.array(pyvista.Color(GLOW).int_rgb, np.uint8)
    seen.cell_data["colour"] = np.where(glows[:, None], glow, _greys(world)[mesh.tag[faces], None])
    edges = seen.extract_feature_edges(_CREASE, non_manifold_edges=False, manifold_edges=False)
    kind = int(bodies.kind[np.flatnonzero(bodies.part == part)[0]])
    filled = kind != SHEET and world.parts[part].closed
    return Solid(kind, filled, seen, edges, pyvista.PolyData(), pyvista.PolyData())


def _greys(world: World) -> np.ndarray:
    """(tags,) uint8"""
    finishes = {part.name: part.finish for part in world.scene.parts}
    reflected = []
    for name in world.tag_names:
        part, _, tag = name.partition(":")
        side = finishes[part].get(tag, finishes[part][DEFAULT])
        finish = world.scene.finishes[side.front]
        reflected.append(finish.diffuse + finish.mirror)
    return (_DARK + (_LIGHT - _DARK) * np.sqrt(reflected)).astype(np.uint8)


def opened(whole: Solid, plane: Plane) -> Solid:
    """What a plane leaves of a part."""
    at = {"normal": plane.normal, "origin": plane.point}
    outline = whole.mesh.slice(**at)
    cut = outline.triangulate_contours() if outline.n_cells and whole.filled else whole.cut
    edges = whole.edges.clip(**at) if whole.edges.n_cells else whole.edges
    return whole._replace(
        mesh=whole.mesh.clip(**at).triangulate(), edges=edges, cut=cut, outline=outline
    )


def anchor_of_part(shown: Solid, view: View) -> np.ndarray | None:
    """(3,) the middle of the largest triangle that one sees, of the cut if there is one."""
    surface = shown.cut if shown.cut.n_cells else shown.mesh
    if not surface.n_cells:
        return None
    corner = surface.points[surface.regular_faces].astype(float)
    cross = np.cross(corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0])
    return _largest(corner.mean(axis=1), np.abs(cross @ view.toward), view)


def anchor_of_tag(shown: Solid, tag: int, view: View) -> np.ndarray | None:
    """(3,) the middle of the longest line of the cut's outline that belongs to a tag."""
    if not shown.outline.n_cells:
        return None
    lines = shown.outline.lines.reshape(-1, 3)[:, 1:]
    ends = shown.outline.points[lines[shown.outline.cell_data["tag"] == tag]].astype(float)
    return _largest(ends.mean(axis=1), np.linalg.norm(ends[:, 1] - ends[:, 0], axis=-1), view)


def _largest(middle: np.ndarray, size: np.ndarray, view: View) -> np.ndarray | None:
    """The middle (n, 3) of the largest thing that is in the picture, or None."""
    flat = view.project(middle)
    size = np.where(((flat > view.low) & (flat < view.high)).all(axis=1), size, 0.0)
    return middle[size.argmax()] if size.any() else None
