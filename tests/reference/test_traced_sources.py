"""Patterns and photometric measures, by tracing. Sources stand beside the values in
cases_sources.py.
"""

from math import pi, radians, sin, tan

import numpy as np
import pytest

from lumentrace import study as api
from tests.reference import cases_sources as cases
from tests.reference.closed_forms import cell_means, element_to_disc
from tests.worlds import Study, agree, box

X, Y, DOWN, UP = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, -1.0), (0.0, 0.0, 1.0)


def test_uniformity_of_a_table(tmp_path):
    """PHO-12: mean, minimum over mean and over maximum of 16 cells, each lit by a beam of its own.

    Every ray lands, so nothing is left to chance: relative 1e-9.
    """
    case = cases.PHO_12
    table = [[420, 510, 515, 430], [480, 560, 555, 470], [470, 548, 552, 466], [405, 500, 498, 412]]
    study = Study(tmp_path)
    for j, row in enumerate(table):
        for i, lux in enumerate(row):
            place = {"center": (i + 0.5, j + 0.5, 1), "normal": DOWN, "across": X, "size": (1, 1)}
            study.source(
                f"beam{i}{j}", rectangle=place, flux={"lumens": lux}, pattern={"collimated": 0}
            )
    study.detector("desk", (2, 2, 0), UP, (4, 4), cells=(4, 4), counts="illuminance")
    result = study.trace(1)
    assert result.run.map("desk")["value"].values == pytest.approx(np.array(table), rel=1e-9)
    found = api.measures(result.run)
    assert case.agrees("mean illuminance of the table", found["desk.mean"].value)
    assert case.agrees("Uo=Emin/Eavg", found["desk.uniformity"].value)
    assert case.agrees("Emin/Emax", found["desk.min"].value / found["desk.max"].value)


@pytest.mark.parametrize(
    ("case", "exponent", "peak"), [(cases.PHO_07, 3.0, 1200.0), (cases.PHO_09, 1.0, 1000 / pi)]
)
def test_luminaire_of_cosine_power(tmp_path, case, exponent, peak):
    """PHO-07, PHO-09: illuminance 3 m below and beside, from the flux; z <= 4 of 9 cells."""

    def below(p):
        d = np.linalg.norm(p, axis=1)
        return peak * (3 / d) ** (exponent + 1) / d**2

    assert case.agrees("illuminance 3 m below", below(np.array([[0.0, 0.0, 3.0]]))[0])
    study = Study(tmp_path)
    study.source(
        "lamp",
        disc={"center": (0, 0, 3), "normal": DOWN, "radius": 1e-6},
        flux={"lumens": case["flux"]},
        pattern={"cosine_power": exponent},
    )
    study.detector("floor", (2, 0, 0), UP, (4.5, 0.5), cells=(9, 1), counts="illuminance")
    expected = cell_means(lambda p: below(p - [0, 0, 3]), (2, 0, 0), X, Y, (4.5, 0.5), (9, 1))
    agree(study.trace(8).cells("floor"), expected)


def test_cone_refracted_into_glass(tmp_path):
    """VIE-43: nothing beyond the refracted half-angle; radiance along the normal, z <= 4."""
    case = cases.VIE_43
    study = Study(tmp_path, length="mm")
    study.medium("glass", 1.5)
    study.part("glass_block", box((-200, -200, -200), (200, 200, 0)), medium="glass")
    study.source(
        "lamp",
        disc={"center": (0, 0, 1e-3), "normal": DOWN, "radius": 2},
        pattern={"collimated": 60},
    )
    study.detector("near", (0, 0, -20), UP, (40, 40), cells=(40, 40))
    study.detector("far", (0, 0, -40), UP, (4, 4))
    study.detector("floor", (0, 0, -60), UP, (400, 400), catch=True)  # no light comes back
    result = study.trace(16)

    edge = 2 + 1e-3 * tan(radians(60)) + 20 * tan(radians(case["half-angle inside"]))
    middle = np.abs(np.arange(40) - 19.5)
    nearest = np.hypot(*np.meshgrid(middle - 0.5, middle - 0.5))
    flux = result.cell_flux("near").sum(axis=2)
    assert flux[nearest > edge].sum() == 0.0
    within = (nearest < edge - 1.5) & (nearest > edge - 2.5)
    assert (flux[within] > 0.0).all()

    outside = 1 / (pi * 4e-6 * pi * sin(radians(60)) ** 2)  # W/(m2 sr) of 1 W
    inside = outside * case["radiance ratio along the normal with Fresnel loss"]
    factor = cell_means(
        lambda p: element_to_disc(2.0, 40.0, np.hypot(p[:, 0], p[:, 1])),
        (0, 0, -40), X, Y, (4, 4), (1, 1),
    )  # fmt: skip
    agree(result.cells("far"), pi * inside * factor)
