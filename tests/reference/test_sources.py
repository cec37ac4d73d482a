"""Patterns of light, Lambert's law and the eye, without sampling: inversion and quadrature.

Tolerance: relative 1e-9 but where a test says otherwise. Sources stand beside the values in
cases_sources.py and cases_factors.py.
"""

from math import acos, cos, degrees, hypot, pi, radians, sin, sqrt

import numpy as np
import pytest

from lumentrace.kernels import fresnel, vectors
from lumentrace.models.lobes import lambertian as reflection
from lumentrace.models.lobes import lambertian_through as transmission
from lumentrace.models.patterns import collimated, cosine_power, isotropic, lambertian
from tests.reference import cases_factors
from tests.reference import cases_sources as cases

NODE, WEIGHT = np.polynomial.legendre.leggauss(60)


def gauss(function, low, high):
    """Integral by Gauss's rule of 60 points."""
    half = (high - low) / 2
    return half * sum(w * function(low + half * (x + 1)) for x, w in zip(NODE, WEIGHT, strict=True))


@pytest.mark.parametrize(
    ("case", "albedo", "cones"),
    [(cases.SCA_01, 0.8, (10, 30, 60)), (cases.SCA_02, 0.35, (25, 50, 75))],
)
@pytest.mark.parametrize(("lobe", "side"), [(reflection, 1.0), (transmission, -1.0)])
def test_lambertian_scattering(case, albedo, cones, lobe, side):
    """SCA-01, SCA-02: value, share within a cone, mean cosine and mean angle of what is sampled.

    The share is the reflectance times the lobe's; transmission is the same on the far side.
    """
    incoming = (0.6, 0.0, -0.8)

    def value(angle):
        return albedo * lobe.value(incoming, (sin(angle), 0.0, side * cos(angle)), 1.0, 1.0)

    def cosine(u):
        direction, factor, _ = lobe.sample(incoming, 1.0, 1.0, (u, 0.3, 0.0, 0.0))
        assert factor == 1.0
        return side * direction[2]

    assert case.agrees("BRDF", value(0.3))
    assert lobe.value(incoming, (0.6, 0.0, -side * 0.8), 1.0, 1.0) == 0.0
    flux = gauss(lambda t: value(t) * cos(t) * 2 * pi * sin(t), 0, pi / 2)
    assert case.agrees("directional-hemispherical reflectance", flux)
    assert lobe.albedo(incoming, 1.0, 1.0) == 1.0
    for cone in cones:
        share = case[f"share of incident power inside {cone} deg of the normal"]
        assert degrees(acos(cosine(share / albedo))) == pytest.approx(cone, rel=1e-9)
    # substituting u = 1 - s^2 takes the root at u = 1 out of the integrand
    assert case.agrees(
        "mean cos of exit angle (of scattered power)",
        gauss(lambda s: cosine(1 - s * s) * 2 * s, 0, 1),
    )
    # and u = sin^2 makes it smooth at both ends
    assert case.agrees(
        "mean exit angle",
        gauss(lambda t: degrees(acos(cosine(sin(t) ** 2))) * sin(2 * t), 0, pi / 2),
    )


@pytest.mark.parametrize(
    ("case", "exponent", "peak"), [(cases.PHO_07, 3.0, 1200.0), (cases.PHO_09, 1.0, 1000 / pi)]
)
def test_cosine_power(case, exponent, peak):
    """PHO-07, PHO-09: intensity cos^m: flux, beam and field angles, zones; density and sampling."""
    values = (exponent, 0.0)
    flux = peak / cosine_power.pdf(values, (0.0, 0.0, 1.0))
    assert case.agrees("flux", flux)

    def angle(share):
        return degrees(acos(cosine_power.emit(values, share, 0.3)[2]))

    for name, share in (
        ("beam angle (50 % of peak, full)", case["share of flux inside the beam"]),
        ("field angle (10 % of peak, full)", case["share of flux inside the field"]),
    ):
        assert case.agrees(name, 2 * angle(share))
    inner = case["flux in the zone 0-30 deg"] / flux
    outer = inner + case["flux in the zone 30-60 deg"] / flux
    assert angle(inner) == pytest.approx(30.0, rel=1e-9)
    assert angle(outer) == pytest.approx(60.0, rel=1e-9)
    assert case.agrees(
        "illuminance 3 m below", flux * cosine_power.pdf(values, (0.0, 0.0, 1.0)) / 9
    )
    for pdf_of, x in ((lambertian, 0.3), (lambertian, 0.9)):
        direction = (sqrt(1 - x * x), 0.0, x)
        assert pdf_of.pdf(values, direction) == pytest.approx(
            cosine_power.pdf((1.0, 0.0), direction), rel=1e-12
        )


def test_cone_of_the_sun():
    """CON-04: a uniform cone of 0.2667 degrees can be concentrated (1 / sin)^2 times."""
    values = (cos(radians(0.2667)), 0.0)
    limit = pi * collimated.pdf(values, (0.0, 0.0, 1.0))
    assert cases.CON_04.agrees("Cmax 3D", limit)
    assert cases.CON_04.agrees("Cmax 2D", sqrt(limit))
    assert collimated.emit(values, 1.0, 0.0)[2] == pytest.approx(values[0], rel=1e-12)
    assert collimated.pdf(values, (sin(0.00466), 0.0, cos(0.00466))) == 0.0


@pytest.mark.parametrize(
    ("case", "index", "radius", "half"),
    [(cases.VIE_43, 1.5, 2.0, 60), (cases.VIE_44, 1.8, 1.2, 35)],
)
def test_etendue_is_kept(case, index, radius, half):
    """VIE-43, VIE-44: the rim of a cone, refracted; etendue n^2 A / (density on the axis)."""
    area = pi * radius**2
    outside = (cos(radians(half)), 0.0)
    rim = collimated.emit(outside, 1.0, 0.0)
    refracted = vectors.refract(rim[0], rim[1], -rim[2], 0.0, 0.0, 1.0, 1.0, index)
    inside = (-refracted[2], 0.0)
    axis = (0.0, 0.0, 1.0)
    assert case.agrees("half-angle inside", degrees(acos(inside[0])))
    assert case.agrees("etendue in air", area / collimated.pdf(outside, axis))
    assert case.agrees(
        "etendue inside, n^2 A pi sin^2", index**2 * area / collimated.pdf(inside, axis)
    )
    gain = collimated.pdf(inside, axis) / collimated.pdf(outside, axis)
    assert case.agrees("radiance ratio inside/outside without Fresnel loss", gain)
    passed = 1 - fresnel.unpolarised_reflectance(1.0, index, 1.0)
    assert case.agrees("radiance ratio along the normal with Fresnel loss", gain * passed)


def test_isotropic_point_over_a_plane():
    """VIE-17, VIE-18: E = I cos / d^2 from the pattern's density and 4 pi I lumens."""
    for case, intensity, height, radii in (
        (cases_factors.VIE_17, 1000.0, 2.0, (0, 1, 3)),
        (cases_factors.VIE_18, 750.0, 3.2, (0, 1.5, 4)),
    ):
        for radius in radii:
            d = hypot(height, radius)
            density = isotropic.pdf((0.0, 0.0), (radius / d, 0.0, -height / d))
            e = 4 * pi * intensity * density / d**2
            assert case.agrees(f"horizontal illuminance at {radius} m", e * height / d)
            name = f"vertical illuminance (facing the foot point) at {radius} m"
            assert case.agrees(name, e * radius / d)
        share = case[f"flux inside radius {radii[2]} m"] / (4 * pi * intensity)
        edge = isotropic.emit((0.0, 0.0), share, 0.0)[2]
        assert edge == pytest.approx(height / hypot(height, radii[2]), rel=1e-9)


def on_axis(distance, half_side=None, radius=None):
    """Illuminance / (peak intensity / distance^2) of a Lambertian square or disc of unit flux."""

    def at(x, y):
        d2 = distance**2 + x * x + y * y
        cosine = distance / sqrt(d2)
        return lambertian.pdf((1.0, 0.0), (0.0, sqrt(1 - cosine * cosine), cosine)) * cosine / d2

    if radius:
        total = gauss(lambda r: at(r, 0.0) * 2 * pi * r, 0, radius) / (pi * radius**2)
    else:
        total = gauss(lambda x: gauss(lambda y: at(x, y), 0, half_side), 0, half_side)
        total /= half_side**2
    return total * distance**2 / lambertian.pdf((1.0, 0.0), (0.0, 0.0, 1.0))


@pytest.mark.parametrize("times", [1, 2, 5, 10])
def test_five_times_rule(times):
    """VIE-19, VIE-20: how far a disc and a square depart from the inverse-square law."""
    name = f"exact / inverse-square at {times} x largest dimension"
    assert cases.VIE_19.agrees(name, on_axis(times, radius=0.5))
    assert cases.VIE_20.agrees(name, on_axis(times, half_side=0.5))
