"""Single rays: reflection, refraction, and lengths, against geometry.

Tolerance everywhere: relative 1e-9, absolute 1e-12 where the value is 0, but where a test says
otherwise. Sources stand beside the values in cases_rays.py.
"""

from itertools import permutations
from math import acos, asin, atan2, cos, degrees, radians, sin, tan

import numpy as np
import pytest

from lumentrace.kernels import fresnel, vectors
from lumentrace.models.media.uniform import advance
from tests.reference import cases_rays as cases

LIGHT_MM_PER_PS = 0.299792458  # c0, exact in the SI


def optical_length(index, length):
    """Optical length of a straight way, as the engine's segment gives it."""
    return advance((index, 0.0), 555.0, (0.0, 0.0, 0.0), (0.0, 0.0, 1.0), length, None)[3]


def down(angle):
    """Unit direction at an angle in degrees from -z, toward +x."""
    return sin(radians(angle)), 0.0, -cos(radians(angle))


def angle_of(direction):
    """Angle in degrees from the z axis."""
    return degrees(atan2(abs(direction[0]), abs(direction[2])))


def enter(direction, n1, n2):
    """Refraction at a level surface, from above."""
    return vectors.refract(*direction, 0.0, 0.0, 1.0, n1, n2)


def test_vector_forms_of_both_laws():
    """POS-07: one direction reflected and refracted, by components and angles."""
    case = cases.POS_07
    direction = (0.6, 0.0, -0.8)
    refracted = enter(direction, 1.0, 1.5)
    reflected = vectors.reflect(*direction, 0.0, 0.0, 1.0)
    for i, axis in enumerate("xyz"):
        assert case.agrees(f"refracted {axis}", refracted[i])
        assert case.agrees(f"reflected {axis}", reflected[i])
    assert case.agrees("incidence angle", angle_of(reflected))
    assert case.agrees("refraction angle", angle_of(refracted))


def test_fermat_at_a_plane_boundary():
    """POS-03: the ray from A that is refracted to B takes the stationary optical path."""
    case = cases.POS_03
    crossing = case["crossing point from the foot of A"]
    incident = down(degrees(atan2(crossing, 100.0)))
    refracted = enter(incident, 1.0, 1.5)
    assert case.agrees("incidence angle", angle_of(incident))
    assert case.agrees("refraction angle", angle_of(refracted))
    assert crossing + 80.0 * tan(radians(angle_of(refracted))) == pytest.approx(120.0, rel=1e-9)

    def path(x):
        return optical_length(1.0, np.hypot(x, 100.0)) + optical_length(
            1.5, np.hypot(120.0 - x, 80.0)
        )

    assert case.agrees("optical path A to B (minimum)", path(crossing))
    assert case.agrees("optical path with the crossing moved by +1 mm", path(crossing + 1.0))
    assert case.agrees("straight-line crossing, optical path", path(120.0 * 100.0 / 180.0))


def test_optical_length_of_a_segment():
    """POS-01: 100 mm at n = 1.5168."""
    length = optical_length(1.5168, 100.0)
    assert cases.POS_01.agrees("optical path length", length)
    assert cases.POS_01.agrees("transit time", length / LIGHT_MM_PER_PS / 1000)


@pytest.mark.parametrize(("case", "dihedral"), [(cases.POS_10, 45.0), (cases.POS_11, 67.5)])
def test_two_mirrors_turn_by_twice_their_angle(case, dihedral):
    """POS-10, POS-11: whatever the incidence in the principal section."""
    tilt = radians(dihedral)
    for start in (10.0, 25.0, 80.0):
        incoming = down(start)
        once = vectors.reflect(*incoming, 0.0, 0.0, 1.0)
        twice = vectors.reflect(*once, sin(tilt), 0.0, cos(tilt))
        assert case.agrees("deviation", degrees(acos(np.dot(incoming, twice))))


def test_corner_cube_returns_the_light():
    """IMG-13: three mirrors at right angles, in each order of hits; within 1e-9 arcsec."""
    incoming = np.full(3, -1 / np.sqrt(3))
    for order in permutations(range(3)):
        direction = incoming
        for axis in order:
            direction = vectors.reflect(*direction, *np.eye(3)[axis])
        name = "deviation from exact return, order ({}, {}, {})".format(*(a + 1 for a in order))
        error = degrees(np.linalg.norm(np.add(direction, incoming))) * 3600
        assert error == pytest.approx(cases.IMG_13[name], abs=1e-9)


@pytest.mark.parametrize(
    ("case", "thickness", "index", "angle"),
    [(cases.IMG_17, 10.0, 1.5168, 45.0), (cases.IMG_18, 3.5, 1.65, 28.0)],
)
def test_ray_through_a_plate(case, thickness, index, angle):
    """IMG-17, IMG-18: refracted in and out again, shifted but not turned."""
    incident = down(angle)
    inside = enter(incident, 1.0, index)
    assert enter(inside, index, 1.0) == pytest.approx(incident, abs=1e-12)
    way = thickness / -inside[2]
    aside = way * inside[0]
    straight = thickness * tan(radians(angle))
    assert case.agrees(
        "lateral shift (perpendicular to the ray)", (straight - aside) * cos(radians(angle))
    )
    assert case.agrees(
        "exact focus shift of that ray, plate perpendicular to the axis",
        (straight - aside) / tan(radians(angle)),
    )
    assert case.agrees("optical path inside the plate", optical_length(index, way))
    assert case.agrees("transit time inside", optical_length(index, way) / LIGHT_MM_PER_PS)


def test_returns_of_a_cover_glass():
    """STR-11: once at the near face, once at the far face: angles, lengths, times, powers."""
    case = cases.STR_11
    near = case["near-face incidence angle"]
    assert 2 * 1.0 * tan(radians(near)) == pytest.approx(3.0, rel=1e-9)
    length = optical_length(1.0, 2 * 1.0 / cos(radians(near)))
    assert case.agrees("near-face path length (geometric = optical)", length)
    assert case.agrees("near-face arrival time", length / LIGHT_MM_PER_PS)
    assert case.agrees(
        "near-face reflectance, unpolarised",
        fresnel.unpolarised_reflectance(1.0, 1.52, cos(radians(near))),
    )

    outside = down(case["far-face incidence angle outside"])
    inside = enter(outside, 1.0, 1.52)
    mirrored = vectors.reflect(*inside, 0.0, 0.0, 1.0)
    back = vectors.refract(*mirrored, 0.0, 0.0, -1.0, 1.52, 1.0)
    assert back == pytest.approx((outside[0], 0.0, -outside[2]), abs=1e-12)
    air, glass = 1.0 / -outside[2], 0.7 / -inside[2]
    assert 2 * (air * outside[0] + glass * inside[0]) == pytest.approx(3.0, rel=1e-9)
    far = 2 * (optical_length(1.0, air) + optical_length(1.52, glass))
    assert case.agrees("far-face optical path", far)
    assert case.agrees("far-face arrival time", far / LIGHT_MM_PER_PS)
    powers = [fresnel.power(1.0, 1.52, -outside[2])[i] for i in range(2)]
    assert case.agrees(
        "far-face power factor (1-R)^2 R, unpolarised", sum((1 - r) ** 2 * r for r in powers) / 2
    )


def test_light_guided_in_a_core():
    """LGT-03: what enters a flat end of n = 1.4918 in air, and where its wall reflects it all."""
    case = cases.LGT_03
    steepest = enter(down(90.0 - 1e-6), 1.0, 1.4918)
    assert case["core-cladding critical angle"] == pytest.approx(
        degrees(asin(sin(radians(angle_of(steepest))))), abs=1e-9
    )
    critical = case["core-cladding critical angle"]
    assert not fresnel.is_total(1.4918, 1.0, cos(radians(critical * (1 - 1e-9))))
    assert fresnel.is_total(1.4918, 1.0, cos(radians(critical * (1 + 1e-9))))
    assert 90 - critical == pytest.approx(case["largest guided angle to the axis inside"], rel=1e-9)
    assert fresnel.is_total(1.4918, 1.0, sin(radians(angle_of(steepest))))
