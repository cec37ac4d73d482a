"""What must hold at every smooth boundary, for all indices and angles. Tolerance 1e-12."""

from cmath import phase
from math import asin, atan, cos, pi, sin, sqrt

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lumentrace.kernels import fresnel

MANY = settings(max_examples=400, deadline=None, derandomize=True)
indices = st.floats(1.0, 4.0)
angles = st.floats(0.0, pi / 2 - 1e-3)


def close(value):
    return pytest.approx(value, abs=1e-12)


@MANY
@given(indices, indices, angles)
def test_reflected_and_transmitted_power_add_up(n1, n2, angle):
    r_s, r_p, t_s, t_p = fresnel.power(n1, n2, cos(angle))
    assert r_s + t_s == close(1) and r_p + t_p == close(1)
    assert min(r_s, r_p) >= 0 and min(t_s, t_p) >= -1e-15
    assert fresnel.unpolarised_reflectance(n1, n2, cos(angle)) == close((r_s + r_p) / 2)


@MANY
@given(indices, indices, angles)
def test_power_is_the_square_of_the_amplitude(n1, n2, angle):
    """Also T = (n2 cos 2) / (n1 cos 1) |t|^2 where light is refracted, else 0."""
    r_s, r_p, t_s, t_p = fresnel.fresnel(n1, n2, cos(angle))
    powers = fresnel.power(n1, n2, cos(angle))
    assert powers[:2] == close((abs(r_s) ** 2, abs(r_p) ** 2))
    sine = n1 / n2 * sin(angle)
    widening = n2 * sqrt(1 - sine * sine) / (n1 * cos(angle)) if sine < 1 else 0.0
    assert powers[2:] == pytest.approx(
        (widening * abs(t_s) ** 2, widening * abs(t_p) ** 2), abs=1e-7
    )


@MANY
@given(indices, indices, angles)
def test_stokes_relations(n1, n2, angle):
    """On the way back r' = -r, and t t' = 1 - r^2; R and T are the same from either side."""
    sine = n1 / n2 * sin(angle)
    if sine > 1 - 1e-6:
        return
    back_cosine = sqrt(1 - sine * sine)
    there, back = fresnel.fresnel(n1, n2, cos(angle)), fresnel.fresnel(n2, n1, back_cosine)
    for i in (0, 1):
        assert back[i] == pytest.approx(-there[i], abs=1e-9)
        assert there[i + 2] * back[i + 2] == pytest.approx(1 - there[i] ** 2, abs=1e-9)
    assert fresnel.power(n2, n1, back_cosine) == pytest.approx(
        fresnel.power(n1, n2, cos(angle)), abs=1e-9
    )


@MANY
@given(indices, indices)
def test_brewster(n1, n2):
    """At the angle atan(n2 / n1) no p-polarised light is reflected."""
    assert fresnel.power(n1, n2, cos(atan(n2 / n1)))[1] == close(0)


@MANY
@given(indices, indices)
def test_normal_incidence(n1, n2):
    """r = (n1 - n2) / (n1 + n2) for s, its negative for p by the sign that is taken."""
    r_s, r_p, t_s, t_p = fresnel.fresnel(n1, n2, 1.0)
    assert (r_s, r_p) == close(((n1 - n2) / (n1 + n2), (n2 - n1) / (n1 + n2)))
    assert (t_s, t_p) == close((2 * n1 / (n1 + n2), 2 * n1 / (n1 + n2)))


@MANY
@given(st.floats(1.01, 4.0), st.floats(1e-3, 1 - 1e-3))
def test_total_reflection(n1, share):
    """Beyond the critical angle |r| = 1, nothing passes, and the phases obey Born and Wolf 1.5.4.

    tan((phase_p - phase_s) / 2) = cos i sqrt(sin^2 i - n^2) / sin^2 i, n = n2 / n1, for their sign
    of r_p, which is the one here.
    """
    critical = asin(1 / n1)
    angle = critical + share * (pi / 2 - critical)
    r_s, r_p, _, _ = fresnel.fresnel(n1, 1.0, cos(angle))
    assert abs(r_s) == close(1) and abs(r_p) == close(1)
    assert fresnel.power(n1, 1.0, cos(angle)) == close((1, 1, 0, 0))
    assert fresnel.unpolarised_reflectance(n1, 1.0, cos(angle)) == close(1)
    assert fresnel.is_total(n1, 1.0, cos(angle))
    root = sqrt(sin(angle) ** 2 - 1 / n1**2)
    expected = 2 * atan(cos(angle) * root / sin(angle) ** 2)
    difference = abs(phase(r_p / r_s)) if r_p / r_s != 0 else 0.0
    assert difference == pytest.approx(expected, abs=1e-9)
    assert not fresnel.is_total(n1, 1.0, cos(critical * (1 - share)))
    assert not fresnel.is_total(1.0, n1, cos(angle))


@MANY
@given(indices, angles)
def test_equal_indices_reflect_nothing(n, angle):
    assert fresnel.power(n, n, cos(angle)) == close((0, 0, 1, 1))
    assert not fresnel.is_total(n, n, cos(angle))


def test_amplitude_goes_to_minus_one_at_grazing_incidence():
    r_s, r_p, _, _ = fresnel.fresnel(1.0, 1.5, 1e-9)
    assert r_s.real == pytest.approx(-1, abs=1e-8) and r_p.real == pytest.approx(-1, abs=1e-8)
