"""Where pictures are seen from: what they hold, and where they cut."""

import numpy as np
import pytest

from lumentrace_viz.view import overview, section

ASPECT = 1.6
SEED = 5


def within(view, points) -> bool:
    flat = view.project(points)
    return bool((flat > view.low).all() and (flat < view.high).all())


def test_overview_holds_everything_and_looks_from_above():
    points = np.random.default_rng(SEED).uniform(-1, 1, (50, 3)) * (1200, 60, 40)
    view, plane = overview(points, points, np.zeros(3), ASPECT)
    axes = np.stack([view.right, view.up, view.toward])
    assert axes @ axes.T == pytest.approx(np.eye(3), abs=1e-12)
    assert np.linalg.det(axes) == pytest.approx(1.0)
    assert view.toward[2] > 0 and view.up[2] > 0
    assert within(view, points)
    assert view.size[0] / view.size[1] == pytest.approx(ASPECT)
    assert plane.normal.tolist() == [0, -1, 0], "cuts along the longest side"
    assert plane.normal @ view.toward > 0.5, "opens the side that one sees"


def lamp_ways() -> list[np.ndarray]:
    """From dies along x over a profile of 60 x 40 in y and z, then 800 down to a desk."""
    rng = np.random.default_rng(SEED)
    ways = []
    for x in np.linspace(-500, 500, 12):
        side, hole = rng.uniform([-30, 0], [30, 40]), rng.uniform(-30, 30)
        ways.append(
            np.array([[x, 0, 38], [x + 40, *side], [x + 90, hole, 0], [x + 200, 5 * hole, -800]])
        )
    return ways


def test_section_of_a_long_lamp_shows_its_profile_and_not_the_desk():
    profile = np.array([[-600.0, -31, 0], [600, 31, 40]])
    view, plane = section(lamp_ways(), [profile], np.array([24.0, 0, 38]), ASPECT)
    assert view.toward.tolist() == plane.normal.tolist() == [1, 0, 0]
    assert within(view, profile)
    assert view.low[1] > -100, "the desk is far below"


def test_section_leaves_out_what_would_make_the_paths_small():
    room = np.array([[-5000.0, -5000, -3000], [5000, 5000, 3000]])
    view, _ = section(lamp_ways(), [room], np.zeros(3), ASPECT)
    assert view.size[1] < 100


def test_section_of_paths_in_a_plane_is_that_plane():
    way = np.array([[-1.5, 0, -1], [-0.5, 0.1, 0.2], [0, 0, 1.2], [0.5, 0, 0.2], [1.5, 0.1, -1]])
    view, plane = section([way, way * (1, -1, 1)], [], way[0], ASPECT)
    assert plane.normal.tolist() == [0, -1, 0]
    assert view.right.tolist() == [1, 0, 0] and view.up.tolist() == [0, 0, 1]
    assert within(view, way)


def test_section_of_a_single_point_has_a_size():
    view, _ = section([np.ones((2, 3))], [], np.ones(3), ASPECT)
    assert (view.size > 0).all()
