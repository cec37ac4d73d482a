"""Smooth boundaries and plates: the amplitudes and powers against published closed forms.

Tolerance everywhere: relative 1e-9, absolute 1e-12 where the value is 0. Sources stand beside the
values in cases_fresnel.py.
"""

from math import asin, cos, degrees, pi, radians, sin, sqrt

import numpy as np
import pytest

from lumentrace.kernels import fresnel
from lumentrace.models.media.uniform import transmittance
from tests.reference import cases_fresnel as cases


def reflectances(n1, n2, angle):
    """(R_s, R_p) at an angle of incidence in degrees, T checked to be what is left."""
    r_s, r_p, t_s, t_p = fresnel.power(n1, n2, cos(radians(angle)))
    assert r_s + t_s == pytest.approx(1.0, abs=1e-12)
    assert r_p + t_p == pytest.approx(1.0, abs=1e-12)
    return r_s, r_p


def plate(reflectance, inner):
    """(T, R) of a plate from one polarisation's R and the transmittance of one pass.

    T = (1-R)^2 t / (1 - R^2 t^2); Stokes, Proc. R. Soc. 11 (1862).
    """
    rest = (1 - reflectance) ** 2 * inner / (1 - (reflectance * inner) ** 2)
    return rest, reflectance + reflectance * inner * rest


def angle_inside(angle, index):
    return degrees(asin(sin(radians(angle)) / index))


@pytest.mark.parametrize(
    ("case", "n1", "n2", "angles"),
    [
        (cases.FRE_01, 1.0, 1.5, (0, 15, 30, 45, 60, 75, 85)),
        (cases.FRE_02, 1.5, 1.0, (0, 10, 20, 30, 40, 41.5, 45, 60)),
    ],
)
def test_reflectance_at_one_boundary(case, n1, n2, angles):
    """FRE-01, FRE-02: R for s, p and unpolarised light, also beyond the critical angle."""
    for angle in angles:
        r_s, r_p = reflectances(n1, n2, angle)
        mean = fresnel.unpolarised_reflectance(n1, n2, cos(radians(angle)))
        assert case.agrees(f"Rs({angle} deg)", r_s)
        assert case.agrees(f"Rp({angle} deg)", r_p)
        assert case.agrees(f"Runpolarised({angle} deg)", mean)
        assert fresnel.is_total(n1, n2, cos(radians(angle))) == (case[f"Rs({angle} deg)"] == 1.0)


@pytest.mark.parametrize(
    ("case", "n1", "n2"), [(cases.FRE_05, 1.0, 1.5), (cases.FRE_06, 1.333, 1.7)]
)
def test_brewster_and_critical_angles(case, n1, n2):
    """FRE-05, FRE-06: R_p vanishes at the Brewster angle from either side; where R becomes 1."""
    r_s, r_p = reflectances(n1, n2, case["Brewster angle, n1 side"])
    assert case.agrees("Rs at Brewster angle", r_s)
    assert case.agrees("Rp at Brewster angle", r_p)
    assert case.agrees("R unpolarised at Brewster angle", (r_s + r_p) / 2)
    assert case.agrees(
        "degree of polarisation of reflected light at Brewster angle", (r_s - r_p) / (r_s + r_p)
    )
    assert reflectances(n2, n1, case["internal Brewster angle in the denser medium"])[1] < 1e-12
    critical = case["critical angle in the denser medium"]
    assert not fresnel.is_total(n2, n1, cos(radians(critical * (1 - 1e-9))))
    assert fresnel.is_total(n2, n1, cos(radians(critical * (1 + 1e-9))))


@pytest.mark.parametrize(
    ("case", "n1", "n2", "angle"),
    [(cases.POS_05, 1.0, 1.5, 35), (cases.POS_06, 1.7, 1.45, 40)],
)
def test_amplitudes_obey_the_stokes_relations(case, n1, n2, angle):
    """POS-05, POS-06: r and t with their signs; r' = -r and t t' = 1 - r^2 on the way back."""
    cos_1 = cos(radians(angle))
    cos_2 = cos(asin(n1 / n2 * sin(radians(angle))))
    there = fresnel.fresnel(n1, n2, cos_1)
    back = fresnel.fresnel(n2, n1, cos_2)
    power = fresnel.power(n1, n2, cos_1)
    for i, name in enumerate("sp"):
        r, t = there[i], there[i + 2]
        assert r.imag == t.imag == 0.0
        assert case.agrees(f"r_{name} (p sign: n2 cos i - n1 cos t)", r.real)
        assert case.agrees(f"t_{name}", t.real)
        assert back[i].real == pytest.approx(-r.real, rel=1e-12)
        assert case.agrees(f"t t' ({name})", (t * back[i + 2]).real)
        assert case.agrees(
            f"power transmittance ({name}) n2 cos t/(n1 cos i) t^2",
            power[i + 2],
        )


@pytest.mark.parametrize(
    ("case", "index", "inner", "angles"),
    [
        (cases.FRE_07, 1.5, 1.0, (0, 45, 60)),
        (cases.FRE_08, 1.5, 0.8, (0,)),
        (cases.FRE_10, 1.62, 1.0, (0, 50, 70)),
    ],
)
def test_plate_with_all_inner_reflections(case, index, inner, angles):
    """FRE-07, FRE-08, FRE-10: from R_s and R_p of `power`, per polarisation, then averaged."""
    for angle in angles:
        (t_s, _), (t_p, _) = (plate(r, inner) for r in reflectances(1.0, index, angle))
        reflected = sum(plate(r, inner)[1] for r in reflectances(1.0, index, angle)) / 2
        assert case.agrees(f"Ts({angle} deg)", t_s)
        assert case.agrees(f"Tp({angle} deg)", t_p)
        assert case.agrees(f"Tunpolarised({angle} deg)", (t_s + t_p) / 2)
        assert case.agrees(f"Runpolarised({angle} deg)", reflected)
        if angle:
            mean = fresnel.unpolarised_reflectance(1.0, index, cos(radians(angle)))
            rejected = case.reject[f"T from averaging R first ({angle} deg)"]
            assert rejected == pytest.approx(plate(mean, inner)[0], rel=1e-9)
    assert inner == 1.0 or case.agrees(
        "Aunpolarised(0 deg)", 1 - plate(reflectances(1.0, index, 0)[0], inner)[0] - reflected
    )


@pytest.mark.parametrize(
    ("case", "index", "plates"), [(cases.FRE_11, 1.5, 3), (cases.FRE_12, 1.52, 6)]
)
def test_pile_of_plates(case, index, plates):
    """FRE-11, FRE-12: T = (1-R) / (1 + (2m-1) R) at normal incidence."""
    r = fresnel.unpolarised_reflectance(1.0, index, 1.0)
    assert case.agrees("T", (1 - r) / (1 + (2 * plates - 1) * r))
    assert case.agrees("R", 2 * plates * r / (1 + (2 * plates - 1) * r))


@pytest.mark.parametrize(("case", "angle"), [(cases.FRE_13, 0), (cases.FRE_14, 30)])
def test_two_bounce_ghost_of_a_plate(case, angle):
    """FRE-13, FRE-14: direct (1-R)^2 and ghost (1-R)^2 R^2, per polarisation, then averaged."""
    r = np.array(reflectances(1.0, 1.5, angle))
    direct, ghost = (1 - r) ** 2, (1 - r) ** 2 * r**2
    total = np.array([plate(x, 1.0)[0] for x in r])
    assert case.agrees("direct transmitted share of incident power (unpolarised)", direct.mean())
    assert case.agrees("two-bounce ghost share of incident power (unpolarised)", ghost.mean())
    assert case.agrees("ghost/direct", ghost.mean() / direct.mean())
    assert case.agrees("ghost/direct for s", r[0] ** 2)
    assert case.agrees("ghost/direct for p", r[1] ** 2)
    assert (total - direct - ghost).mean() == pytest.approx(
        case["share left after 4 or more internal reflections"], rel=1e-8
    )  # a difference of near-equal numbers: 1e-8 instead of 1e-9


def hemispherical(function):
    """Integral of function(angle in degrees) 2 sin cos over a half space, by Gauss's rule.

    In pieces that crowd toward grazing incidence, where R rises steeply.
    """
    node, weight = np.polynomial.legendre.leggauss(40)
    edges = pi / 2 * (1 - 0.5 ** np.arange(0, 45))
    total = 0.0
    for low, high in zip(edges, edges[1:], strict=False):
        for x, w in zip(node, weight, strict=True):
            angle = (low + high) / 2 + x * (high - low) / 2
            total += w * (high - low) / 2 * function(degrees(angle)) * 2 * sin(angle) * cos(angle)
    return total


def test_reflectance_for_lambertian_light():
    """FRE-21: a boundary from outside and from inside (total reflection included), and a plate."""

    def outside(angle):
        return fresnel.unpolarised_reflectance(1.0, 1.5, cos(radians(angle)))

    def through_plate(angle):
        return sum(plate(r, 1.0)[0] for r in fresnel.power(1.0, 1.5, cos(radians(angle)))[:2]) / 2

    external = hemispherical(outside)
    assert cases.FRE_21.agrees("external diffuse reflectance", external)
    # from inside: 2 sin cos d(angle) is d(sin^2), cut where total reflection begins
    inside = 1 - hemispherical(lambda a: 1 - outside(a)) / 1.5**2
    assert cases.FRE_21.agrees("internal diffuse reflectance", inside)
    for angle in (0.0, 35.0, 75.0, 89.0):
        refracted = cos(radians(angle_inside(angle, 1.5)))
        assert fresnel.unpolarised_reflectance(1.5, 1.0, refracted) == pytest.approx(
            outside(angle), rel=1e-9
        )
    assert cases.FRE_21.agrees(
        "diffuse transmittance of lossless plate", hemispherical(through_plate)
    )


def test_directional_transmittance_of_clear_glass():
    """VIE-32: 6 mm, n = 1.52, absorption 0.01 / mm, by angle and for Lambertian light."""

    def through(angle):
        inner = transmittance(0.01, 6.0 / cos(radians(angle_inside(angle, 1.52))))
        powers = fresnel.power(1.0, 1.52, cos(radians(angle)))[:2]
        return sum(plate(r, inner)[0] for r in powers) / 2

    for angle in range(0, 90, 10):
        assert cases.VIE_32.agrees(f"T({angle} deg)", through(angle))
        assert cases.VIE_32.agrees(f"T({angle})/T(0)", through(angle) / through(0))
    assert cases.VIE_32.agrees("hemispherical diffuse transmittance", hemispherical(through))


def test_ghost_budget_and_veiling_glare_of_windows():
    """STR-07, STR-13, STR-14: sums over all pairs of surfaces, from R of `power`."""
    r = fresnel.unpolarised_reflectance(1.0, 1.5, 1.0)
    total = plate(r, 1.0)[0]
    assert cases.STR_07.agrees("bright field transmittance", total)
    assert cases.STR_07.agrees("direct transmittance", (1 - r) ** 2)
    assert cases.STR_07.agrees(
        "VGI = spot irradiance / bright-field irradiance", 1 - (1 - r) ** 2 / total
    )
    for case, surfaces, wanted in ((cases.STR_13, 4, 0.04), (cases.STR_14, 6, 0.015)):
        index = (1 + sqrt(wanted)) / (1 - sqrt(wanted))
        r = fresnel.unpolarised_reflectance(1.0, index, 1.0)
        ghosts = [
            (1 - r) ** surfaces * r**2 * (1 - r) ** (2 * (j - i - 1))
            for i in range(surfaces)
            for j in range(i + 1, surfaces)
        ]
        assert case["number of two-bounce ghosts"] == len(ghosts)
        assert case.agrees("direct power", (1 - r) ** surfaces)
        assert case.agrees("sum of all two-bounce ghosts", sum(ghosts))
        assert case.agrees("total transmitted power", (1 - r) / (1 + (surfaces - 1) * r))
        assert case.agrees("strongest single ghost / direct", max(ghosts) / (1 - r) ** surfaces)
        assert case.agrees("weakest single ghost / direct", min(ghosts) / (1 - r) ** surfaces)
