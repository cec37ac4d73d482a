"""The scene as a picture: parts cut open, detectors with their maps, the strongest paths."""

import numpy as np
from matplotlib.colors import to_rgb

from lumentrace.report.lines import CAUTION
from lumentrace.run.run import Run
from lumentrace.units import format_with_error, grouped
from lumentrace.world.arrays import OPAQUE
from lumentrace.world.world import World
from lumentrace_viz.map_picture import scale_of
from lumentrace_viz.marks import COLOURS, add_names, add_outlines, add_scale, add_ways
from lumentrace_viz.page import FAINT, INK, LINE, NOT_HIT, WIDTH, Page, fitting
from lumentrace_viz.places import (
    detector_corners,
    glowing_parts,
    heart,
    part_box,
    source_outline,
)
from lumentrace_viz.solids import Sheet, anchor, kind, shaded
from lumentrace_viz.view import Plane, View, overview, section
from lumentrace_viz.ways import Drawn

_HEIGHT, _HEAD = 1000, 110
_LEFT, _RIGHT, _BELOW = 110, 110, 56  # around the frame
_LEAST = 520  # height of the frame
_LETTERS = 165  # of a path in the legend
_NUDGE = 1e-6  # of the scene's size: a cut through corners of a mesh has no clean outline
_LIFT = 1e-3  # of the scene's size: maps are seen before faces that they lie on
_FACING = 0.2  # cosine of the angle up to which one sees a map


def scene_picture(run: Run, world: World, drawn: list[Drawn]) -> Page:
    """Everything, seen obliquely from above; opaque parts are cut open."""
    page, place = _page(run, drawn, "Overview; opaque parts cut open")
    glowing = glowing_parts(world)
    cut = {p for p in _parts(world) if kind(world, p) == OPAQUE and p not in glowing}
    points = np.concatenate(_everything(world))
    opened = np.concatenate([part_box(world, p) for p in cut]) if cut else points
    view, plane = overview(points, opened, _heart(world, drawn), place[2] / place[3])
    axes = _draw(page, place, run, world, drawn, view, plane, cut)
    axes.axis("off")
    add_scale(axes, view, run.length)
    return page


def section_picture(run: Run, world: World, detector: str, drawn: list[Drawn]) -> Page:
    """Square on to a cut through the source of the strongest path, as large as the paths allow."""
    page, place = _page(run, drawn, f"Paths to {detector}")
    ways = [way for path in drawn for way in path.ways] or _everything(world)[1:]
    boxes = [part_box(world, p) for p in _touched(world, drawn)]
    view, plane = section(ways, boxes, _heart(world, drawn), place[2] / place[3])
    axes = _draw(page, place, run, world, drawn, view, plane, set(_parts(world)))
    across, up, toward = ("xyz"[np.abs(v).argmax()] for v in (view.right, view.up, view.toward))
    axes.set_xlabel(f"{across}, {run.length}", size=11, color=INK)
    axes.set_ylabel(f"{up}, {run.length}", size=11, color=INK)
    axes.tick_params(labelsize=10, color=FAINT, labelcolor=INK)
    at = plane.point @ np.abs(view.toward) + 0.0
    note = f"Cut at {toward} = {at:.4g} {run.length}; rays before and behind are projected onto it."
    page.text(place[0] + place[2], place[1] + place[3] + 9, note, size=10, color=FAINT, ha="right")
    return page


def _parts(world: World) -> range:
    return range(len(world.part_names))


def _everything(world: World) -> list[np.ndarray]:
    """Points of all parts, then of each source and detector."""
    sources = [source_outline(world, s) for s in range(len(world.source_names))]
    detectors = [detector_corners(world, d) for d in range(len(world.detector_names))]
    return [world.arrays.mesh.vertex, *sources, *detectors]


def _heart(world: World, drawn: list[Drawn]) -> np.ndarray:
    return heart(world, next((way for path in drawn for way in path.ways), None))


def _touched(world: World, drawn: list[Drawn]) -> list[int]:
    """Parts that the paths meet or start from."""
    named = {place.partition(":")[0] for path in drawn for place, _ in path.row.steps}
    glowing = glowing_parts(world)
    return [p for p in _parts(world) if p in glowing or world.part_names[p] in named]


def _page(run: Run, drawn: list[Drawn], subject: str) -> tuple[Page, tuple]:
    """A page with its legend, and x, y, width, height of the frame that is left."""
    below = LINE * (len(drawn) + 2) + 20 + _BELOW
    height = max(_HEIGHT, _HEAD + _LEAST + below)
    subtitle = f"{subject}; {grouped(run.rays)} rays, seed {run.seed}"
    page = Page(height, run.title, subtitle)
    _legend(page, drawn)
    return page, (_LEFT, below, WIDTH - _LEFT - _RIGHT, height - _HEAD - below)


def _legend(page: Page, drawn: list[Drawn]) -> None:
    """Colour, share and steps of each path."""
    y = 26 + LINE * len(drawn)
    if drawn:
        page.text(_LEFT, y, "share of the detector's light", color=FAINT, size=10)
        page.text(_LEFT + 260, y, "path", color=FAINT, size=10)
    for i, path in enumerate(drawn):
        y -= LINE
        page.sheet.plot([_LEFT, _LEFT + 44], [y + 5] * 2, color=COLOURS[i], lw=4)
        page.text(_LEFT + 60, y, _share(path))
        page.text(_LEFT + 260, y, fitting(path.row.text, _LETTERS))
    nothing = "" if drawn else "No light arrived. "
    page.text(WIDTH - _RIGHT, 26 + LINE * len(drawn), nothing + CAUTION, color=FAINT, size=10, ha="right")


def _share(path: Drawn) -> str:
    row = path.row
    error = None if row.share_error is None else 100.0 * row.share_error
    numbers = [n for n in format_with_error(100.0 * (row.share or 0.0), error) if n]
    return " ± ".join(numbers) + " %"


def _draw(page, place, run, world, drawn, view: View, plane: Plane, cut: set[int]):
    """Fill the frame: shaded parts and maps, then lines and names over them."""
    points = np.concatenate(_everything(world))
    size = np.linalg.norm(np.ptp(points, axis=0))
    nudged = Plane(plane.point + _NUDGE * size * plane.normal, plane.normal)
    pixels = int(place[2]), int(place[3])
    sheets = _sheets(page, place, run, world, view, _LIFT * size)
    picture = shaded(world, view, nudged, cut, sheets, pixels)
    axes = page.axes(*place)
    extent = (view.low[0], view.high[0], view.low[1], view.high[1])
    axes.imshow(picture, extent=extent, aspect="auto", interpolation="antialiased")
    add_outlines(axes, view, world)
    add_ways(axes, view, drawn)
    add_names(axes, view, _anchors(world, view, nudged, cut))
    axes.set(xlim=extent[:2], ylim=extent[2:])
    for side in axes.spines.values():
        side.set_edgecolor(FAINT)
    return axes


def _anchors(world: World, view: View, plane: Plane, cut: set[int]) -> dict[str, np.ndarray]:
    """A point on each part, source and detector."""
    found = {}
    for p, name in enumerate(world.part_names):
        point = anchor(world, p, view, plane if p in cut else None)
        if point is not None:
            found[name] = point
    for s, name in enumerate(world.source_names):
        found[name] = heart(world, source_outline(world, s))
    for d, name in enumerate(world.detector_names):
        corner = detector_corners(world, d)
        found[name] = corner[view.project(corner)[:, 0].argmax()]
    return found


def _sheets(page: Page, place, run: Run, world: World, view: View, lift: float) -> list[Sheet]:
    """The maps that one sees, smaller ones in front; detectors of one unit share a scale."""
    table, names = world.arrays.detectors, world.detector_names
    facing = [d for d in range(len(names)) if abs(table.place[d, 1] @ view.toward) > _FACING]
    order = sorted(facing, key=lambda d: -np.prod(table.size[d]))
    units = list(dict.fromkeys(run.detector(names[d]).attrs["map_unit"] for d in facing))
    sheets = []
    for i, unit in enumerate(units):
        own = [d for d in order if run.detector(names[d]).attrs["map_unit"] == unit]
        scale = scale_of([run.detector(names[d])["value"].values for d in own])
        height = min(300, (place[3] - 60) / len(units) - 60)
        top = place[1] + place[3] - 40 - i * (height + 60)
        page.scale_bar((place[0] + place[2] + 16, top - height, 22, height), scale, unit)
        for d in own:
            node = run.detector(names[d])
            colour = scale.to_rgba(node["value"].values)[..., :3]
            colour[~(node["effective"].values > 0.0)] = to_rgb(NOT_HIT)
            raised = lift * (1 + order.index(d)) * view.toward
            sheets.append(Sheet(_grid(world, d) + raised, (255 * colour).astype(np.uint8)))
    return sheets


def _grid(world: World, detector: int) -> np.ndarray:
    """(n_up + 1, n_across + 1, 3) corners of a detector's cells."""
    table = world.arrays.detectors
    place, half = table.place[detector], table.size[detector]
    across, up = (np.linspace(-h, h, n + 1) for h, n in zip(half, table.cells[detector], strict=True))
    return place[0] + across[None, :, None] * place[2] + up[:, None, None] * place[3]
