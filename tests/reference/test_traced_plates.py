"""Clear plates, piles of them and their ghosts, by tracing.

Normal incidence and Lambertian light, where the mean of s and p at each surface is exact. z <= 4,
with a family-wise limit where there are many values. Sources stand beside the values in
cases_fresnel.py and cases_media.py.
"""

from math import cos, exp, log, radians, sin, sqrt

import numpy as np
import pytest

from tests.reference import cases_fresnel as cases
from tests.reference import cases_media
from tests.worlds import Study, agree, box, of_batches, precise

WIDE = 20.0  # mm, half the side of a plate; no light of these tests reaches its edges
TAGS = ("edge", "edge", "edge", "edge", "bottom", "top")
UP, DOWN = (0.0, 0.0, 1.0), (0.0, 0.0, -1.0)


@pytest.fixture
def study(tmp_path):
    return Study(tmp_path, length="mm")


def add_plates(study, count, index, thickness=1.0, absorption=0.0):
    """Plates plate0, plate1, ... downward from z = 0, with air of their thickness between."""
    study.medium("clear", index, absorption)
    for i in range(count):
        top = -2 * thickness * i
        mesh = box((-WIDE, -WIDE, top - thickness), (WIDE, WIDE, top), TAGS)
        study.part(f"plate{i}", mesh, medium="clear")


def add_beam(study, bottom):
    """A thin beam down the axis, and planes that catch what passes and what returns."""
    study.source(
        "beam",
        disc={"center": (0, 0, 5), "normal": DOWN, "radius": 0.5},
        pattern={"collimated": 0},
    )
    study.detector("passed", (0, 0, bottom - 5), UP, (4, 4), catch=True)
    study.detector("returned", (0, 0, 6), DOWN, (4, 4), catch=True)


@pytest.mark.parametrize(
    ("case", "index", "inner"),
    [(cases.FRE_07, 1.5, 1.0), (cases.FRE_08, 1.5, 0.8), (cases.FRE_10, 1.62, 1.0)],
    ids=["FRE-07", "FRE-08", "FRE-10"],
)
def test_plate(study, case, index, inner):
    """FRE-07, FRE-08, FRE-10 at 0 degrees: T (error <= 0.15 %), R and the absorbed share."""
    add_plates(study, 1, index, absorption=-log(inner))
    add_beam(study, -1)
    result = study.trace(2)
    precise(result.flux("passed"), case["Tunpolarised(0 deg)"])
    agree([result.flux("returned")], [case["Runpolarised(0 deg)"]])
    if inner < 1:
        precise(result.bulk("plate0"), case["Aunpolarised(0 deg)"])


def test_clear_glass(study):
    """VIE-32 at 0 degrees: 6 mm with absorption."""
    add_plates(study, 1, 1.52, thickness=6.0, absorption=0.01)
    add_beam(study, -6)
    precise(study.trace(4).flux("passed"), cases.VIE_32["T(0 deg)"])


@pytest.mark.parametrize(
    ("case", "index", "plates"),
    [(cases.FRE_11, 1.5, 3), (cases.FRE_12, 1.52, 6)],
    ids=["FRE-11", "FRE-12"],
)
def test_pile_of_plates(study, case, index, plates):
    """FRE-11, FRE-12: all reflections between all surfaces."""
    add_plates(study, plates, index)
    add_beam(study, -2 * plates)
    result = study.trace(4)
    precise(result.flux("passed"), case["T"])
    agree([result.flux("returned")], [case["R"]])


def test_paths_through_a_plate(study):
    """FRE-13, STR-07: the ledger tells the direct light from the two-bounce ghost and the rest."""
    add_plates(study, 1, 1.5, thickness=5.0)
    add_beam(study, -5)
    result = study.trace(32)
    direct = result.path("passed", "plate0:top through", "plate0:bottom through")
    ghost = result.path(
        "passed",
        "plate0:top through",
        "plate0:bottom reflect",
        "plate0:top reflect",
        "plate0:bottom through",
    )
    precise(direct, cases.FRE_13["direct transmitted share of incident power (unpolarised)"])
    agree([direct], [cases.STR_07["direct transmittance"]])
    agree([ghost], [cases.FRE_13["two-bounce ghost share of incident power (unpolarised)"]])
    agree([result.flux("passed")], [cases.STR_07["bright field transmittance"]])


@pytest.mark.parametrize(
    ("case", "surfaces", "reflectance"),
    [(cases.STR_13, 4, 0.04), (cases.STR_14, 6, 0.015)],
    ids=["STR-13", "STR-14"],
)
def test_ghost_budget(study, case, surfaces, reflectance):
    """STR-13, STR-14: the order of reflection in the ledger sorts direct light and ghosts."""
    index = (1 + sqrt(reflectance)) / (1 - sqrt(reflectance))
    add_plates(study, surfaces // 2, index)
    add_beam(study, -surfaces)
    result = study.trace(16)
    order = result.run.ledger["reflections"].values

    def of_order(n):
        return result.paths("passed", lambda text, row: order[row] == n)

    precise(of_order(0), case["direct power"])
    agree([of_order(2)], [case["sum of all two-bounce ghosts"]])
    two = [row for text, row in result.path_rows("passed") if order[row] == 2]
    assert len(two) == case["number of two-bounce ghosts"]
    precise(result.flux("passed"), case["total transmitted power"])


def test_ghost_of_a_tilted_beam(study):
    """FRE-14: where direct light and ghost land, to a cell of 0.01 mm; the beam is 2 um wide."""
    toward = np.array([sin(radians(30)), 0.0, -cos(radians(30))])
    across = (cos(radians(30)), 0.0, sin(radians(30)))
    add_plates(study, 1, 1.5, thickness=5.0)
    study.source(
        "beam",
        disc={"center": (-1, 0, 1.7320508), "normal": toward, "radius": 0.001},
        pattern={"collimated": 0},
    )
    study.detector("screen", 20 * toward, -toward, (14, 0.1), cells=(1400, 1), across=across)
    result = study.trace(4)
    x = result.run.detector("screen")["across"].values
    lit = x[result.cell_flux("screen")[0].sum(axis=1) > 0.0]
    groups = np.split(lit, np.flatnonzero(np.diff(lit) > 1.0) + 1)
    spots = sorted(abs(float(g.mean()) - float(groups[-1].mean())) for g in groups)[:2]
    wanted = cases.FRE_14["perpendicular separation of ghost and direct beams"]
    assert spots[1] == pytest.approx(wanted, abs=0.011)


def lambertian_at(study, z, normal):
    """A Lambertian disc of 1 mm."""
    study.source(
        "lamp", disc={"center": (0, 0, z), "normal": normal, "radius": 1}, pattern="lambertian"
    )


NEAR, FAR = 0.01, 1000.0  # mm: distance of the planes from the boundary, and their size


def test_lambertian_light_on_a_boundary(study):
    """FRE-21: R and T for light from outside; planes 10 um from the boundary catch it all."""
    study.medium("glass", 1.5)
    study.part("glass", box((-FAR, -FAR, -FAR), (FAR, FAR, 0), TAGS), medium="glass")
    lambertian_at(study, NEAR, DOWN)
    study.detector("back", (0, 0, 2 * NEAR), DOWN, (FAR, FAR), catch=True)
    study.detector("on", (0, 0, -NEAR), UP, (FAR, FAR), catch=True)
    result = study.trace(16)
    reflectance = cases.FRE_21["external diffuse reflectance"]
    precise(result.flux("on"), 1 - reflectance)
    precise(result.flux("back"), reflectance, 0.005)


def test_lambertian_light_inside_a_boundary(study):
    """FRE-21: R from inside, most of it total reflection; the light starts inside the glass."""
    study.medium("glass", 1.5)
    study.part("glass", box((-FAR, -FAR, -FAR), (FAR, FAR, 0), TAGS), medium="glass")
    lambertian_at(study, -NEAR, UP)
    study.detector("back", (0, 0, -2 * NEAR), UP, (FAR, FAR), catch=True)
    study.detector("out", (0, 0, NEAR), DOWN, (FAR, FAR), catch=True)
    result = study.trace(8)
    reflectance = cases.FRE_21["internal diffuse reflectance"]
    precise(result.flux("back"), reflectance)
    precise(result.flux("out"), 1 - reflectance, 0.002)
    total = result.path("back", "glass:top total")
    agree([total], [1 - 1 / 1.5**2])


@pytest.mark.parametrize(
    ("case", "absorption", "length"),
    [(cases_media.VOL_01, 0.02, 50.0), (cases_media.VOL_02, 0.013, 27.0)],
    ids=["VOL-01", "VOL-02"],
)
def test_absorbing_slab_of_index_one(tmp_path, case, absorption, length):
    """VOL-01, VOL-02: straight through exactly; Lambertian light started inside, by sampling."""
    study = Study(tmp_path, length="mm")
    study.medium("smoke", 1.0, absorption)
    study.part("slab", box((-FAR, -FAR, -length), (FAR, FAR, 0), TAGS), medium="smoke")
    study.source(
        "beam", disc={"center": (0, 0, 1), "normal": DOWN, "radius": 1}, pattern={"collimated": 0}
    )
    study.source(
        "inside", disc={"center": (0, 0, 0), "normal": DOWN, "radius": 1}, pattern="lambertian"
    )
    study.detector("passed", (0, 0, -length - 1), UP, (FAR, FAR))
    flux = study.trace(4).run.detector("passed")["flux"]
    straight = flux.sel(group="beam").values
    assert straight == pytest.approx(case["internal transmittance, normal"], rel=1e-9)
    mean = flux.sel(group="inside").values
    precise(of_batches(mean), case["diffuse (Lambertian inside) internal transmittance 2 E3(tau)"])


@pytest.mark.parametrize(
    ("case", "absorption", "length", "angle", "index"),
    [(cases_media.VOL_01, 0.02, 50.0, 40.0, 1.5), (cases_media.VOL_02, 0.013, 27.0, 65.0, 1.6)],
    ids=["VOL-01", "VOL-02"],
)
def test_oblique_way_through_a_slab(tmp_path, case, absorption, length, angle, index):
    """VOL-01, VOL-02: the weight of the light that is refracted in and out, per ray that does so.

    Every such ray has the same weight, so that the ratio is exact to rounding.
    """
    study = Study(tmp_path, length="mm")
    study.medium("glass", index, absorption)
    study.part("slab", box((-1000, -1000, -length), (1000, 1000, 0), TAGS), medium="glass")
    toward = (sin(radians(angle)), 0.0, -cos(radians(angle)))
    study.source(
        "beam",
        disc={"center": (0, 0, 10), "normal": toward, "radius": 1},
        pattern={"collimated": 0},
    )
    study.detector("passed", (0, 0, -length - 1), UP, (2000, 2000))
    result = study.trace(1)
    row = dict(result.path_rows("passed"))["slab:top through, slab:bottom through"]
    flux = result.path("passed", "slab:top through", "slab:bottom through").value
    count = int(result.run.ledger["count"].values[row])
    per_ray = flux * result.run.rays / count
    assert per_ray == pytest.approx(case["internal transmittance, oblique"], rel=1e-9)
    assert per_ray < exp(-absorption * length)
