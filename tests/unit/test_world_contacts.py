"""What touches what: pairs of faces, areas, kinds."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from lumentrace.world.arrays import DRY, OPTICAL
from tests.unit.world_study import add_file, binary_stl, built, new_study, refused
from tests.worlds import Mesh, box, rectangle

LOWER = box((0, 0, 0), (4, 4, 1))
UPPER = box((1, 1, 1), (3, 6, 2))  # stands on 2 x 3 of it
AREA = 6.0


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


WHITE = {"medium": "opaque", "finish": "white"}
CLEAR = {"medium": "clear"}
SHEET = {"medium": "sheet", "finish": "white"}


def pairs_of(world):
    """The pairs of faces, (face, face, kind), each direction."""
    mesh = world.arrays.mesh
    rows = np.repeat(np.arange(len(mesh.pair_first) - 1), np.diff(mesh.pair_first))
    return list(zip(rows.tolist(), mesh.pair_prim.tolist(), mesh.pair_kind.tolist(), strict=True))


@pytest.mark.parametrize(
    ("lower", "upper", "kind", "taken"),
    [
        (CLEAR, CLEAR, OPTICAL, "optical contact"),
        (CLEAR, WHITE, DRY, "dry"),
        (WHITE, CLEAR, DRY, "dry"),
        (WHITE, WHITE, DRY, "no light between"),
    ],
)
def test_kinds_by_what_fills_the_parts(study, lower, upper, kind, taken):
    study.part("lower", LOWER, **lower)
    study.part("upper", UPPER, **upper)
    world = built(study)
    (contact,) = world.contacts
    assert contact.parts == ("lower", "upper") and contact.taken == taken
    assert contact.area == pytest.approx(AREA, rel=1e-12) and contact.gap == 0
    pairs = pairs_of(world)
    assert {k for _, _, k in pairs} == {kind}
    assert {(b, a, k) for a, b, k in pairs} == set(pairs)
    mesh = world.arrays.mesh
    for a, b, _ in pairs:
        assert mesh.body[a] != mesh.body[b]
        assert mesh.normal[a] @ mesh.normal[b] == pytest.approx(-1)
        assert (mesh.vertex[mesh.corner[[a, b]]][..., 2] == 1).all()


@pytest.mark.parametrize("flip", [False, True])
def test_a_sheet_lies_dry_whichever_way_it_faces(study, flip):
    study.part("lower", LOWER, **CLEAR)
    study.part("label", rectangle((2, 3), (2, 2.5, 1)), **SHEET, flip=flip)
    world = built(study)
    assert world.contacts[0].taken == "dry" and world.contacts[0].area == pytest.approx(AREA)
    assert {kind for *_, kind in pairs_of(world)} == {DRY}


def test_an_opaque_part_flush_within_a_clear_one_acts(study):
    study.part("lens", LOWER, **CLEAR)
    study.part("die", box((1, 1, 0.5), (2, 3, 1)), **WHITE)
    world = built(study)
    assert world.contacts[0].taken == "flush, the opaque face acts"
    assert world.contacts[0].area == pytest.approx(2.0)
    assert {kind for *_, kind in pairs_of(world)} == {OPTICAL}


def test_clear_parts_side_by_side_touch_only_where_they_meet(study):
    study.part("a", box((0, 0, 0), (1, 1, 1)), **CLEAR)
    study.part("b", box((1, 0, 0), (2, 1, 1)), **CLEAR)
    (contact,) = built(study).contacts
    assert contact.area == pytest.approx(1.0, rel=1e-9)


@pytest.mark.parametrize("shift", [(1, 1, 0), (1, 1, 1), (1.001, 0, 0), (0, 0, 1 + 1e-5)])
def test_edges_corners_and_near_misses_are_no_contact(study, shift):
    study.part("a", box((0, 0, 0), (1, 1, 1)), **CLEAR)
    study.part("b", box((0, 0, 0), (1, 1, 1)).moved(shift), **CLEAR)
    world = built(study)
    assert world.contacts == () and pairs_of(world) == []


def test_coplanar_faces_side_by_side_are_no_contact(study):
    study.part("a", rectangle((2, 2)), **SHEET)
    study.part("b", rectangle((2, 2), (2, 0, 0)), **SHEET)
    assert built(study).contacts == ()


def test_a_face_bent_away_from_another_is_no_contact(study):
    """A plate that stands on its edge, tilted by a degree from the face beside it."""
    hinged = rectangle((2, 2), (1, 0, 0))
    tilt = np.radians(1.0)
    turn = {"axis": [0, 1, 0], "degrees": -float(np.degrees(tilt))}
    study.part("a", rectangle((2, 2), (1, 0, 0)), **SHEET)
    study.part("b", hinged, **SHEET, turn=turn)
    assert built(study).contacts == ()


@settings(
    deadline=None, max_examples=20, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    st.integers(0, 1000),
    st.floats(0, 360),
    st.tuples(*[st.floats(-1e4, 1e4)] * 3),
    st.sampled_from([1e-3, 1.0, 1e3]),
)
def test_contacts_hold_wherever_the_parts_stand(tmp_path_factory, seed, degrees, at, size):
    """Both parts as float32 files, scaled, and placed by the same turn and move."""
    axis = np.random.default_rng(seed).normal(size=3).tolist()
    study = new_study(tmp_path_factory.mktemp("any"))
    place = {"turn": {"axis": axis, "degrees": degrees}, "at": [x * size for x in at]}
    for name, mesh in (("lower", LOWER), ("upper", UPPER)):
        scaled = Mesh(mesh.vertex * size, mesh.corner)
        add_file(study, name, binary_stl(scaled), f"{name}.stl", medium="clear", **place)
    world = built(study)
    assert world.contacts[0].area == pytest.approx(AREA * size**2, rel=1e-6)
    mesh = world.arrays.mesh
    assert mesh.pair_gap.max() <= 2**-22 * 6 * size + 16 * 2**-52 * np.abs(mesh.vertex).max()


def test_a_contact_of_many_small_faces_has_the_area_of_the_whole(study):
    """Two tessellations that have nothing in common."""
    rng = np.random.default_rng(4)

    def ragged(low, high, n):
        from scipy.spatial import Delaunay

        inner = rng.uniform(low, high, (n, 2))
        rim = [[low, low], [low, high], [high, low], [high, high]]
        flat = np.concatenate([rim, inner])
        corner = Delaunay(flat).simplices
        mesh = Mesh(np.c_[flat, np.zeros(len(flat))], corner)
        corner[mesh.cross[:, 2] < 0] = corner[mesh.cross[:, 2] < 0, ::-1]
        return Mesh(mesh.vertex, corner)

    study.part("a", ragged(0.0, 10.0, 900), **SHEET)
    study.part("b", ragged(3.0, 12.0, 700), **SHEET)
    (contact,) = built(study).contacts
    assert contact.area == pytest.approx(49.0, rel=1e-9)


def test_areas_are_summed_over_copies(study):
    study.part("lower", box((0, 0, 0), (100, 4, 1)), **CLEAR)
    study.part("post", box((0, 0, 1), (1, 2, 3)), **WHITE,
               repeat={"count": [5, 1, 1], "step": [10, 0, 0]})  # fmt: skip
    (contact,) = built(study).contacts
    assert contact.parts == ("lower", "post") and contact.area == pytest.approx(10.0)


def test_the_tolerance_of_the_study_bridges_a_gap(study):
    study.part("lower", LOWER, **CLEAR)
    study.part("upper", UPPER.moved((0, 0, 0.01)), **CLEAR)
    assert built(study).contacts == ()
    text = study.text().replace('length = "mm"', 'length = "mm"\ntouch = 0.02')
    study.text = lambda: text
    world = built(study)
    assert world.contacts[0].gap == pytest.approx(0.01)
    assert world.arrays.mesh.pair_gap == pytest.approx(0.01)


def test_a_detector_on_a_face_is_paired_with_it(study):
    study.part("lower", LOWER, **CLEAR)
    study.detector("off", [2, 2, 5], [0, 0, 1], [1, 1])
    study.detector("on", [2, 2, 1], [0, 0, -1], [1, 1])
    world = built(study)
    n_faces = len(world.arrays.mesh.corner)
    pairs = pairs_of(world)
    assert {max(a, b) for a, b, _ in pairs} == {n_faces + 1}
    tops = set(np.flatnonzero(world.arrays.mesh.normal[:, 2] == 1).tolist())
    assert {min(a, b) for a, b, _ in pairs} == tops
    assert len(pairs) == 4 and world.contacts == ()


def test_two_finishes_on_one_optical_contact_are_refused_naming_both(study):
    study.finish("paint", diffuse=0.5)
    rule = {"tag": [{"name": "top", "pick": {"facing": [0, 0, 1], "within": 1}}]}
    study.part("lower", LOWER, medium="clear", finish={"top": "paint"}, **rule)
    study.part("upper", UPPER, medium="clear", finish="white")
    text = refused(study)
    assert "part.upper.finish: " in text
    assert '"upper:default" (white) and "lower:top" (paint) lie on one another' in text
    study.lists["part"][0]["priority"] = 1
    assert len(built(study).contacts) == 1
    study.lists["part"][0].update(priority=0, finish="uncoated")
    assert len(built(study).contacts) == 1


def test_paint_elsewhere_on_both_parts_is_no_conflict(study):
    study.finish("paint", diffuse=0.5)
    bottom = {"tag": [{"name": "bottom", "pick": {"facing": [0, 0, -1], "within": 1}}]}
    study.part("lower", LOWER, medium="clear", finish={"bottom": "paint"}, **bottom)
    study.part("upper", UPPER, medium="clear", finish={"bottom": "white"}, **bottom)
    assert built(study).contacts[0].taken == "optical contact"


@settings(deadline=None, max_examples=30)
@given(st.integers(0, 10_000), st.floats(1e-2, 1e4))
def test_parts_placed_in_cad_and_written_as_float32_touch(tmp_path_factory, seed, far):
    """The default tolerance covers the rounding of both files, wherever CAD put the parts."""
    from scipy.spatial.transform import Rotation

    rng = np.random.default_rng(seed)
    turn, shift = Rotation.random(random_state=rng).as_matrix(), rng.uniform(-far, far, 3)
    study = new_study(tmp_path_factory.mktemp("any"))
    for name, mesh in (("lower", LOWER), ("upper", UPPER)):
        placed = Mesh(mesh.vertex @ turn.T + shift, mesh.corner)
        add_file(study, name, binary_stl(placed), f"{name}.stl", medium="clear")
    (contact,) = built(study).contacts
    assert contact.area == pytest.approx(AREA, rel=1e-5 + 1e-6 * far)
