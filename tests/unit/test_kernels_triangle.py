"""The intersection of a ray with a triangle: right, and watertight over closed meshes."""

from math import inf

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from lumentrace.jit import kernel
from lumentrace.kernels.triangle import drawn_back, intersect, shear
from tests.worlds import Mesh, box, loft, ring, sphere

MANY = settings(max_examples=300, deadline=None, derandomize=True)
RAYS = 100_000
FACE = np.array([0, 1, 2])
coordinate = st.floats(-10, 10, allow_subnormal=False)
point = st.tuples(coordinate, coordinate, coordinate)


@kernel
def count_crossings(vertex, corner, origin, direction, ahead, behind, touches):
    """Faces that each line hits before and behind its origin; whether one at its very edge."""
    for i in range(len(origin)):
        start = (origin[i, 0], origin[i, 1], origin[i, 2])
        sheared = shear(direction[i, 0], direction[i, 1], direction[i, 2])
        for f in range(len(corner)):
            a, b, c = corner[f]
            t, u, v = intersect(start, sheared, vertex, a, b, c)
            if t == np.inf:
                continue
            w = intersect(start, sheared, vertex, b, c, a)[2]
            if u == 0.0 or v == 0.0 or w == 0.0:
                touches[i] = True
            if t > 0.0:
                ahead[i] += 1
            else:
                behind[i] += 1


def crossings(mesh, origin, direction):
    ahead, behind = np.zeros(len(origin), np.int64), np.zeros(len(origin), np.int64)
    touches = np.zeros(len(origin), bool)
    count_crossings(mesh.vertex, mesh.corner, origin, direction, ahead, behind, touches)
    return ahead, behind, touches


def spiky(rng):
    """A star of 320 faces with spikes and dents: concave edges, and slivers."""
    ball = sphere(2, 1.0)
    return ball._replace(vertex=ball.vertex * rng.uniform(0.05, 1.0, (len(ball.vertex), 1)))


def closed_meshes(rng):
    """Closed meshes that hold the origin, with the sizes of a box in which they see it."""
    needle = loft([ring(24, 1e-4, -1.0), ring(24, 1e-4, -0.999), ring(24, 1e-4, 1.0)])
    wafer = loft([ring(60, 1.0, -1e-6), ring(60, 1.0, 1e-6)])
    return {
        "box": (box((-1, -2, -0.5), (1, 2, 0.5)), (0.9, 1.9, 0.4)),
        "star": (spiky(rng), (0.02, 0.02, 0.02)),
        "needle": (needle, (4e-5, 4e-5, 0.9)),
        "wafer": (wafer, (0.5, 0.5, 9e-7)),
    }


PLACES = {
    "as made": (1.0, False, 0.0),
    "turned": (1.0, True, 0.0),
    "1e-3": (1e-3, True, 0.0),
    "1e6": (1e6, True, 0.0),
    "far": (1.0, True, 1e4),
}


def aimed(mesh, rng, n):
    """Points on shared edges, and shared vertices, half and half."""
    i = mesh.corner[rng.integers(0, len(mesh.corner), n)]
    share = rng.random((n, 1))
    share[: n // 2] = 0.0
    return mesh.vertex[i[:, 0]] * (1 - share) + mesh.vertex[i[:, 1]] * share


@pytest.mark.parametrize("place", PLACES)
def test_watertight(place):
    """10^5 rays at shared edges and vertices: odd crossings from inside, even from outside.

    Where a ray hits an edge to the last bit all its faces count; it is hit at least once then.
    Exact: no ray may be wrong.
    """
    scale, turn, far = PLACES[place]
    rng = np.random.default_rng(8)
    meshes = closed_meshes(rng)
    n = RAYS // (2 * len(meshes))
    touching = 0
    for made, size in meshes.values():
        turned = Rotation.random(rng=rng).as_matrix() if turn else np.eye(3)
        extent = np.ptp(made.vertex, axis=0).max()
        shift = np.array([1.0, -0.7, 0.9]) * far * extent * scale
        # a body that is thin compared with the roundings of its place is no body any more
        thin = min(size) < 1e-3 and far > 0
        mesh = made._replace(vertex=made.vertex @ turned.T * scale + shift)
        inside = rng.uniform(-1, 1, (n, 3)) * size @ turned.T * scale + shift
        outward = rng.normal(size=(n, 3))
        outward *= 3 * extent * scale / np.linalg.norm(outward, axis=1, keepdims=True)
        for origin, parity in ((inside, 1), (shift + outward, 0)):
            direction = aimed(mesh, rng, n) - origin
            ahead, behind, touches = crossings(mesh, origin, direction)
            plain = ~touches
            if not thin:
                assert (ahead[plain] % 2 == parity).all()
            assert ((ahead + behind)[plain] % 2 == 0).all()
            if parity:
                assert (ahead + behind >= 1).all()
                assert thin or (ahead >= 1).all()
            touching += touches.sum()
    assert 0 < touching < RAYS / 2


@MANY
@given(point, point, point, point, point)
def test_hit_lies_on_ray_and_triangle(a, b, c, origin, target):
    """origin + t direction = w a + u b + v c with weights in [0, 1], for t of either sign."""
    vertex = np.array([a, b, c])
    direction = np.array(target) - origin
    length = np.linalg.norm(direction)
    area = np.linalg.norm(np.cross(vertex[1] - vertex[0], vertex[2] - vertex[0]))
    assume(length > 1e-3 and area > 1e-2)
    direction /= length
    assume(abs(direction @ np.cross(vertex[1] - vertex[0], vertex[2] - vertex[0])) > 1e-3 * area)
    t, u, v = intersect(origin, shear(*direction), vertex, *FACE)
    system = np.stack([direction, vertex[0] - vertex[1], vertex[0] - vertex[2]], axis=1)
    expected = np.linalg.solve(system, vertex[0] - origin)
    weights = np.array([1 - expected[1:].sum(), *expected[1:]])
    if t == inf:
        assert weights.min() < 1e-9
        return
    assert weights.min() > -1e-9
    assert (t, u, v) == pytest.approx(tuple(expected), rel=1e-7, abs=1e-7)
    back = intersect(origin, shear(*-direction), vertex, *FACE)
    assert back == pytest.approx((-t, u, v), rel=1e-7, abs=1e-7)
    other_side = intersect(origin, shear(*direction), vertex, 0, 2, 1)
    assert other_side == pytest.approx((t, v, u), rel=1e-7, abs=1e-7)


@MANY
@given(point.filter(lambda d: max(map(abs, d)) > 1e-6))
def test_shear_puts_the_direction_on_its_axis(direction):
    """x - sx z = y - sy z = 0 and sz z = 1 for the direction itself; axes keep or turn by sign."""
    kx, ky, kz, sx, sy, sz = shear(*direction)
    assert {kx, ky, kz} == {0, 1, 2}
    z = direction[kz]
    assert abs(z) == max(map(abs, direction))
    assert direction[kx] - sx * z == pytest.approx(0, abs=1e-14)
    assert direction[ky] - sy * z == pytest.approx(0, abs=1e-14)
    assert sz * z == pytest.approx(1)
    even = (kx, ky, kz) in ((0, 1, 2), (1, 2, 0), (2, 0, 1))
    assert even == (z > 0)


def test_no_hit():
    """Beside, along the plane, and where the triangle has no area."""
    vertex = np.array([[0.0, 0, 0], [1, 0, 0], [0, 1, 0], [0.5, 0, 0]])
    down = shear(0.0, 0.0, -1.0)
    assert intersect((0.6, 0.6, 1.0), down, vertex, 0, 1, 2)[0] == inf
    assert intersect((0.2, 0.2, 1.0), shear(1.0, 0.0, 0.0), vertex, 0, 1, 2)[0] == inf
    assert intersect((0.25, 0.0, 1.0), down, vertex, 0, 1, 3)[0] == inf
    assert intersect((0.25, 0.25, 1.0), down, vertex, 0, 1, 2) == (1.0, 0.25, 0.25)
    assert intersect((0.25, 0.25, -1.0), down, vertex, 0, 1, 2) == (-1.0, 0.25, 0.25)


def test_edges_and_corners_count_for_all_their_faces():
    fan = Mesh(
        np.array([[0.0, 0, 0], [1, 0, 0], [0, 1, 0], [-1, 0, 0], [0, -1, 0]]),
        np.array([[0, 1, 2], [0, 2, 3], [0, 3, 4], [0, 4, 1]]),
    )
    origin = np.array([[0.0, 0, 1], [0.5, 0, 1], [0.25, 0.25, 1], [0.5, 0.5, 1]])
    direction = np.tile([0.0, 0, -1], (4, 1))
    ahead, _, touches = crossings(fan, origin, direction)
    assert ahead.tolist() == [4, 2, 1, 1]
    assert touches.tolist() == [True, True, False, True]


@MANY
@given(st.floats(0, 1), st.floats(0, 1), st.floats(0, 0.25))
def test_drawn_back(x, y, margin):
    """Weights add up to 1, none is below margin / (1 + 2 margin), and those beyond stay."""
    u, v = (x, y) if x + y <= 1 else (1 - x, 1 - y)
    new_u, new_v = drawn_back(u, v, margin)
    old, new = np.array([1 - u - v, u, v]), np.array([1 - new_u - new_v, new_u, new_v])
    assert new.min() >= margin / (1 + 2 * margin) - 1e-15
    assert new.sum() == pytest.approx(1, abs=1e-15)
    if old.min() >= margin:
        assert new == pytest.approx(old, abs=1e-15)
    assert np.abs(new - old).max() <= 2 * margin + 1e-15
