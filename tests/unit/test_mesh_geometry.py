"""Points in meshes, crossings, overlaps, orientation: against shapes with closed answers."""

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.spatial import ConvexHull
from scipy.spatial.transform import Rotation

from lumentrace.world.boxes import box_pairs
from lumentrace.world.crossing import is_star, self_crossings, surfaces_cross
from lumentrace.world.geometry import facets, signed_volume, triangle_distance
from lumentrace.world.inside import is_inside, is_near, winding
from lumentrace.world.overlap import overlap
from lumentrace.world.topology import inside_out, to_reverse
from tests.unit.test_mesh_checks import moebius
from tests.worlds import Mesh, box, joined, sphere

CUBE = box((0, 0, 0), (1, 1, 1))
DISTANCE = 1e-6


def some_rotation(seed):
    return Rotation.random(random_state=np.random.default_rng(seed)).as_matrix()


def test_winding_of_a_sphere_is_that_of_the_radius():
    ball = sphere(3, 1.0)
    inner = np.min(np.abs((ball.vertex[ball.corner[:, 0]] * ball.cross).sum(1)) / (2 * ball.areas))
    points = np.random.default_rng(1).uniform(-1.3, 1.3, (20_000, 3))
    radius = np.linalg.norm(points, axis=1)
    turns = winding(points, ball.vertex, ball.corner)
    assert (turns[radius < inner] == 1).all() and (turns[radius > 1] == 0).all()
    assert (winding(points, ball.vertex, ball.inward().corner) == -turns).all()


def test_winding_straight_below_edges_and_vertices_is_exact():
    """The lines upward from these points pass exactly through vertices and along edges."""
    grid = np.array([[x, y, z] for x in (0, 0.5, 1) for y in (0, 0.5, 1) for z in (-1, 0.25, 0.5)])
    turns = winding(grid, CUBE.vertex, CUBE.corner)
    strictly = ((grid > 0) & (grid < 1)).all(axis=1)
    outside = ((grid < 0) | (grid > 1)).any(axis=1)
    assert (turns[strictly] == 1).all() and (turns[outside] == 0).all()


def test_distance_to_a_triangle_agrees_with_a_fine_sampling():
    rng = np.random.default_rng(3)
    triangle = rng.normal(size=(200, 3, 3))
    point = rng.normal(size=(200, 3)) * 2
    share = rng.dirichlet((0.5, 0.5, 0.5), 20_000)
    sampled = np.min(
        [np.linalg.norm(np.einsum("k,nkj->nj", s, triangle) - point, axis=1) for s in share], axis=0
    )
    found = triangle_distance(point, triangle)
    assert (found <= sampled + 1e-12).all()
    assert found == pytest.approx(sampled, abs=0.05)


OTHERS = {
    "apart": (box((5, 5, 5), (6, 6, 6)), False, False),
    "shifted along the diagonal": (box((0.5, 0.5, 0.5), (1.5, 1.5, 1.5)), True, False),
    "slid along itself": (box((0.5, 0, 0), (1.5, 1, 1)), True, False),
    "a bar through it": (box((0.2, 0.2, -1), (0.8, 0.8, 2)), True, False),
    "face to face": (box((1, 0, 0), (2, 1, 1)), False, False),
    "face to larger face": (box((1, -1, -1), (2, 2, 2)), False, False),
    "edge to edge": (box((1, 1, 0), (2, 2, 1)), False, False),
    "corner to corner": (box((1, 1, 1), (2, 2, 2)), False, False),
    "deeper by less than the distance": (box((1 - 1e-7, -1, -1), (2, 0.5, 0.5)), False, False),
    "itself": (CUBE, False, False),
    "wholly inside": (box((0.2, 0.2, 0.2), (0.8, 0.8, 0.8)), False, True),
    "inside, on a face": (box((0.2, 0.2, 0), (0.8, 0.8, 0.5)), False, True),
    "inside, on three faces": (box((0, 0, 0), (0.5, 0.5, 0.5)), False, True),
}


@pytest.mark.parametrize("name", OTHERS)
@pytest.mark.parametrize("seed", [None, 1, 2])
def test_crossing_and_nesting_of_boxes(name, seed):
    other, crosses, inside = OTHERS[name]
    turn = np.eye(3) if seed is None else some_rotation(seed)
    a, b = CUBE.vertex @ turn.T, other.vertex @ turn.T
    for one, two in (((a, CUBE.corner), (b, other.corner)), ((b, other.corner), (a, CUBE.corner))):
        assert (surfaces_cross(*one, *two, DISTANCE) is not None) == crosses
    if not crosses:
        assert is_inside(b, other.corner, a, CUBE.corner, DISTANCE) == inside
        assert not is_inside(a, CUBE.corner, b, other.corner, DISTANCE)


def test_prisms_of_one_section_cross_when_slid_along_themselves():
    """No edge of either lies inside the other: only the middle of an end face does."""
    vertex = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 0, 1], [0, 1, 1]], float)
    sides = [[i, (i + 1) % 3, (i + 1) % 3 + 3, i + 3] for i in range(3)]
    corner = np.array(
        [[0, 2, 1], [3, 4, 5], *(t for a, b, c, d in sides for t in ([a, b, c], [a, c, d]))]
    )
    assert signed_volume(vertex, corner) == pytest.approx(0.5)
    point = surfaces_cross(vertex, corner, vertex + [0, 0, 0.5], corner, DISTANCE)
    assert point is not None and 0 < point[2] < 1.5


@settings(deadline=None, max_examples=30)
@given(st.floats(0.01, 1.99), st.integers(0, 1000))
def test_spheres_cross_when_their_centers_are_nearer_than_two_radii(distance, seed):
    ball = sphere(2, 1.0)
    depth = 1.0 - np.linalg.norm(ball.vertex[ball.corner].mean(axis=1), axis=1).min()
    assume(2 - distance > 2 * depth)
    shift = some_rotation(seed)[0] * distance
    assert (
        surfaces_cross(ball.vertex, ball.corner, ball.vertex + shift, ball.corner, 1e-9) is not None
    )
    away = some_rotation(seed)[0] * (2.0 + distance)
    assert surfaces_cross(ball.vertex, ball.corner, ball.vertex + away, ball.corner, 1e-9) is None


def test_self_crossing_is_found_where_two_shells_pierce_each_other():
    both = joined(CUBE, box((0.5, 0.25, 0.25), (1.5, 0.75, 0.75)))
    points = self_crossings(both.vertex, both.corner, DISTANCE)
    assert len(points) and (points[:, 0] == 1.0).all()
    assert not len(self_crossings(CUBE.vertex, CUBE.corner, DISTANCE))


def test_a_star_is_seen_from_its_middle():
    assert is_star(CUBE.vertex, CUBE.corner)
    assert not is_star(CUBE.vertex, CUBE.inward().corner)
    hook = joined(CUBE, box((3, 0, 0), (4, 1, 1)))  # its middle lies outside
    assert not is_star(hook.vertex, hook.corner)


def test_near_means_within_the_distance():
    points = np.array([[0.5, 0.5, 1.1], [0.5, 0.5, 1.3], [1.1, 1.1, 1.1], [0.5, 0.5, 0.85]])
    assert is_near(points, CUBE.vertex, CUBE.corner, 0.17).tolist() == [True, False, False, True]
    assert is_near(points[2:3], CUBE.vertex, CUBE.corner, np.sqrt(0.03) + 1e-12).all()


def convex_overlap_area(a, b):
    """Area of the overlap of two triangles in the plane by their corners and crossings."""
    points = []
    for one, two in ((a, b), (b, a)):
        for p in one:
            sides = [np.cross(two[(k + 1) % 3] - two[k], p - two[k]) for k in range(3)]
            if min(sides) >= 0 or max(sides) <= 0:
                points.append(p)
    for i in range(3):
        for j in range(3):
            p, r = a[i], a[(i + 1) % 3] - a[i]
            q, s = b[j], b[(j + 1) % 3] - b[j]
            t = np.cross(q - p, s) / np.cross(r, s)
            u = np.cross(q - p, r) / np.cross(r, s)
            if 0 <= t <= 1 and 0 <= u <= 1:
                points.append(p + t * r)
    return ConvexHull(np.array(points)).volume if len(points) > 2 else 0.0


@pytest.mark.filterwarnings("ignore:Arrays of 2-dimensional vectors:DeprecationWarning")
def test_overlap_areas_agree_with_convex_hulls():
    rng = np.random.default_rng(5)
    n = 300
    flat = np.concatenate([rng.uniform(0, 1, (2, n, 3, 2)), np.zeros((2, n, 3, 1))], axis=3)
    turn = some_rotation(7)
    placed = flat @ turn.T + [3.0, -2.0, 1.0]
    normals = [
        facets(t.reshape(-1, 3), np.arange(3 * n).reshape(-1, 3), 5.0).normal for t in placed
    ]
    common = overlap(placed[0], normals[0], placed[1], normals[1])
    expected = [convex_overlap_area(flat[0, i, :, :2], flat[1, i, :, :2]) for i in range(n)]
    assert common.area == pytest.approx(expected, abs=1e-12)
    assert (common.area > 0).sum() > n / 3
    assert common.gap.max() < 1e-14


def test_overlap_gap_is_the_largest_distance_over_the_overlap():
    a = np.array([[[0, 0, 0], [4, 0, 0], [0, 4, 0]]], float)
    b = np.array([[[0, 0, 0.1], [2, 0, 0.3], [0, 2, 0.1]]], float)  # z = 0.1 + 0.1 x
    normal = facets(b[0], np.array([[0, 1, 2]]), 4.0).normal
    common = overlap(a, np.array([[0, 0, 1.0]]), b, normal)
    assert common.area == pytest.approx([2.0])
    assert common.gap == pytest.approx([0.3 * normal[0, 2]])


@given(st.integers(0, 10_000))
def test_box_pairs_are_those_of_all_comparisons(seed):
    rng = np.random.default_rng(seed)
    n, m = rng.integers(0, 12, 2)
    a, b = rng.integers(0, 6, (n, 2, 3)), rng.integers(0, 6, (m, 2, 3))
    la, ua, lb, ub = a.min(1), a.max(1), b.min(1), b.max(1)
    expected = np.argwhere(((la[:, None] <= ub) & (ua[:, None] >= lb)).all(axis=2).reshape(n, m))
    assert np.stack(box_pairs(la, ua, lb, ub), axis=1).tolist() == expected.tolist()


def test_one_sided_bands_are_known():
    band = moebius()
    reverse, two_sided = to_reverse(band.corner)
    assert not two_sided and not reverse.any()


def test_depth_decides_which_shells_point_inward():
    nested = joined(*(box((-r,) * 3, (r,) * 3) for r in (1, 2, 3)))
    wrong = inside_out(nested.vertex, nested.corner, 1e-9)
    assert wrong.reshape(3, 12).all(axis=1).tolist() == [False, True, False]
    right = np.where(wrong[:, None], nested.corner[:, ::-1], nested.corner)
    assert signed_volume(nested.vertex, right) == pytest.approx(6**3 - 4**3 + 2**3)


def test_facets_of_a_right_triangle():
    mesh = Mesh(np.array([[0, 0, 0], [3, 0, 0], [0, 4, 0]], float), np.array([[0, 1, 2]]))
    shape = facets(mesh.vertex, mesh.corner, 4.0)
    assert shape.area == pytest.approx([6.0]) and shape.edge == pytest.approx([5.0])
    assert shape.altitude == pytest.approx([12 / 5]) and shape.normal.tolist() == [[0, 0, 1]]
