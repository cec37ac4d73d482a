"""Sources and detectors that closed opaque parts swallow are doubted, others are not."""

import pytest

from tests.unit.world_study import built, new_study, told
from tests.worlds import box, joined

BLOCK = box((-5, -5, -5), (5, 5, 5))
WHITE = {"medium": "opaque", "finish": "white"}
ACROSS = {"across": [1, 0, 0], "size": [2, 2]}


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def doubts(study):
    return told(built(study), "doubtful")


@pytest.mark.parametrize(
    ("kind", "inside", "outside"),
    [
        ("point", [1, 2, 3], [1, 2, 8]),
        ("disc", {"center": [0, 0, 1], "normal": [0, 0, 1], "radius": 2},
                 {"center": [5, 0, 1], "normal": [0, 0, 1], "radius": 2}),
        ("disc", {"center": [0, 0, 5], "normal": [0, 0, -1], "radius": 2},
                 {"center": [0, 0, 5], "normal": [0, 0, 1], "radius": 2}),
        ("rectangle", {"center": [0, 0, 1], "normal": [0, 1, 0], **ACROSS},
                      {"center": [0, 0, 5], "normal": [0, 0, 1], **ACROSS}),
    ],
)  # fmt: skip
def test_a_source_inside_an_opaque_part(study, kind, inside, outside):
    pattern = {} if kind == "point" else {"pattern": "lambertian"}
    study.part("tray", BLOCK, **WHITE)
    study.source("out", **{kind: outside}, **pattern)
    assert doubts(study) == []
    study.source("lost", **{kind: inside}, **pattern)
    (doubt,) = doubts(study)
    expected = f": source.lost.{kind}: starts inside tray, which is opaque: no light leaves it"
    assert doubt.startswith("study.toml:") and doubt.endswith(expected)


def test_a_hollow_is_no_inside(study):
    study.part("room", joined(BLOCK, box((-4, -4, -4), (4, 4, 4)).inward()), **WHITE)
    study.source("bulb", point=[0, 0, 0])
    study.detector("within", [0, 0, 1], [0, 0, 1], [2, 2])
    study.detector("floor", [0, 0, -4], [0, 0, 1], [2, 2])
    assert doubts(study) == []
    study.source("brick", point=[0, 0, 4.5])
    assert [": source.brick.point: " in doubt for doubt in doubts(study)] == [True]


@pytest.mark.parametrize("side", ["front", "both"])
def test_a_detector_inside_an_opaque_part(study, side):
    study.part("tray", BLOCK, **WHITE)
    study.detector("lost", [0, 0, 1], [0, 0, 1], [2, 2], side=side)
    (doubt,) = doubts(study)
    expected = ": detector.lost.plane: lies inside tray, which is opaque: no light from outside "
    assert expected + "reaches it" in doubt


def test_a_detector_on_an_opaque_face(study):
    study.part("tray", BLOCK, **WHITE)
    study.detector("up", [0, 0, 5], [0, 0, 1], [2, 2])
    study.detector("both", [0, 0, 5], [0, 0, -1], [2, 2], side="both")
    assert doubts(study) == []
    study.detector("rim", [5, 0, 5], [0, 0, -1], [2, 2])  # half of it stands out
    study.detector("down", [0, 0, 5], [0, 0, -1], [2, 2])
    (doubt,) = [doubt for doubt in doubts(study) if "faces into" in doubt]
    expected = ": detector.down.plane: faces into tray, which is opaque: no light from outside "
    assert expected + "reaches its front" in doubt


def test_transparent_and_open_parts_swallow_nothing(study):
    study.part("lens", BLOCK, medium="clear")
    study.part("shade", BLOCK._replace(corner=BLOCK.corner[2:]), **WHITE, at=[50, 0, 0])
    study.detector("in_lens", [0, 0, 1], [0, 0, 1], [2, 2])
    study.detector("in_shade", [50, 0, 1], [0, 0, 1], [2, 2])
    study.source("bulb", point=[50, 0, 0])
    assert doubts(study) == []
