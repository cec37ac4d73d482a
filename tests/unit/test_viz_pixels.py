"""Pixels are where they belong: cells of maps, parts, cuts."""

import numpy as np
import pytest
from matplotlib import colormaps

from lumentrace_viz.map_picture import map_picture
from lumentrace_viz.page import MAP_COLOURS
from lumentrace_viz.probe import make_ready
from lumentrace_viz.shade import Sheet, shaded
from lumentrace_viz.view import View
from tests.unit.synthetic_run import run

LEVEL = 2  # of 255: what antialiasing and rounding may change in the middle of a cell


def face_on(low, high) -> View:
    """From above: x to the right, y up."""
    x, y, z = np.eye(3)
    return View(x, y, z, np.array(low, float), np.array(high, float))


def middles(n: int, size: int) -> list[int]:
    return [int((i + 0.5) * size / n) for i in range(n)]


def test_the_cells_of_a_map_in_the_scene_have_their_own_colours():
    make_ready()
    n_up, n_across = 2, 3
    colour = np.random.default_rng(3).integers(0, 255, (n_up, n_across, 3)).astype(np.uint8)
    x, y = np.meshgrid(np.arange(n_across + 1.0), np.arange(n_up + 1.0))
    corner = np.stack([x, y, np.zeros_like(x)], axis=-1)
    picture = shaded([], [Sheet(corner, colour)], face_on((0, 0), (3, 2)), (300, 200))
    seen = picture[np.ix_(middles(n_up, 200)[::-1], middles(n_across, 300))]
    assert np.abs(seen.astype(int) - colour.astype(int)).max() <= LEVEL


def test_the_picture_of_a_map_shows_each_cell_in_the_colour_of_its_value():
    traced = run()
    page = map_picture(traced, "desk")
    node = traced.detector("desk")
    page.figure.canvas.draw()
    pixels = np.asarray(page.figure.canvas.buffer_rgba())[::-1, :, :3].astype(int)
    axes = page.figure.axes[1]
    high = float(node["value"].max())
    for i, up in enumerate(node["up"].values):
        for j, across in enumerate(node["across"].values):
            width, height = (c[1] - c[0] for c in (node["across"].values, node["up"].values))
            place = across - 0.4 * width, up - 0.4 * height  # beside the number in the middle
            x, y = axes.transData.transform(place).astype(int)
            wanted = 255 * np.array(colormaps[MAP_COLOURS](float(node["value"][i, j]) / high)[:3])
            assert pixels[y, x] == pytest.approx(wanted, abs=LEVEL), (i, j)
