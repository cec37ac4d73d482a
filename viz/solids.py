"""Parts and detector planes as shaded pixels."""

from typing import NamedTuple

import numpy as np
import pyvista

from lumentrace.scene.model import DEFAULT
from lumentrace.world.arrays import SHEET, TRANSPARENT
from lumentrace.world.world import World
from lumentrace_viz.view import Plane, View

GLOW = (255, 176, 0)  # emitting faces
_CLEAR, _CLEAR_CUT, _CUT = "#8fbfe0", "#5a9cc9", "#c98f5e"
_EDGE, _OUTLINE = "#4b5563", "#111827"
_CREASE = 30.0  # degrees: sharper edges are drawn


class Sheet(NamedTuple):
    """A coloured grid in space: a detector's map."""

    corner: np.ndarray  # (n_up + 1, n_across + 1, 3)
    colour: np.ndarray  # (n_up, n_across, 3) uint8


def part_mesh(world: World, part: int) -> pyvista.PolyData:
    """All copies of a part, coloured by what its finishes reflect; emitting faces glow."""
    arrays = world.arrays
    faces = np.flatnonzero(arrays.bodies.part[arrays.mesh.body] == part)
    vertices, corners = np.unique(arrays.mesh.corner[faces], return_inverse=True)
    mesh = pyvista.PolyData.from_regular_faces(
        arrays.mesh.vertex[vertices], corners.reshape(-1, 3)
    )
    colour = _colours(world)[arrays.mesh.tag[faces]]
    glows = np.isin(faces, arrays.sources.face)
    colour[glows] = GLOW
    mesh.cell_data["colour"] = colour
    mesh.cell_data["glows"] = glows.astype(np.uint8)
    return mesh


def _colours(world: World) -> np.ndarray:
    """(tags, 3) uint8 greys: the more a finish reflects, the lighter."""
    parts = {part.name: part for part in world.scene.parts}
    greys = []
    for name in world.tag_names:
        part, _, tag = name.partition(":")
        finish = parts[part].finish
        found = world.scene.finishes[finish.get(tag, finish[DEFAULT]).front]
        greys.append(95.0 + 150.0 * np.sqrt(found.diffuse + found.mirror))
    return np.repeat(np.array(greys)[:, None], 3, axis=1).astype(np.uint8)


def kind(world: World, part: int) -> int:
    """OPAQUE, SHEET or TRANSPARENT."""
    bodies = world.arrays.bodies
    return int(bodies.kind[np.flatnonzero(bodies.part == part)[0]])


def cap(mesh: pyvista.PolyData, plane: Plane) -> tuple[pyvista.PolyData, pyvista.PolyData]:
    """Where a plane cuts a mesh: the cut surface, of closed outlines only, and the outline."""
    outline = mesh.slice(normal=plane.normal, origin=plane.point)
    return (outline.triangulate_contours() if outline.n_cells else outline), outline


def anchor(world: World, part: int, view: View, plane: Plane | None) -> np.ndarray | None:
    """(3,) the middle of the largest triangle of a part, or of its cut, that one sees; or None."""
    mesh = part_mesh(world, part)
    surface = mesh if plane is None else cap(mesh, plane)[0]
    if not surface.n_cells:
        return None
    corner = surface.points[surface.regular_faces].astype(float)
    middle = corner.mean(axis=1)
    flat = view.project(middle)
    inside = (flat > view.low).all(axis=1) & (flat < view.high).all(axis=1)
    across = np.cross(corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0])
    area = np.where(inside, np.abs(across @ view.toward), 0.0)
    return middle[area.argmax()] if area.any() else None


def shaded(
    world: World, view: View, plane: Plane, cut: set[int], maps: list[Sheet], size: tuple[int, int]
) -> np.ndarray:
    """(height, width, 3) uint8 picture of all parts, of those in `cut` only what the plane leaves.

    size: width, height in pixels.
    """
    plotter = pyvista.Plotter(off_screen=True, window_size=size, lighting="light kit")
    plotter.set_background("white")
    for part in range(len(world.part_names)):
        _add_part(plotter, world, part, plane if part in cut else None)
    for sheet in maps:
        _add_sheet(plotter, sheet)
    _aim(plotter, view)
    plotter.enable_anti_aliasing("ssaa")  # depth peeling would drop what is translucent
    picture = plotter.screenshot(return_img=True)
    plotter.close()
    return picture


def _add_part(plotter, world: World, part: int, plane: Plane | None) -> None:
    mesh = part_mesh(world, part)
    clear = kind(world, part) == TRANSPARENT
    edges = _edges(mesh)
    if plane is not None:
        surface, outline = cap(mesh, plane)
        mesh = mesh.clip(normal=plane.normal, origin=plane.point)
        if kind(world, part) != SHEET and surface.n_cells:
            colour = _CLEAR_CUT if clear else _CUT
            plotter.add_mesh(surface, color=colour, opacity=0.45 if clear else 1.0, lighting=False)
        if outline.n_cells:
            plotter.add_mesh(outline, color=_OUTLINE, line_width=2.5, lighting=False)
        lit = outline.extract_cells(outline.cell_data["glows"] > 0) if outline.n_cells else outline
        if lit.n_cells:
            plotter.add_mesh(lit, color=GLOW, line_width=7, lighting=False)
        if edges.n_cells:
            edges = edges.clip(normal=plane.normal, origin=plane.point)
    if mesh.n_cells:
        look = {"color": _CLEAR, "opacity": 0.22} if clear else {"scalars": "colour", "rgb": True}
        plotter.add_mesh(mesh, **look, ambient=0.25, diffuse=0.75, specular=0.1)
    if edges.n_cells:
        plotter.add_mesh(edges, color=_EDGE, line_width=1.2, lighting=False)


def _edges(mesh: pyvista.PolyData) -> pyvista.PolyData:
    return mesh.extract_feature_edges(
        _CREASE, boundary_edges=True, non_manifold_edges=False, manifold_edges=False
    )


def _add_sheet(plotter, sheet: Sheet) -> None:
    grid = pyvista.StructuredGrid(*np.moveaxis(sheet.corner[None], -1, 0))
    grid.cell_data["colour"] = sheet.colour.reshape(-1, 3)
    plotter.add_mesh(grid, scalars="colour", rgb=True, lighting=False)


def _aim(plotter, view: View) -> None:
    """A parallel projection that fills the picture with the view."""
    low, high = plotter.bounds[::2], plotter.bounds[1::2]
    middle = (np.array(low) + np.array(high)) / 2.0
    far = np.linalg.norm(np.array(high) - low) + 1e-30
    flat = (view.low + view.high) / 2.0 - view.project(middle)
    focus = middle + flat[0] * view.right + flat[1] * view.up
    camera = plotter.camera
    camera.parallel_projection = True
    camera.focal_point = focus
    camera.position = focus + far * view.toward
    camera.up = view.up
    camera.parallel_scale = view.size[1] / 2.0
    plotter.renderer.ResetCameraClippingRange()
