"""Parts cut open, where, and the ways of rays along the strongest paths."""

from types import SimpleNamespace

import numpy as np
import pytest

from lumentrace import study
from lumentrace.world.arrays import OPAQUE, TRANSPARENT
from lumentrace_viz.places import detector_corners, source_middle
from lumentrace_viz.scene_picture import heart
from lumentrace_viz.solids import opened, solid
from lumentrace_viz.view import Plane
from lumentrace_viz.ways import Drawn, strongest
from tests.journeys.command import SCENE, small_scene

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


LAMP = "point    = [0, 0, 20]"
PLACES = {  # the parts fill -5 to 5 in x and y, -1 to 11 in z; the way meets (3, -2, 6) first
    "point = [1, 2, 3]": (1, 2, 3),
    "point = [1, 2, 20]": (1, 2, 6),
    "point = [1, 40, 20]": (1, -2, 6),
    "disc = { center = [0, 0, 20], normal = [0, 0, -1], radius = 4 }": (0, 0, 6),
    "disc = { center = [0, 0, 20], normal = [0, 0, -1], radius = 50 }": (3, -2, 6),
}


@pytest.mark.parametrize("shape", PLACES)
def test_the_cut_goes_through_the_source_or_where_a_sun_shines(tmp_path, shape):
    path = small_scene(tmp_path)
    pattern = '"isotropic"' if shape.startswith("point") else '"lambertian"'
    path.write_text(SCENE.replace(LAMP, shape).replace('"isotropic"', pattern))
    lit = study.build(study.load(path))
    way = np.array([[0.1, 0.2, 20], [3, -2, 6], [0, 0, 1]])
    drawn = Drawn(SimpleNamespace(source="lamp"), (way,))
    assert heart(lit, [drawn]) == pytest.approx(PLACES[shape])


def test_a_cut_that_would_open_nothing_moves_to_the_middle_of_the_parts(world):
    grazing = np.array([[0, 0, 20], [4, 4, 11.0], [0, 0, 1]])
    drawn = Drawn(SimpleNamespace(source="lamp"), (grazing,))
    assert heart(world, [drawn]) == pytest.approx((0, 0, 5)), "11 is the top of the window"
    assert heart(world, []) == pytest.approx((0, 0, 5))
