"""The contract of all starts of sources: on the shape, uniform over it. Means by quadrature."""

import numpy as np
import pytest

from lumentrace.models.registry import STARTS
from tests.unit.world_study import built, new_study
from tests.worlds import box, sphere

TILTED = np.array([0.6, 0.0, 0.8])
ACROSS = np.array([0.0, 1.0, 0.0])
CENTER = np.array([3.0, -4.0, 5.0])
N = 60
SHAPES = {
    "point": {"point": CENTER},
    "disc": {"disc": {"center": CENTER, "normal": TILTED, "radius": 2.0}},
    "rectangle": {
        "rectangle": {"center": CENTER, "normal": TILTED, "across": ACROSS, "size": [4, 1]}
    },
    "faces": {"faces": {"part": "ball"}},
    "top": {"faces": {"part": "block", "tag": "ceiling"}},
}


@pytest.fixture(scope="module")
def world(tmp_path_factory):
    study = new_study(tmp_path_factory.mktemp("starts"))
    study.part("ball", sphere(1, 2.0), medium="opaque", finish="white", at=[30, 0, 0])
    block = box((0, 0, 0), (2, 3, 1), ("side", "side", "side", "side", "side", "ceiling"))
    repeat = {"count": [2, 1, 1], "step": [10, 0, 0]}
    study.part("block", block, medium="opaque", finish="white", repeat=repeat)
    for name, keys in SHAPES.items():
        pattern = "isotropic" if name == "point" else "lambertian"
        study.source(f"from_{name}", pattern=pattern, **keys)
    return built(study)


def started(world, name):
    """(origins, normals, faces) over a grid of uniforms; u[3] must not matter."""
    sources, mesh = world.arrays.sources, world.arrays.mesh
    s = world.source_names.index(f"from_{name}")
    model = STARTS[sources.start[s]]
    steps = ((np.arange(N) + 0.5) / N).tolist()
    first = steps
    if model.name == "faces":
        total = 5 * int(np.diff(sources.face_first)[s])
        first = ((np.arange(total) + 0.5) / total).tolist()
        steps = ((np.arange(12) + 0.5) / 12).tolist()
    last = steps if model.name == "faces" else [0.5]
    grid = [(a, b, c, 0.3) for a in first for b in steps for c in last]
    found = [model.start(mesh, sources, s, u) for u in grid]
    assert model.start(mesh, sources, s, (*grid[7][:3], 0.9)) == found[7]
    return tuple(np.array(column) for column in zip(*found, strict=True))


def test_each_start_is_asked(world):
    assert set(world.arrays.sources.start.tolist()) == set(range(len(STARTS)))


@pytest.mark.parametrize("name", SHAPES)
def test_normals_are_unit(world, name):
    _, normal, face = started(world, name)
    assert np.abs(np.linalg.norm(normal, axis=1) - 1).max() < 1e-12
    assert (face >= 0).all() or (face == -1).all()


def test_point(world):
    origin, _, face = started(world, "point")
    assert (origin == CENTER).all() and (face == -1).all()


def test_disc(world):
    """In the plane, within the radius; mean square distance R^2 / 2, by step 1e-4; centred."""
    origin, normal, face = started(world, "disc")
    offset = origin - CENTER
    assert (normal == TILTED).all() and (face == -1).all()
    assert np.abs(offset @ TILTED).max() < 1e-14
    radius = np.linalg.norm(offset, axis=1)
    assert radius.max() <= 2
    assert (radius**2).mean() == pytest.approx(2.0, rel=1e-4)
    assert np.median(radius) == pytest.approx(np.sqrt(2.0), rel=0.01)
    assert offset.mean(axis=0) == pytest.approx((0, 0, 0), abs=1e-12)


def test_rectangle(world):
    """Even along both sides: a grid of uniforms is a grid of points."""
    origin, normal, face = started(world, "rectangle")
    offset = origin - CENTER
    assert (normal == TILTED).all() and (face == -1).all()
    up = np.cross(TILTED, ACROSS)
    assert np.abs(offset @ TILTED).max() < 1e-14
    for axis, size in ((ACROSS, 4.0), (up, 1.0)):
        along = np.unique((offset @ axis).round(12))
        assert along == pytest.approx(((np.arange(N) + 0.5) / N - 0.5) * size)


def test_faces_of_a_part(world):
    """On the face that is named; every face by its area; each face filled to its centroid."""
    origin, normal, face = started(world, "faces")
    mesh = world.arrays.mesh
    corners = mesh.vertex[mesh.corner[face]]
    assert (normal == mesh.normal[face]).all()
    assert np.abs(np.einsum("ij,ij->i", origin - corners[:, 0], normal)).max() < 1e-13
    inside = np.einsum(
        "ikj,ij->ik", np.cross(np.roll(corners, -1, 1) - corners, origin[:, None] - corners), normal
    )
    assert inside.min() >= 0
    ball = np.flatnonzero(mesh.body == 0)
    cross = np.cross(
        *(mesh.vertex[mesh.corner[ball, k]] - mesh.vertex[mesh.corner[ball, 0]] for k in (1, 2))
    )
    area = np.linalg.norm(cross, axis=1)
    shares = np.bincount(face, minlength=len(ball)) / len(face)
    assert shares == pytest.approx(area / area.sum(), abs=1.01 / (5 * len(ball)))
    for f in (0, 17, 79):
        own = face == f
        assert origin[own].mean(axis=0) == pytest.approx(corners[own][0].mean(axis=0), abs=8e-3)


def test_faces_of_all_copies_share_the_rays(world):
    """One tag of two copies: half each, on the ceilings only, evenly over 2 x 3."""
    origin, normal, face = started(world, "top")
    assert np.abs(origin[:, 2] - 1).max() < 1e-15
    assert (normal == (0, 0, 1)).all()
    second = origin[:, 0] >= 10
    assert second.mean() == 0.5
    assert len(np.unique(face)) == 4
    for own, low in ((~second, 0), (second, 10)):
        spread = origin[own] - (low + 1, 1.5, 1)
        assert spread.mean(axis=0) == pytest.approx((0, 0, 0), abs=8e-3)
        assert (spread**2).mean(axis=0) == pytest.approx((4 / 12, 9 / 12, 0), rel=0.02)
