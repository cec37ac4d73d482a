"""Parts cut open, and the ways of rays along the strongest paths."""

import numpy as np
import pytest

from lumentrace import study
from lumentrace.world.arrays import OPAQUE, TRANSPARENT
from lumentrace_viz.places import detector_corners, source_middle
from lumentrace_viz.solids import opened, solid
from lumentrace_viz.view import Plane
from lumentrace_viz.ways import strongest
from tests.journeys.command import small_scene

WINDOW, FLOOR = 0, 1
UPRIGHT = Plane(np.array([0.0, 1e-6, 0.0]), np.array([0.0, -1.0, 0.0]))  # keeps y > 0


@pytest.fixture(scope="module")
def world(tmp_path_factory):
    return study.build(study.load(small_scene(tmp_path_factory.mktemp("plate"))))


def test_a_closed_part_shows_its_inside_where_it_is_cut(world):
    whole = solid(world, FLOOR)
    shown = opened(whole, UPRIGHT)
    assert whole.kind == OPAQUE and whole.filled and solid(world, WINDOW).kind == TRANSPARENT
    assert shown.cut.area == pytest.approx(10.0 * 1.0), "the plate is 10 x 10 x 1 mm"
    assert shown.mesh.bounds == pytest.approx((-5, 5, 1e-6, 5, -1, 0), abs=1e-6)
    assert whole.mesh.area == pytest.approx(2 * 100 + 4 * 10), "the whole one is as it was"


def test_an_open_part_has_no_inside(tmp_path):
    path = small_scene(tmp_path)
    mesh = tmp_path / "plate.obj"
    mesh.write_text("".join(mesh.read_text().splitlines(keepends=True)[:-4]))  # without its rim
    path.write_text(
        path.read_text().replace('medium = "glass"\n', 'medium = "opaque"\nfinish = "grey"\n')
    )
    shown = opened(solid(study.build(study.load(path)), FLOOR), UPRIGHT)
    assert shown.cut.n_cells == 0 and shown.outline.n_cells > 0


def test_ways_lead_from_the_source_along_the_path_to_the_detector(world):
    run = study.trace(world, rays=65_536, threads=1)
    drawn = strongest(run, world, "desk", 3)
    assert [path.row.steps for path in drawn[:1]] == [
        (("window:above", "through"), ("window:below", "through"))
    ]
    corner = detector_corners(world, 0)
    for path in drawn:
        assert path.ways, path.row.text
        for way in path.ways:
            assert way[0] == pytest.approx(source_middle(world, 0))
            assert way[-1][2] == pytest.approx(1.0), "the desk's plane"
            assert (way[-1][:2] >= corner.min(axis=0)[:2]).all()
            assert (way[-1][:2] <= corner.max(axis=0)[:2]).all()
            assert len(way) >= 2 + len(path.row.steps)
    way = drawn[0].ways[0]
    assert way[1][2] == pytest.approx(11.0) and way[2][2] == pytest.approx(10.0)
