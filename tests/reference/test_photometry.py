"""The eye: V(lambda), lumens and their definition. Sources stand beside the values."""

import pytest

from lumentrace import photometry
from lumentrace.models.detectors.plane import efficacy
from tests.reference import cases_sources as cases


@pytest.mark.parametrize("wavelength", [400, 450, 500, 507, 550, 555, 600, 650, 700])
def test_luminous_efficiency(wavelength):
    """PHO-01: V and lumens per watt, as sources and as detectors use them; relative 1e-9."""
    lumens = f"lumens of 1 W at {wavelength} nm (Km=683)"
    assert cases.PHO_01.agrees(f"V({wavelength} nm)", photometry.luminosity(wavelength))
    assert cases.PHO_01.agrees(lumens, efficacy(float(wavelength), photometry.luminosity_table()))
    assert photometry.watts_of(cases.PHO_01[lumens], wavelength) == pytest.approx(1.0, rel=1e-9)


def test_definition_of_the_candela():
    """PHO-03: 683 lm/W at 540 THz, within 1e-4: K_m is rounded, and V is linear between whole nm.

    1 cd there is 1/683 W/sr.
    """
    wavelength = cases.PHO_03["vacuum wavelength"]
    value = efficacy(wavelength, photometry.luminosity_table())
    assert value == pytest.approx(cases.PHO_03["luminous efficacy (exact)"], rel=1e-4)
    assert photometry.watts_of(1.0, wavelength) == pytest.approx(
        cases.PHO_03["1 cd source: radiant intensity at 540e12 Hz"], rel=1e-4
    )
