"""Mirrors that repeat: pipes and grooves, by tracing.

Sources and values in cases_rays.py.
"""

from math import cos, radians, sin

import numpy as np
import pytest

from tests.reference import cases_rays as cases
from tests.worlds import Mesh, Study, agree, joined, precise, rectangle

LIGHT_MM_PER_PS = 0.299792458  # c0, exact in the SI


def pipe(width, height, length):
    """Four mirror walls about the z axis, corner in the origin, as one sheet seen from inside."""
    vertex = np.array(
        [
            (x, y, z)
            for z in (0, length)
            for x, y in ((0, 0), (width, 0), (width, height), (0, height))
        ],
        float,
    )
    corner = []
    for i in range(4):
        j = (i + 1) % 4
        corner += [(j, i, i + 4), (j, i + 4, j + 4)]
    return Mesh(vertex, np.array(corner))


def test_one_ray_in_a_mirror_pipe(tmp_path):
    """LGT-08: reflections, length, place and weight after ten bounces. z <= 4 for the weight,
    which roulette samples from the eighth event on; 1e-6 for the rest."""
    case = cases.LGT_08
    study = Study(tmp_path, length="mm")
    study.finish("silver", mirror=0.98)
    study.part("pipe", pipe(10, 10, 100), medium="sheet", finish="silver")
    direction = np.array([0.3, 0.2, 0.5]) / np.linalg.norm([0.3, 0.2, 0.5])
    study.source(
        "ray",
        disc={"center": (2, 7, 1e-4), "normal": direction, "radius": 1e-6},
        pattern={"collimated": 0},
    )
    study.detector("end", (5, 5, 100), (0, 0, -1), (10, 10), cells=(50, 50), across=(-1, 0, 0))
    result = study.trace(4)
    ((text, row),) = result.path_rows("end")
    assert text == "pipe:default mirror x3"  # three or more
    ledger = result.run.ledger
    bounces = float(ledger["run_mean"].values[row, 0])
    assert bounces == pytest.approx(case["number of reflections"], rel=1e-9)
    start = 1e-4 / direction[2]  # the source stands that far inside the pipe
    length = float(ledger["optical_length"].values[row]) + start
    assert length == pytest.approx(case["path length"], rel=1e-6)
    assert length / LIGHT_MM_PER_PS == pytest.approx(case["transit time in air (n=1)"], rel=1e-6)
    precise(result.flux("end"), case["transmission"])
    map_ = result.run.map("end")
    up, across = np.unravel_index(np.nanargmax(map_["value"].values), map_["value"].shape)
    # across is -x here, so up is normal x across = +y; cells are 0.2 mm wide
    assert abs(5 - map_["across"].values[across] - case["exit x"]) <= 0.1 + 1e-6
    assert abs(5 + map_["up"].values[up] - case["exit y"]) <= 0.1 + 1e-6


def test_lambertian_light_in_a_mirror_pipe(tmp_path):
    """LGT-10: mean transmission of a square pipe; standard error <= 0.15 %."""
    study = Study(tmp_path, length="mm")
    study.finish("silver", mirror=0.95)
    study.part("pipe", pipe(10, 10, 60), medium="sheet", finish="silver")
    square = {"center": (5, 5, 0), "normal": (0, 0, 1), "across": (1, 0, 0), "size": (10, 10)}
    study.source("lamp", rectangle=square, pattern="lambertian")
    study.detector("end", (5, 5, 60), (0, 0, -1), (10, 10))
    precise(study.trace(4).flux("end"), cases.LGT_10["mean transmission"])


@pytest.mark.parametrize(
    ("case", "full_angle", "reflectance"),
    [(cases.STR_17, 28.0, 0.05), (cases.STR_18, 20.5, 0.1)],
    ids=["STR-17", "STR-18"],
)
def test_groove(tmp_path, case, full_angle, reflectance):
    """STR-17, STR-18: a beam into a V of two mirrors: how often it is reflected, what returns.

    Up to seven events nothing is sampled: then the value is exact to 1e-9, else z <= 4.
    """
    study = Study(tmp_path, length="mm")
    study.finish("dark", mirror=reflectance)
    half = radians(full_angle / 2)
    x, z = 1000 * sin(half), 1000 * cos(half)
    vertex = np.array([(0, -50, 0), (0, 50, 0), (x, 50, z), (x, -50, z), (-x, 50, z), (-x, -50, z)])
    corner = np.array([(0, 3, 2), (0, 2, 1), (0, 1, 4), (0, 4, 5)])
    study.part("groove", Mesh(vertex.astype(float), corner), medium="sheet", finish="dark")
    study.source(
        "beam",
        disc={"center": (1, 0, 900), "normal": (0, 0, -1), "radius": 0.5},
        pattern={"collimated": 0},
    )
    study.detector("back", (0, 0, 1100), (0, 0, -1), (2000, 2000))
    result = study.trace(1)
    ((text, row),) = result.path_rows("back")
    bounces = case["number of reflections"]
    assert text == "groove:default mirror x3"
    assert result.run.ledger["run_mean"].values[row, 0] == pytest.approx(bounces, rel=1e-12)
    if bounces <= 7:
        assert result.flux("back").value == pytest.approx(case["power returned"], rel=1e-9)
    else:
        agree([result.flux("back")], [case["power returned"]])


def test_corner_cube(tmp_path):
    """IMG-13: light from six directions comes back as it went, mirrored through the corner."""
    study = Study(tmp_path, length="mm")
    study.finish("silver", mirror=1.0)
    side = rectangle((10, 10), (5, 5, 0))
    walls = joined(*(side._replace(vertex=np.roll(side.vertex, k, axis=1)) for k in range(3)))
    study.part("corner", walls, medium="sheet", finish="silver")
    places = [(a, b) for a in (1.0, 1.5, 2.0) for b in (1.0, 1.5, 2.0) if a != b]
    slant = np.full(3, 1 / np.sqrt(3))
    u = np.array([1, -1, 0]) / np.sqrt(2)
    v = np.cross(slant, u)
    for i, (a, b) in enumerate(places):
        offset = (a - 1.5) * u + (b - 1.5) * v
        study.source(
            f"beam{i}",
            disc={"center": 8 * slant + offset, "normal": -slant, "radius": 1e-6},
            pattern={"collimated": 0},
        )
        # a cell of 1e-4 mm where the mirrored light must arrive, 1000 mm away
        study.detector(f"back{i}", 1000 * slant - offset, -slant, (1e-4, 1e-4), across=u)
    result = study.trace(1)
    for i in range(len(places)):
        assert result.flux(f"back{i}").value == pytest.approx(1.0, rel=1e-9)
