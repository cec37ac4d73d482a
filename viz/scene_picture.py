"""The scene as a picture: parts cut open, detectors with their maps, the strongest paths."""

from dataclasses import dataclass

import numpy as np
from matplotlib.colors import to_rgb

from lumentrace.run.run import Run
from lumentrace.units import grouped
from lumentrace.world.world import World
from lumentrace_viz.legend import legend_height, write_legend
from lumentrace_viz.map_picture import scale_of
from lumentrace_viz.marks import add_names, add_outlines, add_scale, add_ways
from lumentrace_viz.page import FAINT, INK, NOT_HIT, SIDE, WIDTH, Page
from lumentrace_viz.places import (
    detector_corners,
    detector_grid,
    glowing_parts,
    part_box,
    source_middle,
    source_outline,
)
from lumentrace_viz.shade import Sheet, shaded
from lumentrace_viz.solids import Solid, anchor_of_part, anchor_of_tag, opened, solid
from lumentrace_viz.view import Plane, View, overview, section
from lumentrace_viz.ways import Drawn

_HEIGHT, _HEAD = 1000, 110
_LEFT, _RIGHT, _BELOW = SIDE + 60, 130, 66  # around the frame
_LEAST = 520  # height of the frame
_NUDGE = 1e-6  # of the scene's size: a cut through corners of a mesh has no clean outline
_RIM = 1e-3  # of the parts' size: a cut so near their end opens nothing
_LIFT = 1e-3  # of the scene's size: maps are seen before faces that they lie on
_CUTS = "opaque ones brown, transparent ones blue"  # shade.py colours them
_FACING = 0.2  # cosine of the angle up to which one sees a map


@dataclass(frozen=True)
class Stage:
    """What the pictures of a run share."""

    run: Run
    world: World
    solids: list[Solid]  # a part each, whole

    @property
    def points(self) -> np.ndarray:
        """(n, 3) of everything."""
        world = self.world
        lamps = [source_outline(world, s) for s in range(len(world.source_names))]
        planes = [detector_corners(world, d) for d in range(len(world.detector_names))]
        return np.concatenate([world.arrays.mesh.vertex, *lamps, *planes])

    @property
    def extent(self) -> float:
        return float(np.linalg.norm(np.ptp(self.points, axis=0)))


def stage_of(run: Run, world: World) -> Stage:
    return Stage(run, world, [solid(world, part) for part in range(len(world.part_names))])


def scene_picture(stage: Stage, drawn: list[Drawn]) -> Page:
    """Everything, seen obliquely from above; parts that do not emit are cut open."""
    world, glowing = stage.world, glowing_parts(stage.world)
    cut = [p for p in range(len(stage.solids)) if p not in glowing]
    page, place = _page(
        stage.run, drawn, f"Overview; parts cut open, {_CUTS}" if cut else "Overview"
    )
    around = np.concatenate([part_box(world, p) for p in cut]) if cut else stage.points
    view, plane = overview(stage.points, around, heart(world, drawn), place[2] / place[3])
    plane = _nudged(plane, stage)
    shown = [opened(s, plane) if p in cut else s for p, s in enumerate(stage.solids)]
    axes = _draw(page, place, stage, shown, view, drawn)
    add_names(axes, view, _anchors(stage, shown, view))
    axes.axis("off")
    add_scale(axes, view, stage.run.length)
    return page


def section_picture(stage: Stage, detector: str, drawn: list[Drawn]) -> Page:
    """Square on to a cut through the source of the strongest path, as large as the paths allow.

    At least one of the paths has ways.
    """
    page, place = _page(stage.run, drawn, f"Strongest paths to {detector}")
    world = stage.world
    ways = [way for path in drawn for way in path.ways]
    target = detector_corners(world, world.detector_names.index(detector))
    boxes = [*(part_box(world, p) for p in _touched(world, drawn)), target]
    view, plane = section(ways, boxes, heart(world, drawn), place[2] / place[3])
    shown = [opened(s, _nudged(plane, stage)) for s in stage.solids]
    axes = _draw(page, place, stage, shown, view, drawn)
    tags = sorted({name for path in drawn for name, _ in path.row.steps})
    add_names(axes, view, _anchors(stage, shown, view, tags))
    across, up, toward = ("xyz"[np.abs(v).argmax()] for v in (view.right, view.up, view.toward))
    axes.set_xlabel(f"{across}, {stage.run.length}", size=11, color=INK)
    axes.set_ylabel(f"{up}, {stage.run.length}", size=11, color=INK)
    rounding = _NUDGE * stage.extent
    at = rounding * np.round(plane.point @ np.abs(view.toward) / rounding) + 0.0
    note = f"Parts cut at {toward} = {at:.4g} {stage.run.length}, {_CUTS}."
    note += " Rays are projected onto the cut."
    corner = view.project(target)
    if (corner.max(axis=0) < view.low).any() or (corner.min(axis=0) > view.high).any():
        note = f"{note[:-1]}; they go on to {detector}, outside the frame."
    page.text(place[0] + place[2], place[1] + place[3] + 9, note, size=10, color=FAINT, ha="right")
    return page


def heart(world: World, drawn: list[Drawn]) -> np.ndarray:
    """(3,) where to cut. On each axis the middle of the source of the strongest path (of the copy
    that it starts from); where that source is larger than the parts or lies beside them, the
    path's first event; where that is no better, the middle of the parts."""
    path = next((path for path in drawn if path.ways), None)
    source = 0 if path is None else world.source_names.index(path.row.source)
    way = None if path is None else path.ways[0]
    middle = source_middle(world, source, None if way is None else way[0])
    if not world.part_names:
        return middle
    boxes = np.stack([part_box(world, part) for part in range(len(world.part_names))])
    low, high = boxes[:, 0].min(axis=0), boxes[:, 1].max(axis=0)
    rest = (low + high) / 2.0
    if way is not None:
        rest = np.where(_inside(way[1], low, high), way[1], rest)
    small = np.ptp(source_outline(world, source), axis=0) <= high - low
    return np.where(small & _inside(middle, low, high), middle, rest)


def _inside(point: np.ndarray, low: np.ndarray, high: np.ndarray) -> np.ndarray:
    """(3,) on which axes a plane through the point leaves something on both of its sides."""
    rim = _RIM * (high - low)
    return (low + rim < point) & (point < high - rim)


def _nudged(plane: Plane, stage: Stage) -> Plane:
    return Plane(plane.point + _NUDGE * stage.extent * plane.normal, plane.normal)


def _touched(world: World, drawn: list[Drawn]) -> list[int]:
    """Parts that the paths meet or start from."""
    met = {name.partition(":")[0] for path in drawn for name, _ in path.row.steps}
    glowing = glowing_parts(world)
    return [p for p, name in enumerate(world.part_names) if p in glowing or name in met]


def _page(run: Run, drawn: list[Drawn], subject: str) -> tuple[Page, tuple]:
    """A page with its legend, and x, y, width, height of the frame that is left."""
    below = legend_height(drawn) + _BELOW
    height = max(_HEIGHT, _HEAD + _LEAST + below)
    page = Page(height, run.title, f"{subject}; {grouped(run.rays)} rays, seed {run.seed}")
    write_legend(page, drawn)
    return page, (_LEFT, below, WIDTH - _LEFT - _RIGHT, height - _HEAD - below)


def _draw(page: Page, place, stage: Stage, shown: list[Solid], view: View, drawn: list[Drawn]):
    """Axes filled with shaded parts and maps, then lines over them."""
    sheets = _sheets(page, place, stage, view)
    picture = shaded(shown, sheets, view, (int(place[2]), int(place[3])))
    axes = page.axes(*place)
    extent = (view.low[0], view.high[0], view.low[1], view.high[1])
    axes.imshow(picture, extent=extent, aspect="auto")
    add_outlines(axes, view, stage.world)
    add_ways(axes, view, drawn)
    axes.set(xlim=extent[:2], ylim=extent[2:])
    return axes


def _anchors(stage: Stage, shown: list[Solid], view: View, tags=()) -> dict[str, np.ndarray]:
    """A point on each source, detector, and tag asked for, and on each part without such a tag."""
    world, found = stage.world, {}
    for name in tags:
        part = world.part_names.index(name.partition(":")[0])
        found[name] = anchor_of_tag(shown[part], world.tag_names.index(name), view)
    named = {name.partition(":")[0] for name, point in found.items() if point is not None}
    for s, name in enumerate(world.source_names):
        found[name] = source_middle(world, s)
    for d, name in enumerate(world.detector_names):
        corner = detector_corners(world, d)
        found[name] = corner[view.project(corner)[:, 0].argmax()]
    for name, part in zip(world.part_names, shown, strict=True):
        if name not in named:
            found[name] = anchor_of_part(part, view)
    return {name: point for name, point in found.items() if point is not None}


def _sheets(page: Page, place, stage: Stage, view: View) -> list[Sheet]:
    """The maps that one sees, smaller ones in front, and their scales, one a unit."""
    table, names = stage.world.arrays.detectors, stage.world.detector_names
    lift = _LIFT * stage.extent * view.toward
    facing = [d for d in range(len(names)) if abs(table.place[d, 1] @ view.toward) > _FACING]
    facing.sort(key=lambda d: -np.prod(table.size[d]))
    nodes = {d: stage.run.detector(names[d]) for d in facing}
    units = list(dict.fromkeys(nodes[d].attrs["map_unit"] for d in sorted(facing)))
    sheets = []
    for i, unit in enumerate(units):
        own = [d for d in facing if nodes[d].attrs["map_unit"] == unit]
        scale = scale_of([nodes[d]["value"].values for d in own])
        room = place[3] / len(units)
        top = place[1] + place[3] - 40 - i * room
        height = min(300, room - 60)
        page.scale_bar((place[0] + place[2] + 20, top - height, 22, height), scale, unit)
        for d in own:
            colour = scale.to_rgba(nodes[d]["value"].values)[..., :3]
            colour[~(nodes[d]["effective"].values > 0.0)] = to_rgb(NOT_HIT)
            corner = detector_grid(stage.world, d) + lift * (1 + facing.index(d))
            sheets.append(Sheet(corner, (255 * colour).astype(np.uint8)))
    return sheets
