"""The scene as a picture: parts cut open, detectors with their maps, the strongest paths."""

from dataclasses import dataclass

import numpy as np

from lumentrace.run.run import Run
from lumentrace.world.arrays import OPAQUE
from lumentrace.world.frames import corners
from lumentrace.world.world import World
from lumentrace_viz.labels import add_labels, add_scale, bound_for
from lumentrace_viz.legend import colour_of, legend_height, write_legend
from lumentrace_viz.map_picture import scale_of
from lumentrace_viz.page import FAINT, HALO, INK, MAP_COLOURS, NOT_HIT, WIDTH, Page
from lumentrace_viz.solids import GLOW, Sheet, anchor, kind, shaded
from lumentrace_viz.view import Plane, View, overview, section
from lumentrace_viz.ways import Drawn

_HEIGHT, _HEAD = 1000, 100
_LEFT, _RIGHT, _BELOW = 110, 120, 56  # around the frame of the picture
_LEAST = 520  # height of the frame
_NUDGE = 1e-6  # of the scene's size: a cut through corners of a mesh has no clean outline
_FACING = 0.2  # cosine from which on one sees a map


@dataclass(frozen=True)
class Layers:
    """What both kinds of picture draw."""

    run: Run
    world: World
    drawn: list[Drawn]

    @property
    def ways(self) -> list[np.ndarray]:
        return [way for path in self.drawn for way in path.ways]


def scene_picture(run: Run, world: World, drawn: list[Drawn]) -> Page:
    """Everything, seen obliquely from above; opaque parts are cut open."""
    layers = Layers(run, world, drawn)
    page, place = _page(layers, "Overview, opaque parts cut open")
    opaque = [p for p in range(len(world.part_names)) if kind(world, p) == OPAQUE]
    cut = {p for p in opaque if not _glows(world, p)}
    points = np.concatenate([world.arrays.mesh.vertex, *_planes(world), *_lamps(world)])
    opened = np.concatenate([_box(world, p) for p in cut]) if cut else points
    view, plane = overview(points, opened, _middle(layers), place[2] / place[3])
    axes = _draw(page, place, layers, view, _nudged(plane, points), cut)
    axes.axis("off")
    add_scale(axes, view, run.length)
    return page


def section_picture(run: Run, world: World, detector: str, drawn: list[Drawn]) -> Page:
    """Square on to a cut through the source of the strongest path, as large as the paths allow."""
    layers = Layers(run, world, drawn)
    page, place = _page(layers, f"Paths to {detector}")
    ways = layers.ways or [np.concatenate([*_planes(world), *_lamps(world)])]
    touched = _touched(world, drawn)
    boxes = [_box(world, p) for p in range(len(world.part_names)) if p in touched]
    view, plane = section(ways, boxes, _middle(layers), place[2] / place[3])
    everything = np.concatenate([world.arrays.mesh.vertex, *ways])
    cut = set(range(len(world.part_names)))
    axes = _draw(page, place, layers, view, _nudged(plane, everything), cut)
    letters = ["xyz"[np.abs(v).argmax()] for v in (view.right, view.up, view.toward)]
    axes.set_xlabel(f"{letters[0]}, {run.length}", size=11, color=INK)
    axes.set_ylabel(f"{letters[1]}, {run.length}", size=11, color=INK)
    at = plane.point[np.abs(view.toward).argmax()] + 0.0
    note = f"section at {letters[2]} = {at:.4g} {run.length}; paths before and behind projected"
    page.text(WIDTH - _RIGHT, place[1] + place[3] + 10, note, size=10, color=FAINT, ha="right")
    return page
