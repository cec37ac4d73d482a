"""Turn, move, repeat."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from lumentrace.scene.model import Grid, Ring, Turn
from lumentrace.world.placement import copies, pose_of, rotation
from tests.unit.world_study import built, new_study
from tests.worlds import box

ANGLES = st.floats(-720, 720, allow_subnormal=False)
AXES = st.tuples(*[st.floats(-1, 1, allow_subnormal=False)] * 3).filter(
    lambda axis: np.linalg.norm(axis) > 1e-3
)


class Part:
    """What `copies` asks of a part."""

    def __init__(self, turn=(), at=(0.0, 0.0, 0.0), repeat=None):
        self.turn, self.at, self.repeat = turn, at, repeat


@given(AXES, ANGLES)
def test_rotation_is_that_of_scipy(axis, degrees):
    expected = Rotation.from_rotvec(np.array(axis) / np.linalg.norm(axis) * np.radians(degrees))
    assert rotation(axis, degrees) == pytest.approx(expected.as_matrix(), abs=1e-12)


@pytest.mark.parametrize("quarters", range(-5, 6))
def test_quarter_turns_are_exact(quarters):
    found = rotation((0, 0, 1), 90.0 * quarters) @ [3.0, 7.0, 2.0]
    assert found.tolist() == [[3, 7, 2], [-7, 3, 2], [-3, -7, 2], [7, -3, 2]][quarters % 4]


def test_turns_are_taken_in_order_then_the_move():
    turns = (Turn((0, 0, 1), 90.0), Turn((1, 0, 0), 90.0))
    assert pose_of(turns, (10, 20, 30)).points(np.array([1.0, 0, 0])).tolist() == [10, 20, 31]


@given(st.tuples(*[st.integers(1, 4)] * 3), st.tuples(*[st.floats(-9, 9)] * 3), ANGLES)
def test_a_grid_runs_along_the_axes_of_the_scene(count, step, degrees):
    part = Part((Turn((0, 0, 1), degrees),), (1.0, 2.0, 3.0), Grid(count, step))
    poses = copies(part)
    assert len(poses) == np.prod(count)
    for number, pose in enumerate(poses):
        i, j, k = number % count[0], number // count[0] % count[1], number // (count[0] * count[1])
        assert pose.matrix.tolist() == poses[0].matrix.tolist()
        expected = np.array([1.0, 2.0, 3.0]) + np.array(step) * (i, j, k)
        assert pose.shift == pytest.approx(expected)


@given(st.integers(2, 12), AXES, st.tuples(*[st.floats(-5, 5)] * 3))
def test_a_ring_turns_each_copy_into_the_next(count, axis, center):
    """A full ring closes, and every copy is the one before it, turned about the axis."""
    degrees = 360.0 / count
    part = Part((Turn((1, 2, 3), 40.0),), (7.0, -1.0, 2.0), Ring(count, axis, degrees, center))
    corners = box((0, 0, 0), (1, 2, 3)).vertex
    placed = [pose.points(corners) for pose in copies(part)]
    turn = rotation(axis, degrees)
    for before, after in zip(placed, placed[1:] + placed[:1], strict=True):
        assert after == pytest.approx((before - center) @ turn.T + center, abs=1e-9)
    assert placed[0] == pytest.approx(pose_of(part.turn, part.at).points(corners))


def test_bodies_come_in_the_order_of_the_file_copies_together(tmp_path):
    study = new_study(tmp_path)
    cube = box((0, 0, 0), (1, 1, 1))
    white = {"medium": "opaque", "finish": "white"}
    study.part("die", cube, **white, repeat={"count": [3, 2, 1], "step": [5, 7, 0]}, length="cm")
    half_turn = {"count": 2, "axis": [0, 0, 1], "degrees": 180, "center": [2, 0, 0]}
    study.part("wheel", cube, **white, at=[0, 0, 300], repeat=half_turn)
    study.part("gone", cube, **white, use=False)
    world = built(study)
    assert world.body_names[:3] == ("die (1)", "die (2)", "die (3)")
    assert world.body_names[-2:] == ("wheel (1)", "wheel (2)")
    assert world.part_names == ("die", "wheel")
    mesh = world.arrays.mesh
    lower = [mesh.vertex[mesh.corner[mesh.body == b]].min(axis=(0, 1)) for b in range(8)]
    assert lower[1] == pytest.approx([5, 0, 0]) and lower[3] == pytest.approx([0, 7, 0])
    assert lower[7] == pytest.approx([3, -1, 300])
    assert world.parts[0].size == pytest.approx([10, 10, 10]) and world.parts[0].copies == 6


def test_sources_and_detectors_turn_about_the_origin_of_the_scene(tmp_path):
    study = new_study(tmp_path)
    plane = {"center": [10, 0, 0], "normal": [1, 0, 0], "across": [1, 1, 0], "size": [4, 2]}
    where = {"turn": {"axis": [0, 0, 1], "degrees": 90}, "at": [0, 0, 5]}
    study.source("sun", rectangle=plane, pattern={"collimated": 60}, **where)
    study.detector("screen", **plane, cells=(3, 2), **where)
    arrays = built(study).arrays
    for place, size in (
        (arrays.sources.place[1], arrays.sources.size[1]),
        (arrays.detectors.place[0], arrays.detectors.size[0]),
    ):
        expected = [[0, 10, 5], [0, 1, 0], [-1, 0, 0], [0, 0, 1]]
        assert place == pytest.approx(np.array(expected)) and size.tolist() == [2, 1]
    assert arrays.sources.pattern_values[1, 0] == pytest.approx(0.5)
