"""Ways through bodies and light trapped in them, by tracing.

z <= 4. Sources stand beside the values in cases_media.py.
"""

import numpy as np
import pytest

from tests.reference import cases_media as cases
from tests.worlds import Study, agree, box, hollow, precise, sphere


def test_mean_way_through_a_sphere(tmp_path):
    """VOL-19: 4 V / S under isotropic light, from what a weak absorber takes; error <= 0.15 %.

    A concentric shell of the same 5120 facets shines inward, so that exactly the ratio of areas
    arrives; 4 V / S is exact for a body of facets too, and is 8e-4 below the sphere's here.
    """
    study = Study(tmp_path, length="mm")
    ball, shell = sphere(4, 3.0), sphere(4, 3.05)
    expected = 4 * ball.volume / ball.area
    assert expected == pytest.approx(cases.VOL_19["mean path length"], rel=1e-3)
    absorption = 1e-9  # 1/mm; what follows from its square is below rounding of the tolerance
    study.finish("black", diffuse=0.0)
    study.medium("faint", 1.0, absorption)
    study.part("ball", ball, medium="faint")
    study.part("shell", hollow(shell.tagged("inside")), medium="opaque", finish="black")
    study.source("lamp", faces={"part": "shell", "tag": "inside"}, pattern="lambertian")
    found = study.trace(2).bulk("ball")
    precise(found, expected * absorption * ball.area / shell.area)


def test_absorption_in_a_sphere(tmp_path):
    """VOL-21: a parallel beam that fills an index-matched sphere; 20480 facets of equal volume."""
    study = Study(tmp_path, length="mm")
    study.medium("dye", 1.0, 0.5)
    inscribed = sphere(5, 2.0)
    radius = 2.0 * (4 / 3 * np.pi * 2.0**3 / inscribed.volume) ** (1 / 3)
    study.part("ball", sphere(5, radius), medium="dye")
    study.source(
        "beam",
        disc={"center": (0, 0, 5), "normal": (0, 0, -1), "radius": 2.0},
        pattern={"collimated": 0},
    )
    study.detector("passed", (0, 0, -5), (0, 0, 1), (5, 5))
    result = study.trace(4)
    precise(result.bulk("ball"), cases.VOL_21["absorbed share"])
    precise(result.flux("passed"), cases.VOL_21["transmitted share"], 0.003)


LONG = 1e5  # mm: as good as endless beside a width of 1 mm


def test_share_trapped_in_a_slab(tmp_path):
    """LGT-04: isotropic light from within n = 1.5 that a face reflects totally; error <= 0.15 %.

    A plane below the source catches what goes down, half of it direct; of what goes up the
    slab's trapped share returns by total reflection.
    """
    study = Study(tmp_path, length="mm")
    study.medium("glass", 1.5)
    tags = ("edge", "edge", "edge", "edge", "bottom", "top")
    study.part("slab", box((-LONG, -LONG, -1), (LONG, LONG, 1), tags), medium="glass")
    study.source("lamp", point=(0, 0, 0.5), pattern="isotropic")
    study.detector("down", (0, 0, 0.25), (0, 0, 1), (2 * LONG, 2 * LONG), catch=True)
    result = study.trace(16)
    precise(result.path("down", "slab:top total"), cases.LGT_04["slab trapped share"] / 2)


@pytest.mark.parametrize("shape", ["square rod", "cube"])
def test_share_trapped_for_ever(tmp_path, shape):
    """LGT-04: what is still inside after 120 events, 40 at each pair of faces of the cube.

    By then less than 2e-4 of what can leave is still inside.
    """
    study = Study(tmp_path, length="mm")
    study.medium("glass", 1.5)
    length = 0.5 if shape == "cube" else LONG
    study.part("body", box((-0.5, -0.5, -length), (0.5, 0.5, length)), medium="glass")
    study.source("lamp", point=(0.1, 0.2, 0.15), pattern="isotropic")
    study.tables["trace"] = {"events_max": 120}
    result = study.trace(2)
    agree([result.fate("cut_off")], [cases.LGT_04[f"{shape} trapped share"]])


def test_total_reflection_returns_all(tmp_path):
    """LGT-04: at 45 degrees, beyond the critical angle, a face of n = 1.5 keeps all light."""
    study = Study(tmp_path, length="mm")
    study.medium("glass", 1.5)
    study.part("block", box((-5, -5, -5), (5, 5, 0)), medium="glass")
    slant = np.sqrt(0.5)
    study.source(
        "beam",
        disc={"center": (-1, 0, -1), "normal": (slant, 0, slant), "radius": 0.1},
        pattern={"collimated": 0},
    )
    study.detector("back", (0, 0, -2), (0, 0, 1), (9, 9), catch=True)
    result = study.trace(1)
    assert result.path("back", "block:default total").value == pytest.approx(1.0, rel=1e-12)
