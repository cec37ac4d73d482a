"""The map of one detector as a picture."""

import numpy as np
from matplotlib.cm import ScalarMappable
from matplotlib.colors import ListedColormap, Normalize

from lumentrace.analysis.measures import Measure, measures
from lumentrace.analysis.samples import FEW
from lumentrace.report.lines import CAUTION
from lumentrace.run.run import Run
from lumentrace.units import format_with_error, grouped
from lumentrace_viz.page import FAINT, INK, MAP_COLOURS, NOT_HIT, WIDTH, Page

_HEIGHT = 1000
_FRAME = (120, 190, 1240, 660)  # x, y, width, height that the map and its axes may take
_VALUE_SIZE = (62, 20)  # pixels that a cell needs to have its value written in
_ERROR_SIZE = (62, 40)  # and its error
_NUMBERS = ("mean", "min", "max", "uniformity")


def scale_of(values: list[np.ndarray]) -> ScalarMappable:
    """Colours of maps that share a unit, from 0 to the brightest cell."""
    high = max(float(value.max()) for value in values)
    return ScalarMappable(Normalize(0.0, high if high > 0.0 else 1.0), MAP_COLOURS)


def map_picture(run: Run, name: str) -> Page:
    """A map with scale, axes in the study's unit, and the detector's measures with their errors."""
    node = run.detector(name)
    value, hit = node["value"].values, node["effective"].values > 0.0
    kind, unit, size = node.attrs["counts"], node.attrs["map_unit"], node.attrs["size"]
    n_up, n_across = value.shape
    subtitle = (
        f"{name}: {kind} in {n_across} x {n_up} cells of "
        f"{size[0] / n_across:.4g} x {size[1] / n_up:.4g} {run.length}; "
        f"{grouped(run.rays)} rays, seed {run.seed}"
    )
    page = Page(_HEIGHT, run.title, subtitle)
    axes = _frame(page, node, run.length)
    scale = scale_of([value])
    edges = [np.linspace(-s / 2, s / 2, n + 1) for s, n in zip(size, (n_across, n_up), strict=True)]
    axes.pcolormesh(*edges, np.ma.array(value, mask=~hit), cmap=MAP_COLOURS, norm=scale.norm)
    _mark_not_hit(axes, edges, hit)
    _write_values(axes, page, node, scale)
    box = _pixels(page, axes)
    page.scale_bar((box[2] + 40, box[1], 26, box[3] - box[1]), scale, unit)
    _caption(page, measures(run), name, node["effective"].values)
    return page


def _frame(page: Page, node, length: str):
    """Axes with equal scales, as large as the room allows."""
    x, y, width, height = _FRAME
    size = np.array(node.attrs["size"], float)
    drawn = size * min((width, height) / size)
    axes = page.axes(x + (width - drawn[0]) / 2, y + (height - drawn[1]) / 2, *drawn)
    axes.set(xlim=(-size[0] / 2, size[0] / 2), ylim=(-size[1] / 2, size[1] / 2))
    axes.set_facecolor(NOT_HIT)
    for axis, word in ((axes.xaxis, "across"), (axes.yaxis, "up")):
        axis.set_label_text(f"{word} ({_direction(node, word)}), {length}", size=11, color=INK)
    return axes


def _direction(node, word: str) -> str:
    """The direction of an axis in the scene: "+x", or its components."""
    vector = np.round(node.attrs[f"{word}_direction"], 3) + 0.0
    for axis, letter in enumerate("xyz"):
        if abs(vector[axis]) == 1.0:
            return f"{'+' if vector[axis] > 0 else '-'}{letter}"
    return ", ".join(f"{v:g}" for v in vector)


def _pixels(page: Page, axes) -> np.ndarray:
    """left, bottom, right, top of axes."""
    return axes.get_position().extents * np.array([WIDTH, page.height] * 2)


def _mark_not_hit(axes, edges, hit: np.ndarray) -> None:
    if hit.all():
        return
    missed = np.ma.array(np.zeros(hit.shape), mask=hit)
    grey = ListedColormap([NOT_HIT])
    axes.pcolor(*edges, missed, cmap=grey, hatch="//", edgecolor="white", linewidth=0)


def _write_values(axes, page: Page, node, scale) -> None:
    """Value and error in each cell where there is room."""
    box = _pixels(page, axes)
    n_up, n_across = node["value"].shape
    room = (box[2] - box[0]) / n_across, (box[3] - box[1]) / n_up
    if room[0] < _VALUE_SIZE[0] or room[1] < _VALUE_SIZE[1]:
        return
    both = room[1] >= _ERROR_SIZE[1]
    for i, up in enumerate(node["up"].values):
        for j, across in enumerate(node["across"].values):
            value, error = float(node["value"][i, j]), float(node["error"][i, j])
            if not node["effective"][i, j] > 0.0:
                text, colour = "not hit", INK
            else:
                numbers = format_with_error(value, error)
                text = "\n± ".join(numbers) if both else numbers[0]
                colour = _legible(scale.to_rgba(value))
            axes.text(across, up, text, color=colour, size=10, ha="center", va="center")


def _legible(colour) -> str:
    """Black on light colours, white on dark ones; luminance after ITU-R BT.709."""
    return INK if np.dot(colour[:3], (0.2126, 0.7152, 0.0722)) > 0.45 else "white"


def _caption(page: Page, found: dict[str, Measure], name: str, effective: np.ndarray) -> None:
    """The measures with their errors, then what to know of the cells."""
    for i, word in enumerate(_NUMBERS):
        page.text(120 + 320 * i, 92, word, color=FAINT)
        page.text(120 + 320 * i, 64, _number(found[f"{name}.{word}"]), size=14, weight="bold")
    missed, few = int((effective <= 0.0).sum()), int(((effective > 0) & (effective < FEW)).sum())
    remarks = [
        f"{missed} of {effective.size} cells not hit (hatched)" if missed else "",
        f"{few} of {effective.size} cells with fewer than {FEW:.0f} effective contributions"
        if few
        else "",
        CAUTION,
    ]
    page.text(120, 30, ". ".join(r.rstrip(".") for r in remarks if r) + ".", color=FAINT)


def _number(measure: Measure) -> str:
    unit = "" if measure.unit == "1" else f" {measure.unit}"
    if measure.error is not None:
        return " ± ".join(format_with_error(measure.value, measure.error)) + unit
    # Light arrived, though not in the darkest cell, where a uniformity has a value.
    unlit = measure.value is not None and measure.name.endswith(".uniformity")
    text = "darkest cell not hit" if unlit else "not hit"
    return text if measure.upper is None else f"{text}, below {measure.upper:.3g}{unit}"
