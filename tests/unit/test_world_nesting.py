"""Ranks of transparent bodies: priority, then nesting, then the order of the file."""

import numpy as np
import pytest

from tests.unit.world_study import add_file, binary_stl, built, new_study, refused
from tests.worlds import box, joined


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def cube(half, center=(0, 0, 0)):
    return box((-half,) * 3, (half,) * 3).moved(center)


def order(world):
    """Names of the transparent bodies, the one that acts first."""
    rank = world.arrays.bodies.rank
    clear = np.flatnonzero(rank >= 0)
    assert sorted(rank[clear]) == list(range(len(clear)))
    return [world.body_names[i] for i in clear[np.argsort(-rank[clear])]]


def test_the_larger_priority_acts(study):
    for name, priority in (("a", 0), ("b", 2), ("c", -1)):
        study.part(name, cube(1, (0.5 * ord(name[0]), 0, 0)), medium="clear", priority=priority)
    assert order(built(study)) == ["b", "a", "c"]


def test_of_equal_priority_the_body_wholly_inside_acts_in_any_order(study):
    for name, half in (("mid", 2), ("outer", 3), ("inner", 1)):
        study.part(name, cube(half), medium="clear")
    assert order(built(study)) == ["inner", "mid", "outer"]


def test_of_equal_rank_the_first_in_the_file_acts(study):
    for name, x in (("a", 0), ("b", 2), ("c", 4)):
        study.part(name, cube(1, (x, 0, 0)), medium="clear")
    assert order(built(study)) == ["a", "b", "c"]


def test_nesting_changes_the_order_only_where_it_must(study):
    """inner is in outer; beside, which touches both from outside, keeps its place in the file."""
    study.part("outer", box((0, 0, 0), (4, 4, 4)), medium="clear")
    study.part("beside", box((4, 0, 0), (6, 4, 4)), medium="clear")
    study.part("inner", box((3, 1, 1), (4, 2, 2)), medium="clear")
    assert order(built(study)) == ["beside", "inner", "outer"]


def test_a_body_inside_that_shares_faces_is_inside(study):
    study.part("outer", cube(2), medium="clear")
    study.part("inner", cube(1, (1, 1, 1)), medium="clear")
    assert order(built(study)) == ["inner", "outer"]


def test_two_solids_of_one_part_must_both_be_inside(study):
    ring = joined(box((0, 0, 0), (9, 9, 9)), box((3, 3, 1), (6, 6, 8)).inward())
    study.part("shell", ring, medium="clear")
    study.part("pair", joined(box((1, 1, 1), (2, 2, 2)), box((4, 4, 4), (5, 5, 5))), medium="clear")
    assert order(built(study)) == ["shell", "pair"]


def test_opaque_parts_have_no_rank(study):
    study.part("tray", cube(1), medium="opaque", finish="white")
    study.part("cover", cube(2), medium="clear")
    arrays = built(study).arrays
    assert arrays.bodies.rank.tolist() == [-1, 0] and arrays.bodies.medium[0] == -1


def test_equal_priorities_that_cross_are_refused_naming_both_and_the_place(study):
    study.part("a", cube(1), medium="clear")
    study.part("b", cube(1, (1.5, 0.5, 0.5)), medium="clear", priority=0)
    text = refused(study)
    line = study.text().splitlines().index("priority = 0") + 1
    assert text.startswith(f'study.toml:{line}: part.b.priority: "a" and "b" cross near (')
    assert "both have priority 0" in text
    study.lists["part"][1]["priority"] = 1
    assert order(built(study)) == ["b", "a"]


def test_copies_that_cross_are_refused_by_their_numbers(study):
    study.part("bar", cube(1), medium="clear", repeat={"count": [3, 1, 1], "step": [1.5, 0, 0]})
    assert '"bar (1)" and "bar (2)" cross near' in refused(study)


def test_what_rounding_of_the_files_explains_is_a_touch(study):
    """Two STL bodies that share a slanted plane: float32 makes them cross by some 1e-5."""
    angle = 0.7
    turn = np.array(
        [[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]]
    )
    shift = np.array([123.4, 56.7, 89.0])
    for name, x in (("a", -7.0), ("b", 7.0)):
        mesh = box((x - 7, -5, -5), (x + 7, 5, 5))
        mesh = mesh._replace(vertex=mesh.vertex @ turn.T + shift)
        add_file(study, name, binary_stl(mesh), f"{name}.stl", medium="clear")
    world = built(study)
    assert order(world) == ["a", "b"]
    assert world.contacts[0].area == pytest.approx(100.0, rel=1e-4)


def test_the_tolerance_of_the_study_decides_what_crosses(study):
    study.part("a", cube(1), medium="clear")
    study.part("b", cube(1, (1.99, 0.3, 0.3)), medium="clear")
    assert "cross near" in refused(study)
    text = study.text().replace('length = "mm"', 'length = "mm"\ntouch = 0.02')
    study.text = lambda: text
    world = built(study)
    assert order(world) == ["a", "b"] and world.contacts[0].gap == pytest.approx(0.01)
