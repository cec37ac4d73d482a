"""Solids and maps as shaded pixels; the one place that draws with OpenGL."""

from typing import NamedTuple

import numpy as np
import pyvista

from lumentrace.world.arrays import TRANSPARENT
from lumentrace_viz.solids import GLOW, Solid
from lumentrace_viz.view import View

_CLEAR, _CLEAR_CUT, _CUT = "#8fbfe0", "#5a9cc9", "#cf9a6b"
_EDGE, _OUTLINE = "#4b5563", "#111827"


class Sheet(NamedTuple):
    """A coloured grid in space: a detector's map."""

    corner: np.ndarray  # (n_up + 1, n_across + 1, 3)
    colour: np.ndarray  # (n_up, n_across, 3) uint8


def shaded(solids: list[Solid], maps: list[Sheet], view: View, size: tuple[int, int]) -> np.ndarray:
    """(height, width, 3) uint8. size: width, height in pixels."""
    plotter = pyvista.Plotter(off_screen=True, window_size=size, lighting="light kit")
    plotter.set_background("white")
    for shown in solids:
        _add_solid(plotter, shown)
    for sheet in maps:
        _add_map(plotter, sheet)
    _aim(plotter, view)
    plotter.enable_anti_aliasing("ssaa")  # with depth peeling it would drop what is translucent
    picture = plotter.screenshot(return_img=True)
    plotter.close()
    return picture


def _add_solid(plotter, shown: Solid) -> None:
    clear = shown.kind == TRANSPARENT
    look = {"color": _CLEAR, "opacity": 0.22} if clear else {"scalars": "colour", "rgb": True}
    _add(plotter, shown.mesh, **look, ambient=0.4, diffuse=0.65, specular=0.05)
    look = {"color": _CLEAR_CUT, "opacity": 0.45} if clear else {"color": _CUT}
    _add(plotter, shown.cut, **look, lighting=False)
    _add(plotter, shown.edges, color=_EDGE, line_width=1.2, lighting=False)
    _add(plotter, shown.outline, color=_OUTLINE, line_width=2.5, lighting=False)
    if shown.outline.n_cells:
        lit = shown.outline.extract_cells(shown.outline.cell_data["glows"] > 0)
        _add(plotter, lit, color=GLOW, line_width=7, lighting=False)


def _add(plotter, mesh, **look) -> None:
    if mesh.n_cells:
        plotter.add_mesh(mesh, **look)


def _add_map(plotter, sheet: Sheet) -> None:
    n_up, n_across = sheet.colour.shape[:2]
    first = np.arange(n_up)[:, None] * (n_across + 1) + np.arange(n_across)
    quads = np.stack([first, first + 1, first + n_across + 2, first + n_across + 1], axis=-1)
    mesh = pyvista.PolyData.from_regular_faces(sheet.corner.reshape(-1, 3), quads.reshape(-1, 4))
    mesh.cell_data["colour"] = sheet.colour.reshape(-1, 3)
    plotter.add_mesh(mesh, scalars="colour", rgb=True, lighting=False)


def _aim(plotter, view: View) -> None:
    """A parallel projection that fills the picture with the view."""
    low, high = np.array(plotter.bounds).reshape(3, 2).T
    middle, far = (low + high) / 2.0, np.linalg.norm(high - low) + 1e-30
    across, up = (view.low + view.high) / 2.0 - view.project(middle)
    focus = middle + across * view.right + up * view.up
    camera = plotter.camera
    camera.parallel_projection = True
    camera.focal_point = focus
    camera.position = focus + far * view.toward
    camera.up = view.up
    camera.parallel_scale = view.size[1] / 2.0
    plotter.renderer.ResetCameraClippingRange()
