"""Picks and tags: which faces a rule takes, in the mesh file's own frame."""

import numpy as np
import pytest

from tests.unit.world_study import built, new_study, refused
from tests.worlds import BOX_SIDES, Mesh, box, cylinder, joined, rectangle

SIDES = box((-1, -2, -3), (1, 2, 3), names=BOX_SIDES)
PLAIN = SIDES._replace(tags=None)


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def faces_of(study, mesh=PLAIN, rules=(), finish=None, **keys):
    """Faces of each tag of a part, as sets of face numbers."""
    given = {"medium": "opaque", "finish": finish or "white", **keys}
    rules = [{"name": name, "pick": pick} for name, pick in rules]
    study.part("tray", mesh, **given, tag=rules)
    world = built(study)
    names = [name.partition(":")[2] for name in world.tag_names]
    tag = world.arrays.mesh.tag
    return {name: set(np.flatnonzero(tag == row).tolist()) for row, name in enumerate(names)}


def side(*names):
    return {2 * BOX_SIDES.index(n) + k for n in names for k in (0, 1)}


def test_facing_takes_faces_within_the_angle(study):
    tags = faces_of(study, rules=[("up", {"facing": [0, 0, 2], "within": 5})])
    assert tags == {"up": side("ceiling"), "default": set(range(12)) - side("ceiling")}


def test_facing_within_includes_the_angle_itself(study):
    tags = faces_of(study, rules=[("most", {"facing": [0, 0, 1], "within": 90})])
    assert tags == {"most": set(range(12)) - side("floor"), "default": side("floor")}


def test_picks_are_in_the_frame_and_unit_of_the_file(study):
    """Turned, moved, in another unit and repeated: the tag is the same for every copy."""
    study.part(
        "tray", PLAIN, medium="opaque", finish="white", length="cm",
        turn={"axis": [1, 0, 0], "degrees": 90}, at=[100, 0, 0],
        repeat={"count": [2, 1, 1], "step": [500, 0, 0]},
        tag=[{"name": "up", "pick": {"box": [[-1, -2, 3], [1, 2, 3]]}}],
    )  # fmt: skip
    mesh = built(study).arrays.mesh
    assert np.flatnonzero(mesh.tag == 0).tolist() == [10, 11, 22, 23]
    assert mesh.normal[10] == pytest.approx([0, -1, 0])
    assert mesh.vertex[mesh.corner[[10, 11]]][..., 1] == pytest.approx(-30.0)


def test_all_corners_must_be_in_a_box(study):
    rules = [("low", {"box": [[-1, -2, -3], [1, 2, 2.9]]})]
    assert faces_of(study, rules=rules)["low"] == side("floor")


def test_a_box_allows_for_the_rounding_of_the_file(study):
    rounded = PLAIN._replace(vertex=PLAIN.vertex * np.float64(np.float32(1 + 1e-7)))
    assert (rounded.vertex.max(axis=0) > [1, 2, 3]).all()
    tags = faces_of(study, rounded, rules=[("all", {"box": [[-1, -2, -3], [1, 2, 3]]})])
    assert tags == {"all": set(range(12))}


def test_a_tube_has_ends_and_two_radii(study):
    pipe = joined(cylinder(24, 1.0, 0, 5).inward(), cylinder(24, 2.0, 0, 5))
    inner = {"tube": {"from": [0, 0, 0], "to": [0, 0, 5], "radius": [0, 1.1]}}
    tags = faces_of(study, pipe, rules=[("bore", inner)])
    radius = np.linalg.norm(pipe.vertex[pipe.corner][..., :2], axis=2).max(axis=1)
    assert tags["bore"] == set(np.flatnonzero(radius < 1.1).tolist())
    short = {"tube": {"from": [0, 0, 0], "to": [0, 0, 4.9], "radius": [0, 3]}}
    study.lists["part"] = []
    tags = faces_of(study, pipe, rules=[("base", short)])
    base = np.flatnonzero((pipe.vertex[pipe.corner][..., 2] == 0).all(axis=1))
    assert tags["base"] == set(base.tolist())


def test_all_keys_of_a_pick_hold_and_any_pick_of_a_list(study):
    both = {"facing": [0, 0, 1], "within": 5, "box": [[-1, -2, 0], [1, 2, 3]]}
    rules = [("ends", [both, {"facing": [0, 0, -1], "within": 5}])]
    assert faces_of(study, rules=rules)["ends"] == side("floor", "ceiling")


def test_the_first_rule_that_takes_a_face_has_it(study):
    rules = [
        ("top", {"facing": [0, 0, 1], "within": 5}),
        ("most", {"facing": [0, 0, 1], "within": 95}),
    ]
    tags = faces_of(study, rules=rules)
    assert tags["top"] == side("ceiling") and tags["most"] == side("x0", "x1", "y0", "y1")


def test_growth_stops_at_edges_that_bend_as_much_or_more(study):
    rules = [("top", {"grow_from": [0, 0, 9], "over": 90})]
    assert faces_of(study, rules=rules)["top"] == side("ceiling")
    study.lists["part"] = []
    rules = [("all", {"grow_from": [0, 0, 9], "over": 91})]
    assert faces_of(study, rules=rules)["all"] == set(range(12))


def test_growth_does_not_enter_faces_that_are_taken(study):
    belt = {"box": [[-1, -2, -3], [1, 2, 3]], "facing": [0, 0, 1], "within": 90}
    rules = [("rim", [belt]), ("rest", {"grow_from": [0, 0, -9], "over": 180})]
    tags = faces_of(study, rules=rules)
    assert tags == {"rim": set(range(12)) - side("floor"), "rest": side("floor")}


def test_growth_over_180_crosses_every_edge_of_one_shell_only(study):
    two = joined(PLAIN, PLAIN.moved((10, 0, 0)))
    tags = faces_of(study, two, rules=[("one", {"grow_from": [0, 0, 9], "over": 180})])
    assert tags == {"one": set(range(12)), "default": set(range(12, 24))}


def test_growth_follows_the_surface_of_a_sheet_wound_both_ways(study):
    mesh = rectangle((2, 2))
    mesh.corner[1] = mesh.corner[1, ::-1]
    rules = [("flat", {"grow_from": [0, 0, 0], "over": 10})]
    assert faces_of(study, mesh, rules=rules, medium="sheet") == {"flat": {0, 1}}


def test_growth_passes_slivers(study):
    """Two flat halves joined by a face without area, as CAD kernels leave them."""
    vertex = np.array([[0, -1, 0], [0, 0, 0], [0, 1, 0], [-1, 0, 0], [1, 0, 0]], float)
    corner = np.array([[0, 2, 3], [0, 1, 2], [0, 4, 1], [1, 4, 2]])
    rules = [("flat", {"grow_from": [-0.5, 0, 0], "over": 10})]
    tags = faces_of(study, Mesh(vertex, corner), rules=rules, medium="sheet")
    assert tags == {"flat": {0, 1, 2, 3}}


def test_untaken_faces_keep_the_tags_of_the_file(study):
    rules = [("top", {"facing": [0, 0, 1], "within": 5})]
    tags = faces_of(study, SIDES, rules=rules)
    assert tags == {"top": side("ceiling"), **{name: side(name) for name in BOX_SIDES[:5]}}


def test_rules_take_from_the_tags_of_the_file(study):
    rules = [("walls", [{"tag": "x0"}, {"tag": "y1", "facing": [0, 1, 0], "within": 1}])]
    assert faces_of(study, SIDES, rules=rules)["walls"] == side("x0", "y1")


def test_a_rule_may_have_the_name_of_a_tag_of_the_file(study):
    rules = [("floor", {"tag": "ceiling"})]
    assert faces_of(study, SIDES, rules=rules)["floor"] == side("floor", "ceiling")


def line_of(study, text, nth=0):
    return [i for i, row in enumerate(study.text().splitlines(), 1) if text in row][nth]


def test_a_rule_that_takes_no_face_is_refused_with_its_line(study):
    study.part(
        "tray", PLAIN, medium="opaque", finish="white",
        tag=[{"name": "top", "pick": {"box": [[0, 0, 40], [1, 1, 50]]}}],
    )  # fmt: skip
    text = refused(study)
    assert text.startswith(
        f"study.toml:{line_of(study, 'tag = ')}: part.tray.tag.top.pick: takes no"
    )
    assert "-1 to 1, -2 to 2, -3 to 3" in text


def test_a_growth_from_a_taken_face_says_who_has_it(study):
    rules = [
        ("rim", {"facing": [0, 0, 1], "within": 5}),
        ("outside", {"grow_from": [0, 0, 9], "over": 180}),
    ]
    study.part("tray", PLAIN, medium="opaque", finish="white",
               tag=[{"name": n, "pick": p} for n, p in rules])  # fmt: skip
    assert 'takes no face: the tag "rim", which stands before, has them' in refused(study)


def test_a_tag_that_the_file_has_not_is_refused_with_the_nearest(study):
    study.part("tray", SIDES, medium="opaque", finish="white",
               tag=[{"name": "top", "pick": {"tag": "cieling"}}])  # fmt: skip
    assert '"tray.obj" has no tag "cieling"; did you mean "ceiling"?' in refused(study)


def test_a_finish_of_a_tag_without_faces_is_refused_with_the_nearest(study):
    study.part("tray", SIDES, medium="opaque", finish={"default": "white", "cieling": "white"})
    text = refused(study)
    assert f"study.toml:{line_of(study, 'finish = ')}: part.tray.finish.cieling: " in text
    assert 'has the tag "cieling"; did you mean "ceiling"?' in text


def test_limits_on_tags_are_checked_once_tags_are_known(study):
    study.part("tray", SIDES, medium="opaque", finish="white")
    study.lists["limit"] = [{"measure": "tray:ceiling.absorbed", "at_most": 5}]
    built(study)
    study.lists["limit"] = [{"measure": "tray:cieling.absorbed", "at_most": 5}]
    assert 'no face of "tray" has the tag "cieling"; did you mean "ceiling"?' in refused(study)


def test_a_source_on_a_tag_without_faces_is_refused(study):
    study.part("tray", SIDES, medium="opaque", finish="white")
    study.source("leds", faces={"part": "tray", "tag": "cieling"}, pattern="lambertian")
    text = refused(study)
    assert "source.leds.faces.tag" in text and 'did you mean "ceiling"?' in text
