"""What is drawn over the shaded parts: paths, outlines, names, a scale."""

import numpy as np
from matplotlib.patheffects import withStroke

from lumentrace.world.world import World
from lumentrace_viz.page import FAINT, INK
from lumentrace_viz.places import detector_corners, source_faces, source_outline
from lumentrace_viz.solids import GLOW
from lumentrace_viz.view import View
from lumentrace_viz.ways import Drawn

COLOURS = (
    "#dc2626", "#2563eb", "#15803d", "#9333ea", "#0891b2",
    "#db2777", "#854d0e", "#65a30d", "#64748b", "#111827",
)  # fmt: skip
_HALO = [withStroke(linewidth=3.5, foreground="white")]
_THIN, _THICK = 0.9, 2.6  # lines of a weak path and of the strongest
_NAME_GAP, _NAMES = 0.036, 48  # of the height; so many fit in two columns
_NAME = {"size": 11, "color": INK, "path_effects": _HALO, "parse_math": False, "va": "center"}
_LEADER = {"arrowstyle": "-", "color": FAINT, "lw": 0.9, "shrinkA": 4, "shrinkB": 0}


def add_ways(axes, view: View, drawn: list[Drawn]) -> None:
    """Lines along all ways, thicker for stronger paths, each ending in a dot on its detector."""
    most = max((path.row.share or 0.0 for path in drawn), default=0.0)
    for i, path in enumerate(drawn):
        strength = np.sqrt((path.row.share or 0.0) / most) if most else 0.0
        width = _THIN + (_THICK - _THIN) * strength
        halo = [withStroke(linewidth=width + 1.4, foreground="white", alpha=0.7)]
        for way in path.ways:
            flat = view.project(way)
            axes.plot(*flat.T, color=COLOURS[i], lw=width, path_effects=halo, zorder=3 + 0.1 * i)
            axes.plot(*flat[-1], "o", color=COLOURS[i], ms=width + 1.5, zorder=5)


def add_outlines(axes, view: View, world: World) -> None:
    """Detectors, and sources that are no faces of parts."""
    for d in range(len(world.detector_names)):
        axes.fill(*view.project(detector_corners(world, d)).T, fill=False, ec=INK, lw=2)
    for s in range(len(world.source_names)):
        if not len(source_faces(world, s)):
            flat = view.project(source_outline(world, s))
            axes.fill(*flat.T, fc=GLOW, ec="#b45309", lw=1.2, alpha=0.6)
            axes.plot(*flat.mean(axis=0), "*", color=GLOW, mec="#b45309", ms=16, zorder=6)


def add_names(axes, view: View, anchors: dict[str, np.ndarray]) -> None:
    """Names at the left and right border, joined by lines to their (3,) anchors in the frame."""
    flat = {name: view.project(point) for name, point in anchors.items()}
    shown = [n for n, p in flat.items() if (p >= view.low).all() and (p <= view.high).all()]
    middle, edge = (view.low + view.high) / 2.0, 0.01 * view.size[0]
    for right in (False, True):
        own = [name for name in shown[:_NAMES] if (flat[name][0] > middle[0]) == right]
        x, ha = (view.high[0] - edge, "right") if right else (view.low[0] + edge, "left")
        gap = _NAME_GAP * view.size[1]
        places = np.array([flat[name][1] for name in own])
        heights = spread(places, gap, view.low[1] + gap / 2, view.high[1] - gap / 2)
        for name, y in zip(own, heights, strict=True):
            line = {"arrowprops": _LEADER, "zorder": 8}
            axes.annotate(name, xy=flat[name], xytext=(x, y), ha=ha, **_NAME, **line)
            axes.plot(*flat[name], "o", color=INK, ms=4, zorder=7)


def spread(places: np.ndarray, gap: float, low: float, high: float) -> np.ndarray:
    """Places (n,) moved apart, within bounds that have room, until neighbours differ by `gap`."""
    order = np.argsort(places, kind="stable")
    moved = np.clip(places[order], low, high)
    for _ in range(1000):
        short = np.maximum(gap - np.diff(moved), 0.0) / 2.0
        if (short < 1e-3 * gap).all():
            break
        moved[:-1] -= short
        moved[1:] += short
        moved = np.clip(moved, low, high)
    back = np.empty_like(moved)
    back[order] = moved
    return back


def add_scale(axes, view: View, length: str) -> None:
    """Below the frame: a length to compare with, and the directions of the scene's axes."""
    whole = 0.2 * view.size[0]
    power = 10.0 ** np.floor(np.log10(whole))
    bar = power * max(step for step in (1, 2, 5) if step * power <= whole)
    x, y = view.low - (0.0, 0.05) * view.size
    look = {"color": INK, "clip_on": False}
    axes.plot([x, x + bar], [y, y], lw=3, solid_capstyle="butt", **look)
    axes.text(x, y + 0.012 * view.size[1], f"{bar:g} {length}", size=11, **look)
    origin, arm = view.low + (0.97, -0.05) * view.size, 0.06 * view.size[1]
    for letter, direction in zip("xyz", np.eye(3), strict=True):
        tip = origin + arm * view.project(direction)
        axes.plot(*zip(origin, tip, strict=True), lw=1.4, **look)
        axes.text(*(origin + 1.35 * (tip - origin)), letter, ha="center", va="center", **look)
