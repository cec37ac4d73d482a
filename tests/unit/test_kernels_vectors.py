"""Frames, reflection and refraction for directions of every kind. Tolerance 1e-12 or as stated."""

from math import cos, pi, sin, sqrt

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from lumentrace.kernels import vectors
from lumentrace.kernels.fresnel import is_total

MANY = settings(max_examples=300, deadline=None, derandomize=True)
Z = (0.0, 0.0, 1.0)


def unit(x, y, z):
    vector = np.array([x, y, z]) / np.linalg.norm([x, y, z])
    return tuple(vector.tolist())


part = st.floats(-1, 1, allow_subnormal=False)
units = (
    st.tuples(part, part, part).filter(lambda v: np.linalg.norm(v) > 1e-3).map(lambda v: unit(*v))
)
indices = st.floats(1.0, 4.0)


@MANY
@given(units)
@example((0.0, 0.0, 1.0))
@example((0.0, 0.0, -1.0))
@example((1.0, 0.0, -0.0))
@example((0.0, -1.0, 0.0))
@example(unit(1e-9, 0.0, -1.0))
@example(unit(0.0, 1e-16, -1.0))
def test_frame_is_orthonormal_and_right_handed(normal):
    matrix = np.array([*vectors.frame(*normal), normal])
    assert np.abs(matrix @ matrix.T - np.eye(3)).max() < 1e-14
    assert np.linalg.det(matrix) == pytest.approx(1.0, abs=1e-14)


@MANY
@given(units, units)
def test_to_the_local_frame_and_back(normal, direction):
    tangent, bitangent = vectors.frame(*normal)
    local = vectors.to_local(*direction, tangent, bitangent, *normal)
    assert local[2] == pytest.approx(np.dot(direction, normal), abs=1e-14)
    assert vectors.to_scene(local, tangent, bitangent, *normal) == pytest.approx(
        direction, abs=1e-14
    )
    assert vectors.to_scene(Z, tangent, bitangent, *normal) == pytest.approx(normal, abs=1e-15)


@MANY
@given(st.tuples(*[st.floats(-1e6, 1e6)] * 3).filter(lambda v: np.linalg.norm(v) > 1e-6))
def test_normalised(vector):
    assert vectors.normalised(*vector) == pytest.approx(unit(*vector), abs=1e-15)


@MANY
@given(units, units)
def test_reflection(direction, normal):
    """The component along the normal turns, the others stay; twice is nothing."""
    d, n = np.array(direction), np.array(normal)
    out = np.array(vectors.reflect(*direction, *normal))
    assert np.linalg.norm(out) == pytest.approx(1.0, abs=1e-14)
    assert out @ n == pytest.approx(-(d @ n), abs=1e-14)
    assert np.cross(out, n) == pytest.approx(np.cross(d, n), abs=1e-14)
    assert vectors.reflect(*out, *normal) == pytest.approx(direction, abs=1e-14)


@MANY
@given(units, units, indices, indices)
def test_refraction_obeys_snell(direction, normal, n1, n2):
    """n1 d x n = n2 t x n (so in one plane, n1 sin = n2 sin), forward, unit; or total reflection.

    Near the critical angle rounding of the sine weighs in the cosine: 1e-7 there. The way back is
    asked where neither side is grazing.
    """
    d, n = np.array(direction), np.array(normal)
    if d @ n > 0:
        n = -n
    sine = n1 / n2 * np.linalg.norm(np.cross(d, n))
    out = np.array(vectors.refract(*direction, *n.tolist(), n1, n2))
    if is_total(n1, n2, -float(d @ n)):
        assert sine >= 1 - 1e-15 * n1 / n2 * 4
        assert np.isnan(out).all() or sine <= 1 + 1e-14
        return
    assert np.linalg.norm(out) == pytest.approx(1.0, abs=1e-14)
    assert out @ n <= 0
    assert n2 * np.cross(out, n) == pytest.approx(n1 * np.cross(d, n), abs=1e-7)
    if sine < 0.999:
        assert n2 * np.cross(out, n) == pytest.approx(n1 * np.cross(d, n), abs=1e-13)
        if d @ n < -0.05:
            back = vectors.refract(*(-out).tolist(), *(-n).tolist(), n2, n1)
            assert back == pytest.approx((-d).tolist(), abs=1e-11)


@pytest.mark.parametrize("angle", [0.0, 10.0, 30.0, 41.0, 60.0, 89.0])
def test_refraction_by_angles(angle):
    """sin of refraction = sin of incidence / 1.5, from air into glass."""
    a = angle * pi / 180
    sine = sin(a) / 1.5
    assert vectors.refract(sin(a), 0.0, -cos(a), *Z, 1.0, 1.5) == pytest.approx(
        (sine, 0.0, -sqrt(1 - sine * sine)), abs=1e-14
    )


def test_equal_indices_do_not_bend():
    direction = unit(0.3, -0.5, -0.2)
    assert vectors.refract(*direction, *Z, 1.7, 1.7) == pytest.approx(direction, abs=1e-15)


def test_rows_of_arrays():
    array = np.zeros((3, 3))
    vectors.put(array, 1, (1.0, 2.0, 3.0))
    assert vectors.take(array, 1) == (1.0, 2.0, 3.0)
    assert array[[0, 2]].sum() == 0.0
    assert vectors.dot(1.0, 2.0, 3.0, 4.0, -5.0, 6.0) == 12.0
