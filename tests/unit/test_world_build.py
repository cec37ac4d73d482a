"""The arrays as their contract says, and what is doubted."""

import numpy as np
import pytest

from lumentrace.models.registry import DETECTORS, LOBES, MEDIA
from lumentrace.world.arrays import OPAQUE, SHEET, TRANSPARENT
from tests.unit.world_study import add_file, binary_stl, built, new_study, told
from tests.worlds import BOX_SIDES, Mesh, box, cylinder, joined, rectangle, sphere

REAL = (
    "vertex", "normal", "error", "margin", "pair_gap", "widest_gap", "lower", "upper", "lobe_share",
    "values",
    "place", "size", "pattern_values", "wavelength", "ray_flux", "face_area",
)  # fmt: skip
CUBE = box((0, 0, 0), (1, 1, 1))


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def test_kinds_media_and_finishes(study):
    study.finish("paint", diffuse=0.5, mirror=0.2)
    study.finish("film", diffuse=0.1, diffuse_through=0.6)
    study.finish("black")
    study.medium("oil", 1.4, 0.02)
    sides = box((0, 0, 0), (1, 1, 1), names=BOX_SIDES)
    study.part("tray", sides, medium="opaque", finish={"default": "paint", "floor": "black"})
    study.part("foil", rectangle((1, 1), (9, 0, 0)), medium="sheet",
               finish={"front": "film", "back": "paint"})  # fmt: skip
    study.part("drop", CUBE.moved((20, 0, 0)), medium="oil")
    study.part("lens", CUBE.moved((30, 0, 0)), medium="clear", finish={"default": "film"})
    world = built(study)
    arrays = world.arrays
    assert arrays.bodies.kind.tolist() == [OPAQUE, SHEET, TRANSPARENT, TRANSPARENT]
    assert arrays.bodies.medium.tolist() == [-1, -1, 2, 3]
    values = [[1, 0, 0, 0], [1, 0, 0, 0], [1.4, 0.02, 0, 0], [1.5, 0.001, 0, 0]]
    assert arrays.media.values.tolist() == values
    assert [MEDIA[m].name for m in arrays.media.model] == ["uniform"] * 4

    def lobes(finish):
        rows = range(*arrays.finishes.lobe_first[finish : finish + 2])
        return {
            LOBES[arrays.finishes.lobe_model[r]].name: arrays.finishes.lobe_share[r] for r in rows
        }

    def of_tag(name):
        row = world.tag_names.index(name)
        return lobes(arrays.tags.front[row]), lobes(arrays.tags.back[row])

    assert lobes(0) == {"fresnel": 1.0}
    assert of_tag("tray:x0") == ({"lambertian": 0.5, "mirror": 0.2},) * 2
    assert of_tag("tray:floor") == ({}, {})
    film = {"lambertian": 0.1, "lambertian_through": 0.6}
    assert of_tag("foil:default") == (film, {"lambertian": 0.5, "mirror": 0.2})
    assert of_tag("drop:default") == ({"fresnel": 1.0},) * 2
    assert of_tag("lens:default") == (film, film)
    assert arrays.tags.part.tolist() == [0] * 6 + [1, 2, 3]
    assert world.tags[6].finish == "front film, back paint"
    assert sum(fact.share for fact in world.tags[:6]) == pytest.approx(1.0)


def test_facts_are_of_one_copy_in_the_unit_of_the_study(study):
    add_file(study, "die", binary_stl(box((0, 0, 0), (1, 2, 3))), "die.stl", length="cm",
             repeat={"count": [2, 1, 1], "step": [99, 0, 0]})  # fmt: skip
    world = built(study)
    (facts,) = world.parts
    assert facts.size.tolist() == [10, 20, 30] and facts.copies == 2 and facts.faces == 12
    assert facts.area == pytest.approx(2200) and facts.volume == pytest.approx(6000)
    assert facts.closed and facts.medium == "opaque" and len(facts.mesh_digest) == 64
    assert world.tags[0].area == pytest.approx(2200)


def test_error_and_margin_follow_their_formulas(study):
    """32 x 2^-52 x M x max(1, longest edge / smallest altitude), M of the whole scene."""
    study.lists["source"][0]["point"] = [0, 0, 5]
    study.part("flat", rectangle((8, 0.5)), medium="sheet", finish="white")
    study.detector("far", [0, 0, -900], [0, 0, 1], [2000, 10])
    arrays = built(study).arrays
    size, edge = 1000.0, np.hypot(8, 0.5)
    altitude = 8 * 0.5 / edge
    assert arrays.mesh.error == pytest.approx(32 * 2**-52 * size * edge / altitude)
    assert arrays.mesh.margin == pytest.approx(64 * 32 * 2**-52 * size / altitude)
    assert arrays.detectors.error == pytest.approx([32 * 2**-52 * size * 200])


def test_bounds_are_capped_for_needles(study):
    needle = Mesh(np.array([[0, 0, 0], [1, 0, 0], [0.5, 1e-12, 0]]), np.array([[0, 1, 2]]))
    study.part("plate", rectangle((8, 8)), medium="sheet", finish="white")
    study.part("needle", needle, medium="sheet", finish="white", at=[0, 0, 9])
    mesh = built(study).arrays.mesh
    assert mesh.error[2] == 1e-6 * 500 and mesh.margin[2] == 0.25


def test_the_hierarchy_holds_every_primitive_once_within_padded_boxes(study):
    ball = sphere(2, 3.0)
    study.part("ball", ball, medium="clear", repeat={"count": [2, 1, 1], "step": [9, 0, 0]})
    study.detector("plane", [0, 0, 40], [1, 2, 3], [5, 7])
    arrays = built(study).arrays
    tree, mesh = arrays.tree, arrays.mesh
    n = len(mesh.corner)
    assert sorted(tree.order) == list(range(n + 1))
    leaves = np.flatnonzero(tree.count > 0)
    held = np.concatenate(
        [tree.order[tree.child[k] : tree.child[k] + tree.count[k]] for k in leaves]
    )
    assert sorted(held) == list(range(n + 1))
    for k in leaves:
        for prim in tree.order[tree.child[k] : tree.child[k] + tree.count[k]]:
            if prim < n:
                points, error = mesh.vertex[mesh.corner[prim]], mesh.error[prim]
            else:
                place, half = arrays.detectors.place[0], arrays.detectors.size[0]
                signs = np.array([[-1, -1], [1, -1], [1, 1], [-1, 1]])
                points, error = place[0] + (signs * half) @ place[2:], arrays.detectors.error[0]
            slack = 1e-12
            assert (tree.lower[k] <= points.min(axis=0) - error + slack * error).all()
            assert (tree.upper[k] >= points.max(axis=0) + error - slack * error).all()


def test_detectors_and_their_cells(study):
    study.detector("a", [0, 0, 9], [0, 0, 2], [4, 6], (3, 2), across=[1, 1, 1], side="both")
    study.detector("b", [0, 0, 9], [1, 0, 0], [1, 1], (5, 1), across=[0, 1, 0],
                   counts="illuminance", catch=True)  # fmt: skip
    study.detector("c", [0, 0, 9], [1, 0, 0], [1, 1], across=[0, 1, 0], use=False)
    world = built(study)
    found = world.arrays.detectors
    assert world.detector_names == ("a", "b")
    assert found.cell_first.tolist() == [0, 6, 11] and found.cells.tolist() == [[3, 2], [5, 1]]
    assert found.two_sided.tolist() == [True, False] and found.catches.tolist() == [False, True]
    assert found.photometric.tolist() == [False, True]
    assert [DETECTORS[m].name for m in found.model] == ["plane"] * 2
    half = np.sqrt(0.5)
    expected = [[0, 0, 9], [0, 0, 1], [half, half, 0], [-half, half, 0]]
    assert found.place[0] == pytest.approx(np.array(expected))
    assert found.size[0].tolist() == [2, 3]


def test_arrays_have_the_types_of_their_contract(study):
    study.part("ball", sphere(1, 1.0), medium="clear")
    study.detector("plane", [0, 0, 40], [0, 0, 1], [5, 7])
    arrays = built(study).arrays
    flags = {"closed", "immersed", "catches", "two_sided", "photometric"}
    for group in arrays:
        if not hasattr(group, "_fields"):
            continue
        for name, array in zip(group._fields, group, strict=True):
            if name in ("seed", "events_max", "groups"):
                assert isinstance(array, int)
                continue
            real = name in REAL
            expected = np.float64 if real else np.bool_ if name in flags else np.int32
            assert array.dtype == (np.uint64 if name == "key" else expected), name
            assert array.flags.c_contiguous, name


def test_a_study_of_nothing_but_a_lamp_builds(study):
    study.detector("plane", [0, 0, 40], [0, 0, 1], [5, 7])
    world = built(study)
    assert len(world.arrays.mesh.corner) == 0 and world.arrays.tree.order.tolist() == [0]
    study.lists["detector"] = []
    assert built(study).arrays.mesh.vertex.shape == (0, 3)


def test_one_mesh_file_may_serve_several_parts(study):
    add_file(study, "a", binary_stl(CUBE), "cube.stl")
    study.lists["part"].append({**study.lists["part"][0], "name": "b", "medium": "clear",
                                "finish": "uncoated", "at": [9, 0, 0]})  # fmt: skip
    world = built(study)
    assert world.part_names == ("a", "b")
    assert world.parts[0].mesh_digest == world.parts[1].mesh_digest


def test_a_detector_that_passes_through_a_part_is_doubted(study):
    study.part("tray", CUBE, medium="opaque", finish="white")
    study.detector("through", [0.5, 0.5, 0.5], [0, 0, 1], [9, 9])
    study.detector("on", [0.5, 0.5, 1], [0, 0, 1], [9, 9])
    study.detector("beside", [5, 0.5, 0.5], [0, 0, 1], [8, 8])
    study.detector("within", [0.5, 0.5, 0.5], [0, 0, 1], [0.5, 0.5])
    doubt, within = told(built(study), "doubtful")
    assert ": detector.through.plane: passes through tray near (" in doubt
    assert ": detector.within.plane: lies inside tray" in within


def test_a_detector_that_fills_a_box_or_meets_a_large_face(study):
    room = joined(box((-9, -9, -9), (9, 9, 9)), box((-1, -1, -1), (1, 1, 1)).inward())
    study.part("room", room, medium="opaque", finish="white")
    study.detector("fits", [0, 0, 0], [0, 0, 1], [2, 2])
    assert told(built(study), "doubtful") == []
    study.detector("pokes", [1, 0.1, 0.2], [0, 0, 1], [0.2, 0.2])
    (doubt,) = told(built(study), "doubtful")
    assert ": detector.pokes.plane: passes through room near (" in doubt


def test_a_stack_of_plates_is_doubted_and_a_row_of_lenses_is_not(study):
    plate = box((-5, -5, 0), (5, 5, 1))
    study.part("lens", plate, medium="clear", repeat={"count": [4, 4, 1], "step": [20, 20, 0]})
    assert told(built(study), "doubtful") == []
    study.part("stack", plate, medium="clear", at=[500, 0, 0],
               turn={"axis": [1, 0, 0], "degrees": 30},
               repeat={"count": [1, 1, 3], "step": [0, 0, 20]})  # fmt: skip
    (doubt,) = told(built(study), "doubtful")
    row = "3 transparent bodies stand in a row, from stack (1) to stack (3): light is taken as"
    assert ": part.stack.medium: " in doubt and row in doubt


def test_a_copy_too_far_away_for_its_faces_is_doubted(study):
    study.part("pin", cylinder(8, 1e-3, 0, 1), medium="opaque", finish="white", at=[1e14, 0, 0])
    assert any("stands so far from the origin" in text for text in told(built(study), "doubtful"))
