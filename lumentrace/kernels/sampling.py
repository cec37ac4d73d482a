"""Directions and places from uniform numbers, each by exact inversion."""

from math import cos, pi, sin, sqrt

from lumentrace.jit import kernel


@kernel
def around_z(cosine, u):
    """Unit direction at that cosine from +z and at azimuth 2 pi u."""
    sine = sqrt(max(0.0, 1.0 - cosine * cosine))
    azimuth = 2.0 * pi * u
    return sine * cos(azimuth), sine * sin(azimuth), cosine


@kernel
def sphere(u1, u2):
    """Uniform over all directions: the cosine is uniform in [-1, 1]."""
    return around_z(1.0 - 2.0 * u1, u2)


@kernel
def cosine_power(m, u1, u2):
    """Intensity cos^m about +z: density (m + 1) / (2 pi) cos^m, cosine = u^(1 / (m + 1)).

    1 - u1 is in (0, 1], so that the cosine is never zero.
    """
    return around_z((1.0 - u1) ** (1.0 / (m + 1.0)), u2)


@kernel
def cosine_hemisphere(u1, u2):
    """Lambert's law about +z: density cos / pi, cosine = sqrt(u)."""
    return around_z(sqrt(1.0 - u1), u2)


@kernel
def cone(cos_half_angle, u1, u2):
    """A cone of uniform radiance about +z, as a plane across its axis receives it.

    The flux through the plane goes as radiance x cosine, so the squared sine is uniform in
    [0, sin^2 of the half-angle].
    """
    return around_z(sqrt(1.0 - u1 * (1.0 - cos_half_angle * cos_half_angle)), u2)


@kernel
def disc(radius, u1, u2):
    """Uniform over a disc: (x, y)."""
    r = radius * sqrt(u1)
    return r * cos(2.0 * pi * u2), r * sin(2.0 * pi * u2)


@kernel
def triangle(u1, u2):
    """Uniform over a triangle: weights of its three corners.

    Turk: "Generating random points in triangles", Graphics Gems (1990), method 2.
    """
    root = sqrt(u1)
    return 1.0 - root, root * (1.0 - u2), root * u2


@kernel
def find(cumulative, first, last, value):
    """Index of the first of the running sums in [first, last) that exceeds value."""
    end = last - 1
    while first < end:
        middle = (first + end) >> 1
        if cumulative[middle] > value:
            end = middle
        else:
            first = middle + 1
    return first
