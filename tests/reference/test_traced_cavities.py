"""Inter-reflections in cavities, part by part, by tracing.

z <= 4, with a family-wise limit where there are many values. Sources stand beside the values in
cases_cavities.py.
"""

import numpy as np
import pytest

from tests.reference import cases_cavities as cases
from tests.worlds import (
    BOX_SIDES,
    Estimate,
    Study,
    agree,
    box,
    hollow,
    of_batches,
    precise,
    sphere,
)


@pytest.mark.parametrize(
    ("case", "reflectance", "opening", "name"),
    [
        (cases.VIE_22, 0.97, 0.03, "share of the input leaving through the ports"),
        (cases.STR_15, 0.10, 0.02, "effective reflectance"),
        (cases.STR_16, 0.25, 0.01, "effective reflectance"),
    ],
    ids=["VIE-22", "STR-15", "STR-16"],
)
def test_sphere_with_a_port(tmp_path, case, reflectance, opening, name):
    """VIE-22, STR-15, STR-16: rho f / (1 - rho (1 - f)) leaves, the rest stays in the wall.

    The port is a black cap of whole facets of 20480, so f is that of its area; the facets bend
    the sphere's uniform exchange by less than 1e-3 there.
    """

    def leaving(f):
        return reflectance * f / (1 - reflectance * (1 - f))

    assert case.agrees(name, leaving(opening))
    inner = sphere(5, 0.1)
    height = inner.vertex[inner.corner].mean(axis=1)[:, 2]
    port = height > 0.1 * (1 - 2 * opening)
    f = float(inner.areas[port].sum() / inner.area)
    assert f == pytest.approx(opening, rel=0.02)
    study = Study(tmp_path)
    study.finish("wall", diffuse=reflectance)
    study.finish("black", diffuse=0.0)
    tagged = inner._replace(tags=["port" if p else "wall" for p in port])
    study.part(
        "cavity", hollow(tagged), medium="opaque", finish={"default": "wall", "port": "black"}
    )
    study.source(
        "beam",
        disc={"center": (0, 0, 0), "normal": (0.6, 0, -0.8), "radius": 0.02},
        pattern={"collimated": 0},
    )
    result = study.trace(4)
    precise(result.absorbed("cavity:wall"), 1 - leaving(f))
    agree([result.absorbed("cavity:port")], [leaving(f)])


REFLECTANCE = {"x0": 0.5, "x1": 0.5, "y0": 0.5, "y1": 0.5, "floor": 0.2, "ceiling": 0.7}
FACES = dict(zip(BOX_SIDES, ("x=0", "x=L", "y=0", "y=W", "floor", "ceiling"), strict=True))


def room(study, reflectance):
    """The unit cube from inside, each face a tag with its own paint."""
    for tag, rho in reflectance.items():
        study.finish(f"paint_{tag}", diffuse=rho)
    finish = {tag: f"paint_{tag}" for tag in reflectance} | {"default": "paint_floor"}
    study.part("room", hollow(box((0, 0, 0), (1, 1, 1), BOX_SIDES)), medium="opaque", finish=finish)


def test_box_of_different_paints(tmp_path):
    """VIE-27: irradiance of each face from what it absorbs, and of two places on the floor.

    The places are squares of 0.1 m about the points: curvature shifts their means by less than
    0.2 %, below half a standard error.
    """
    study = Study(tmp_path)
    room(study, REFLECTANCE)
    study.source("ceiling", faces={"part": "room", "tag": "ceiling"}, pattern="lambertian")
    points = ((0.5, 0.5), (0.25, 0.25))
    for i, (x, y) in enumerate(points):
        study.detector(f"at{i}", (x, y, 1e-6), (0, 0, 1), (0.1, 0.1))
    result = study.trace(16)
    estimates, expected = [], []
    for tag, rho in REFLECTANCE.items():
        absorbed = result.absorbed(f"room:{tag}")
        estimates.append(Estimate(*(x / (1 - rho) for x in absorbed)))
        expected.append(cases.VIE_27[f"mean total irradiance on face {FACES[tag]}"])
    for estimate, value in zip(estimates, expected, strict=True):
        assert estimate.error <= 0.0025 * value
    for i, point in enumerate(points):
        estimates += result.cells(f"at{i}")
        expected.append(cases.VIE_27[f"total irradiance at floor point {point}"])
    agree(estimates, expected)


def test_uniform_grey_cube(tmp_path):
    """VIE-31: all faces emit 1 W/m2 and reflect 0.6: 2.5 W/m2 in each of 36 cells and face."""
    study = Study(tmp_path)
    room(study, dict.fromkeys(BOX_SIDES, 0.6))
    for tag in BOX_SIDES:
        study.source(f"from_{tag}", faces={"part": "room", "tag": tag}, pattern="lambertian")
    study.detector("floor", (0.5, 0.5, 1e-6), (0, 0, 1), (1, 1), cells=(6, 6))
    result = study.trace(8)
    uniform = cases.VIE_31["irradiance at every point of every face"]
    agree(result.cells("floor"), [uniform] * 36)
    for tag in BOX_SIDES:
        precise(result.absorbed(f"room:{tag}"), 0.4 * uniform, 0.002)


def test_internally_reflected_component(tmp_path):
    """VIE-29: 10000 lm in a closed cavity of 50.27 m2 and reflectance 0.5, here a cube.

    Planes 1 um before its faces count direct and reflected light; area means hold for any shape.
    """
    case = cases.VIE_29
    side = np.sqrt(4 * np.pi * 4 / 6)  # the area of the sphere of radius 2 m
    study = Study(tmp_path)
    study.finish("grey", diffuse=0.5)
    study.part(
        "room", hollow(box((0, 0, 0), (side,) * 3, ["wall"] * 6)), medium="opaque", finish="grey"
    )
    study.source(
        "lamp",
        point=(0.3 * side, 0.6 * side, 0.7 * side),
        flux={"lumens": 10000.0},
        pattern="isotropic",
    )
    middle = np.full(3, side / 2)
    for axis in range(3):
        for sign in (-1, 1):
            normal = -sign * np.eye(3)[axis]
            center = middle - normal * (side / 2 - 1e-6)
            across = np.eye(3)[(axis + 1) % 3]
            study.detector(
                f"plane{axis}{sign:+d}".replace("+", "p").replace("-", "m"),
                center, normal, (side, side), across=across, counts="illuminance",
            )  # fmt: skip
    result = study.trace(8)
    area = 6 * side**2
    names = [d["name"] for d in study.lists["detector"]]
    total = sum(result.run.detector(n)["flux"].sum("group").values for n in names) / area
    precise(of_batches(total), case["area-mean total illuminance"])
    ledger, direct = result.run.ledger["flux"].values, 0.0
    for n in names:
        direct = direct + sum(ledger[row] for text, row in result.path_rows(n) if text == "")
    direct = direct / area
    # every ray meets a wall first: nothing of this is left to chance
    assert direct.mean() == pytest.approx(case["area-mean direct illuminance"], rel=1e-5)
    precise(of_batches(total - direct), case["area-mean indirect illuminance"])
