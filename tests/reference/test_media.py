"""Absorption along a way: the law of Beer and Lambert against published values.

Tolerance everywhere: relative 1e-9. Sources stand beside the values in cases_media.py.
"""

from math import cos, log10, radians, sin

import pytest
from scipy.integrate import quad

from lumentrace.kernels import vectors
from lumentrace.models.media.uniform import advance, transmittance
from tests.reference import cases_media as cases

SLABS = [(cases.VOL_01, 0.02, 50.0, 40.0, 1.5), (cases.VOL_02, 0.013, 27.0, 65.0, 1.6)]


@pytest.mark.parametrize(("case", "absorption", "length", "angle", "index"), SLABS)
def test_absorbing_slab(case, absorption, length, angle, index):
    """VOL-01, VOL-02: straight through, for a refracted ray, and for Lambertian light inside."""
    incident = (sin(radians(angle)), 0.0, -cos(radians(angle)))
    inside = vectors.refract(*incident, 0.0, 0.0, 1.0, 1.0, index)
    straight = transmittance(absorption, length)
    assert case.agrees("internal transmittance, normal", straight)
    assert case.agrees(
        "internal transmittance, oblique", transmittance(absorption, length / -inside[2])
    )
    assert case.agrees("absorbance log10, normal", -log10(straight))
    assert case.agrees("attenuation", -10 * log10(straight))
    free_path = quad(lambda x: transmittance(absorption, x), 0, 60 / absorption, epsabs=0)[0]
    assert case.agrees("mean free path", free_path)
    diffuse = quad(lambda mu: 2 * mu * transmittance(absorption, length / mu), 0, 1, epsabs=1e-13)
    assert case.agrees("diffuse (Lambertian inside) internal transmittance 2 E3(tau)", diffuse[0])


@pytest.mark.parametrize(
    ("case", "length"), [(cases.VOL_03, 25), (cases.VOL_04, 10)], ids=["VOL-03", "VOL-04"]
)
def test_segment_of_a_weakly_absorbing_glass(case, length):
    """VOL-03, VOL-04: the factor that the engine's segment puts on a ray's weight."""
    values = (1.5, case["alpha"])
    factor = advance(values, 546.0, (0.0, 0.0, 0.0), (0.0, 0.0, 1.0), length, None)[2]
    assert case.agrees(f"internal transmittance over {length} mm", factor)
