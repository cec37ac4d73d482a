"""Parts that overlap or lie inside one another are listed beside those that touch."""

import pytest

from tests.unit.world_study import built, new_study
from tests.worlds import box, joined, rectangle

PLATE = box((-5, -5, 0), (5, 5, 1))
SUNK = box((-2, -2, 0.7), (2, 2, 3))  # 0.3 deep in the plate
PEBBLE = box((-1, -1, 0.25), (1, 1, 0.75))  # inside the plate
WHITE = {"medium": "opaque", "finish": "white"}
SHEET = {"medium": "sheet", "finish": "white"}
CLEAR = {"medium": "clear"}
FIRST = {"medium": "clear", "priority": 2}


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def rows(study):
    return [(contact.parts, contact.taken) for contact in built(study).contacts]


@pytest.mark.parametrize(
    ("plate", "other", "mesh", "taken"),
    [
        (CLEAR, WHITE, SUNK, "overlaps; the opaque face acts"),
        (WHITE, CLEAR, SUNK, "overlaps; the opaque face acts"),
        (CLEAR, FIRST, SUNK, "overlaps; other acts by priority"),
        (FIRST, CLEAR, SUNK, "overlaps; plate acts by priority"),
        (WHITE, WHITE, SUNK, "overlaps; no light between"),
        (CLEAR, WHITE, PEBBLE, "other inside; the opaque face acts"),
        (CLEAR, CLEAR, PEBBLE, "other inside; other acts"),
        (FIRST, CLEAR, PEBBLE, "other inside; plate acts by priority"),
        (WHITE, CLEAR, PEBBLE, "other inside; the opaque face acts"),
        (CLEAR, SHEET, rectangle((4, 4), (4, 0, 0.5)), "overlaps; the sheet acts"),
        (CLEAR, SHEET, rectangle((4, 4), (0, 0, 0.5)), "other inside; the sheet acts"),
        (CLEAR, SHEET, rectangle((20, 20), (0.3, 0.1, 0.5)), "overlaps; the sheet acts"),
    ],
)
def test_what_acts_in_the_room_that_two_parts_share(study, plate, other, mesh, taken):
    study.part("plate", PLATE, **plate)
    study.part("other", mesh, **other)
    (contact,) = built(study).contacts
    assert contact.parts == ("plate", "other") and contact.taken == taken
    assert contact.area is None and contact.gap is None


@pytest.mark.parametrize(
    ("medium", "mesh"),
    [
        (WHITE, box((-2, -2, 1), (2, 2, 3))),
        (WHITE, box((5, -5, 0), (9, 5, 1))),
        (SHEET, rectangle((4, 4), (0, 0, 1))),
        (SHEET, rectangle((20, 20), (0, 0, 1))),
    ],
)
def test_what_only_touches_does_not_overlap(study, medium, mesh):
    study.part("plate", PLATE, **CLEAR)
    study.part("other", mesh, **medium)
    assert rows(study) == [(("plate", "other"), "dry")]


def test_sheets_that_meet_at_a_rim_do_not_overlap_and_crossing_ones_do(study):
    study.part("flat", rectangle((4, 4)), **SHEET)
    upright = {"axis": [0, 1, 0], "degrees": 90}
    study.part("wall", rectangle((2, 2)), **SHEET, turn=upright, at=[0.3, 0, 1])
    assert rows(study) == []
    study.part("fence", rectangle((2, 2)), **SHEET, turn=upright, at=[-0.7, 0, 0.2])
    assert rows(study) == [(("flat", "fence"), "overlaps; no light between")]


def test_a_part_in_a_hollow_shares_no_room(study):
    study.part("room", joined(box((-9,) * 3, (9,) * 3), box((-8,) * 3, (8,) * 3).inward()), **WHITE)
    study.part("stone", box((-1,) * 3, (1,) * 3), **WHITE)
    assert rows(study) == []


def test_copies_are_listed_once_and_in_the_order_of_the_file(study):
    study.part("plate", PLATE, **CLEAR)
    study.part("die", box((-4.5, -1, 0.9), (-4, 1, 2)), **WHITE,
               repeat={"count": [5, 1, 1], "step": [1, 0, 0]})  # fmt: skip
    study.part("base", box((-5, -5, -1), (5, 5, 0)), **WHITE)
    assert rows(study) == [
        (("plate", "die"), "overlaps; the opaque face acts"),
        (("plate", "base"), "dry"),
    ]


def test_the_tolerance_of_the_study_decides_what_overlaps(study):
    study.part("plate", PLATE, **CLEAR)
    study.part("other", box((-2, -2, 0.99), (2, 2, 3)), **WHITE)
    assert rows(study) == [(("plate", "other"), "overlaps; the opaque face acts")]
    text = study.text().replace('length = "mm"', 'length = "mm"\ntouch = 0.02')
    study.text = lambda: text
    assert rows(study) == [(("plate", "other"), "dry")]
    assert built(study).touch == pytest.approx((0.02, 0.02))
