"""What a ray hits: the hierarchy against all triangles, another ray caster, and by hand."""

from math import inf

import numpy as np
import pytest

from lumentrace.engine.query import NOWHERE, Leaving, closest_hit, hit_set, new_hits
from lumentrace.jit import kernel
from lumentrace.kernels.triangle import intersect, shear
from tests.hand import closest_hits, unit
from tests.unit.engine_study import world_of
from tests.unit.world_study import built, new_study
from tests.worlds import box, cylinder, hollow, rectangle, sphere

RAYS = 100_000
WHITE = {"medium": "opaque", "finish": "white"}
CLEAR = {"medium": "clear"}
DOWN = (0.0, 0.0, -1.0)


@pytest.fixture(scope="module")
def crowd(tmp_path_factory):
    """Spheres, boxes, needles of 3400 faces in a hollow block; nothing touches."""
    study = new_study(tmp_path_factory.mktemp("crowd"))
    rng = np.random.default_rng(3)
    study.part("hall", hollow(box((-10, -10, -10), (10, 10, 10))), **WHITE)
    study.part("ball", sphere(3, 3.0), **CLEAR)
    study.part("core", sphere(3, 1.5), **CLEAR)
    study.part("needle", cylinder(60, 0.01, -5.0, 5.0), at=[5, 5, 0], **WHITE)
    for k in range(12):
        turn = {"axis": rng.normal(size=3), "degrees": 77}
        at = 7 * unit(rng.normal(size=(1, 3)))[0]
        study.part(f"chip{k}", box((0, 0, 0), (1, 2, 0.1)), turn=turn, at=at, **WHITE)
    return built(study)


def rays(rng, n=RAYS):
    return rng.uniform(-9, 9, (n, 3)), unit(rng.normal(size=(n, 3)))


@kernel
def _all_faces(vertex, corner, origin, direction, prim, distance):
    for i in range(len(origin)):
        start = (origin[i, 0], origin[i, 1], origin[i, 2])
        sheared = shear(direction[i, 0], direction[i, 1], direction[i, 2])
        for f in range(len(corner)):
            t = intersect(start, sheared, vertex, corner[f, 0], corner[f, 1], corner[f, 2])[0]
            if 0.0 < t < distance[i]:
                prim[i], distance[i] = f, t


def test_closest_hit_is_that_of_all_triangles(crowd):
    """10^5 rays, to the last bit of the distance."""
    origin, direction = rays(np.random.default_rng(1))
    prim, distance = closest_hits(crowd, origin, direction)
    expected, nearest = np.full(RAYS, -1), np.full(RAYS, inf)
    mesh = crowd.arrays.mesh
    _all_faces(mesh.vertex, mesh.corner, origin, direction, expected, nearest)
    assert (distance == nearest).all()
    assert (prim == expected).all()
    assert len(np.unique(prim)) > 1500 and (distance < inf).all()


def test_closest_hit_is_that_of_embree(crowd):
    """10^5 rays: the same face, but where two lie within 1e-6 of the scene's size, or at an edge.

    Embree works in float32; at the edge of a face it may name the neighbour or fall through.
    """
    from embreex import rtcore_scene
    from embreex.mesh_construction import TriangleMesh

    mesh = crowd.arrays.mesh
    scene = rtcore_scene.EmbreeScene(robust=True)
    TriangleMesh(scene, mesh.vertex.astype(np.float32), mesh.corner)
    origin, direction = rays(np.random.default_rng(2))
    found = scene.run(
        origin.astype(np.float32), direction.astype(np.float32), query="INTERSECT", output=True
    )
    prim, distance = closest_hits(crowd, origin, direction)
    differ = np.flatnonzero(found["primID"] != prim)
    same_place = np.abs(found["tfar"][differ] - distance[differ]) < 20 * 1e-6
    assert len(differ) < 1e-3 * RAYS
    same = found["primID"] == prim
    assert np.abs(found["tfar"] - distance)[same].max() < 1e-3  # grazing hits, in float32
    assert np.median(np.abs(found["tfar"] - distance)) < 20 * 1e-6
    # what remains are rays that pass an edge by less than float32 resolves
    edge = edge_distance(
        mesh, prim[differ], origin[differ] + distance[differ, None] * direction[differ]
    )
    assert (same_place | (edge < 20 * 1e-6)).all()


def edge_distance(mesh, prim, point):
    """Distance of points from the nearest edge of their faces."""
    corner = mesh.vertex[mesh.corner[prim]]
    nearest = np.full(len(prim), inf)
    for k in range(3):
        a, along = corner[:, k], corner[:, (k + 1) % 3] - corner[:, k]
        share = np.einsum("ij,ij->i", point - a, along) / np.einsum("ij,ij->i", along, along)
        foot = a + np.clip(share, 0, 1)[:, None] * along
        nearest = np.minimum(nearest, np.linalg.norm(point - foot, axis=1))
    return nearest


def hits_of(world, origin, direction, leaving=NOWHERE, skipped=()):
    """[(owner, front, t, primitive)] of the next event; owner is a part's or detector's name."""
    hits, arrays = new_hits(), world.arrays
    skip = np.array([*skipped, -1], np.int32)
    count = hit_set(
        arrays.mesh, arrays.tree, arrays.detectors, origin, direction, leaving,
        skip, len(skipped), hits,
    )  # fmt: skip
    if count < 0:
        return None
    names = [*world.body_names, *reversed(world.detector_names)]
    return [
        (names[hit["owner"]], bool(hit["front"]), float(hit["t"]), int(hit["prim"]))
        for hit in hits.hit[:count]
    ]


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


def stacked(study, gap=0.0):
    """Two clear blocks one on the other, z from 1 to 0 and from 0 - gap to -1."""
    study.part("upper", box((-1, -1, 0), (1, 1, 1)), **CLEAR)
    study.part("lower", box((-2, -2, -1), (2, 2, -gap)), **CLEAR)


def test_faces_in_contact_are_one_event(study):
    """From either side; the nearest face of each body, entered by one and left by the other."""
    stacked(study)
    world = built(study)
    found = hits_of(world, (0.3, 0.2, 0.5), DOWN)
    assert sorted(hit[:3] for hit in found) == [("lower", True, 0.5), ("upper", False, 0.5)]
    found = hits_of(world, (0.3, 0.2, -0.5), (0.0, 0.0, 1.0))
    assert sorted(hit[:3] for hit in found) == [("lower", False, 0.5), ("upper", True, 0.5)]
    assert [hit[:2] for hit in hits_of(world, (1.5, 0.2, 0.5), DOWN)] == [("lower", True)]


@pytest.mark.parametrize(("gap", "together"), [(1e-6, True), (0.01, False)])
def test_a_contact_reaches_over_its_gap(study, gap, together):
    """Within `touch` the two faces are one event though they are apart; oblique too."""
    stacked(study, gap)
    world = world_of(study, touch=1e-5)
    for direction in (DOWN, (0.6, 0.0, -0.8), (0.99, 0.0, -((1 - 0.99**2) ** 0.5))):
        found = hits_of(world, (0.3, 0.1, 0.05), direction)
        assert len(found) == (2 if together else 1)
        assert found[0][:2] == ("upper", False)


def test_detectors_on_a_face_join_its_event(study):
    study.part("block", box((-1, -1, -1), (1, 1, 0)), **WHITE)
    study.detector("on", (0, 0, 0), (0, 0, 1), (1, 1))
    study.detector("also", (0, 0, 0), (0, 0, -1), (1, 1))
    study.detector("above", (0, 0, 0.1), (0, 0, 1), (1, 1))
    world = built(study)
    assert [h[:3] for h in hits_of(world, (0.2, 0.1, 0.3), DOWN)] == [
        ("above", True, pytest.approx(0.2))
    ]
    found = hits_of(world, (0.2, 0.1, 0.05), DOWN)
    assert sorted(hit[:2] for hit in found) == [("also", False), ("block", True), ("on", True)]


def test_a_left_face_and_what_lies_on_it_are_not_met_again(study):
    stacked(study)
    world = built(study)
    arrival = hits_of(world, (0.3, 0.2, 0.5), DOWN)
    face = next(prim for name, _, _, prim in arrival if name == "lower")
    other = [prim for _, _, _, prim in arrival if prim != face]
    onward = hits_of(world, (0.3, 0.2, 0.0), DOWN, Leaving(face, -1.0, False), other)
    assert [hit[:3] for hit in onward] == [("lower", False, 1.0)]
    back = hits_of(world, (0.3, 0.2, 0.0), (0.0, 0.0, 1.0), Leaving(face, 1.0, False), other)
    assert [hit[:3] for hit in back] == [("upper", False, 1.0)]


def test_the_next_face_at_a_concave_edge_is_met_at_once(study):
    """A ray that leaves the floor at the foot of a wall, or by rounding behind it, meets it."""
    study.part("hall", hollow(box((-1, -1, -1), (1, 1, 1))), **WHITE)
    world = built(study)
    mesh = world.arrays.mesh
    on_floor = (mesh.vertex[mesh.corner][:, :, 2] == -1).all(axis=1)
    floor = int(np.flatnonzero(on_floor & (mesh.normal[:, 2] == 1))[0])
    direction = (0.6, 0.0, 0.8)
    for x in (1 - 1e-9, 1.0, np.nextafter(1, 2)):
        found = hits_of(world, (x, 0.3, -1 + 1e-15), direction, Leaving(floor, 1.0, False))
        assert [hit[0] for hit in found] == ["hall"]
        assert found[0][2] == pytest.approx(max(0, (1 - x) / 0.6), abs=1e-14)


def test_many_in_one_place(study):
    """More bodies than an event holds are told, never left out."""
    for k in range(30):
        study.part(f"sheet{k}", rectangle((2, 2)), medium="sheet", finish="white")
    assert hits_of(built(study), (0.3, 0.2, 1.0), DOWN) is None


def test_sheets_in_one_place_are_one_event(study):
    for k in range(20):
        study.part(f"sheet{k}", rectangle((2, 2)), medium="sheet", finish="white")
    found = hits_of(built(study), (0.3, 0.2, 1.0), DOWN)
    assert len(found) == 20 and {hit[2] for hit in found} == {1.0}


def test_nothing_ahead(crowd, study):
    study.part("block", box((-1, -1, -1), (1, 1, 0)), **WHITE)
    world = built(study)
    assert hits_of(world, (0.0, 0.0, 1.0), (0.0, 0.0, 1.0)) == []
    arrays = world.arrays
    away = closest_hit(
        arrays.mesh, arrays.tree, arrays.detectors, (0.0, 0.0, 1.0), (0.0, 0.0, 1.0), new_hits()
    )
    assert away == (-1, inf)


def test_slivers_without_area_are_never_hit(study):
    block = box((-1, -1, -1), (1, 1, 0))
    middle = (block.vertex[4] + block.vertex[7]) / 2  # on the diagonal of the top
    study.part(
        "block",
        block._replace(
            vertex=np.vstack([block.vertex, [middle]]),
            corner=np.vstack([block.corner, [[4, 8, 7], [7, 8, 4]]]),
        ),
        **WHITE,
    )
    world = built(study)
    rng = np.random.default_rng(4)
    origin = np.column_stack(
        [np.repeat(rng.uniform(-0.9, 0.9, 2000), 2).reshape(-1, 2), np.ones(2000)]
    )
    prim, distance = closest_hits(world, origin, np.tile([0.0, 0, -1], (2000, 1)))
    assert (distance == 1).all() and prim.max() < 12
