"""Directions and places by quadrature over the uniforms: exact moments, nothing sampled.

Gauss's rule in the uniform that sets the cosine or the radius, equal steps in the one that sets the
azimuth (exact for these moments). Tolerance 1e-6, from the root at the end of the interval.
"""

from math import cos, pi, radians

import numpy as np
import pytest

from lumentrace.kernels import sampling

N_AZIMUTH = 12
NODE, WEIGHT = np.polynomial.legendre.leggauss(300)
U, WEIGHT = (NODE + 1) / 2, WEIGHT / 2
V = (np.arange(N_AZIMUTH) + 0.5) / N_AZIMUTH


def mean(function, of):
    """Mean of `of` over what function(u1, u2) makes of all uniforms."""
    values = np.array([[of(np.array(function(u, v))) for v in V] for u in U])
    return np.tensordot(WEIGHT, values.mean(axis=1), axes=1)


def moments(function):
    """Means of (x, y, z), of their products (3, 3), and of z^4; all directions have length 1."""
    for u in (0.0, 0.3, 1 - 2**-53):
        assert np.linalg.norm(function(u, 0.77)) == pytest.approx(1.0, abs=1e-14)
    return (
        mean(function, lambda d: d),
        mean(function, lambda d: np.outer(d, d)),
        mean(function, lambda d: d[2] ** 4),
    )


def about_z(z, zz):
    """What symmetry about z makes of the means of z and z^2."""
    return (0, 0, z), np.diag([(1 - zz) / 2, (1 - zz) / 2, zz])


def check(function, z, zz, zzzz):
    first, second, fourth = moments(function)
    expected = about_z(z, zz)
    assert first == pytest.approx(expected[0], abs=1e-6)
    assert second == pytest.approx(expected[1], abs=1e-6)
    assert fourth == pytest.approx(zzzz, abs=1e-6)


def test_sphere():
    """Means of z^k over the sphere: 0, 1/3, 1/5."""
    check(sampling.sphere, 0, 1 / 3, 1 / 5)


def test_cosine_hemisphere():
    """Density 2 z: the mean of z^k is 2 / (k + 2)."""
    check(sampling.cosine_hemisphere, 2 / 3, 1 / 2, 1 / 3)
    assert sampling.cosine_hemisphere(1 - 2.0**-53, 0.5)[2] > 0


@pytest.mark.parametrize("m", [0.0, 0.5, 1.0, 1.4, 3.0, 40.0])
def test_cosine_power(m):
    """Density (m + 1) z^m: the mean of z^k is (m + 1) / (m + k + 1)."""
    check(
        lambda u, v: sampling.cosine_power(m, u, v),
        (m + 1) / (m + 2),
        (m + 1) / (m + 3),
        (m + 1) / (m + 5),
    )
    assert sampling.cosine_power(m, 1 - 2.0**-53, 0.5)[2] > 0


@pytest.mark.parametrize("half_angle", [0.2667, 10.0, 60.0, 90.0])
def test_cone(half_angle):
    """Density z within the cone: z^2 is uniform from c^2 to 1.

    The mean of z^k is 2 / (k + 2) (1 - c^(k + 2)) / (1 - c^2).
    """
    c = cos(radians(half_angle))

    def of(k):
        return 2 / (k + 2) * (1 - c ** (k + 2)) / (1 - c * c)

    check(lambda u, v: sampling.cone(c, u, v), of(1), of(2), of(4))
    # in a narrow cone all that is told above lies near 1: the squared sine tells more
    sines = mean(lambda u, v: sampling.cone(c, u, v), lambda d: d[0] ** 2 + d[1] ** 2)
    assert sines / (1 - c * c) == pytest.approx(0.5, abs=1e-6)
    edge = sampling.cone(c, 1 - 2.0**-53, 0.2)[2]
    assert edge == pytest.approx(c, abs=2e-8) and edge >= c


def test_cone_of_no_width_is_a_parallel_beam():
    for u in U[::50]:
        assert sampling.cone(1.0, u, 0.3) == (0.0, 0.0, 1.0)


def test_disc():
    """Uniform over a disc of radius 3: mean r^2 = R^2 / 2, mean r^4 = R^4 / 3, centred."""

    def of(u, v):
        return sampling.disc(3.0, u, v)

    assert mean(of, lambda p: p) == pytest.approx((0, 0), abs=1e-6)
    assert mean(of, lambda p: np.outer(p, p)) == pytest.approx(np.diag([9 / 4, 9 / 4]), abs=1e-6)
    assert mean(of, lambda p: (p @ p) ** 2) == pytest.approx(81 / 3, rel=1e-6)
    assert np.hypot(*of(1 - 2.0**-53, 0.1)) <= 3.0


def test_triangle():
    """Uniform over a triangle: means 1/3, of squares 1/6, of products 1/12; inside, sum 1."""
    grid = (np.arange(400) + 0.5) / 400
    weights = np.array([sampling.triangle(u, v) for u in U for v in grid]).reshape(300, 400, 3)
    assert weights.min() >= 0
    assert np.abs(weights.sum(axis=2) - 1).max() < 1e-15
    second = np.einsum("i,ija,ijb->ab", WEIGHT, weights, weights) / 400
    assert second == pytest.approx((np.ones((3, 3)) + np.eye(3)) / 12, abs=1e-6)
    assert np.einsum("i,ija->a", WEIGHT, weights) / 400 == pytest.approx(1 / 3, abs=1e-6)


def test_around_z():
    for cosine in (-1.0, -0.3, 0.0, 0.8, 1.0):
        for u in (0.0, 0.25, 0.6):
            x, y, z = sampling.around_z(cosine, u)
            assert z == cosine
            sine = np.sqrt(1 - cosine**2)
            assert (x, y) == pytest.approx((sine * cos(2 * pi * u), sine * np.sin(2 * pi * u)))


def test_find_weighs_by_area():
    """Each entry is found for as large a share of values as its own, edges belong to the next."""
    own = np.array([9.0, 9.0, 0.5, 2.0, 0.0, 3.0, 0.25, 4.25, 9.0])
    running = own.copy()
    first, last = 2, 8
    running[first:last] = np.cumsum(own[first:last])
    values = (np.arange(40_000) + 0.5) / 40_000 * running[last - 1]
    found = np.array([sampling.find(running, first, last, value) for value in values])
    shares = np.bincount(found, minlength=9) / 40_000
    expected = np.where((np.arange(9) >= first) & (np.arange(9) < last), own, 0)
    assert shares == pytest.approx(expected / expected.sum(), abs=1e-12)
    assert sampling.find(running, first, last, 0.0) == 2
    assert sampling.find(running, first, last, 0.5) == 3
    assert sampling.find(running, first, last, 2.5) == 5  # one without area is never found
    assert sampling.find(running, first, last, running[last - 1]) == 7
    assert sampling.find(running, 5, 6, 0.1) == 5
