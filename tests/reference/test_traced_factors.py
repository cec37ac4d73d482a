"""Configuration factors and illuminances in black surroundings, by tracing.

Claims and tolerances stand in each test; z <= 4, with a family-wise limit where there are many
values. Point values are compared as means over cells of a closed form that is itself held to the
point values at 1e-9. Sources stand beside the values in cases_factors.py.
"""

from math import cos, pi, radians, sin

import numpy as np
import pytest

from tests.reference import cases_factors as cases
from tests.reference.closed_forms import (
    cell_means,
    corners,
    disc_to_disc,
    element_to_disc,
    element_to_polygon,
)
from tests.worlds import (
    Study,
    agree,
    cylinder,
    hollow,
    of_batches,
    polygon,
    precise,
    rectangle,
    sphere,
)

X, Y, Z = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)
BLACK = {"diffuse": 0.0}


def minus(vector):
    return tuple(-x for x in vector)


@pytest.fixture
def study(tmp_path):
    made = Study(tmp_path)
    made.finish("black", **BLACK)
    return made


def test_coaxial_discs(study):
    """VIE-01: a disc source on an equal disc of 256 sides (equal area; its share is 4e-5 off).

    Standard error <= 0.15 %.
    """
    assert cases.VIE_01.agrees("F12", disc_to_disc(1.0, 1.0, 1.0))
    study.part("target", polygon(256, 1.0, 1.0), medium="sheet", finish="black")
    study.source("lamp", disc={"center": (0, 0, 0), "normal": Z, "radius": 1}, pattern="lambertian")
    result = study.trace(16)
    precise(result.absorbed("target:default"), cases.VIE_01["F12"])


def test_coaxial_discs_from_faces(study):
    """VIE-02: the faces of a sheet shine on a larger disc; both of 256 sides and equal area."""
    assert cases.VIE_02.agrees("F12", disc_to_disc(0.1, 0.2, 0.5))
    assert cases.VIE_02.agrees("F21", disc_to_disc(0.2, 0.1, 0.5))
    study.part("target", polygon(256, 0.2, 0.5), medium="sheet", finish="black")
    study.part("emitter", polygon(256, 0.1), medium="sheet", finish="black")
    study.source("lamp", faces={"part": "emitter"}, pattern="lambertian")
    agree([study.trace(8).absorbed("target:default")], [cases.VIE_02["F12"]])


def test_rectangles(study):
    """VIE-04, VIE-06: equal opposed squares, and squares at right angles with a common edge."""
    square = {"center": (0.5, 0.5, 0), "normal": Z, "across": X, "size": (1, 1)}
    study.source("lamp", rectangle=square, pattern="lambertian")
    study.detector("opposed", (0.5, 0.5, 1), minus(Z), (1, 1))
    study.detector("upright", (0, 0.5, 0.5), X, (1, 1), across=Y)
    result = study.trace(16)
    agree(
        [result.flux("opposed"), result.flux("upright")],
        [cases.VIE_04["F12"], cases.VIE_06["F12"]],
    )


def test_sphere_over_disc(study):
    """VIE-08: any sphere; here 5120 facets under a Lambertian pattern, disc of 256 sides."""
    study.part("target", polygon(256, 1.0), medium="sheet", finish="black")
    study.part("ball", sphere(4, 0.2).moved((0, 0, 0.5)), medium="opaque", finish="black")
    study.source("lamp", faces={"part": "ball"}, pattern="lambertian")
    result = study.trace(8)
    agree([result.absorbed("target:default")], [cases.VIE_08["F sphere to disc"]])


def test_elements_under_a_disc(study):
    """VIE-10: a row of parallel cells from the axis outward, and one tilted by 40 degrees."""
    for offset in (0, 0.3, 1.2):
        name = f"F element to disc, offset {offset} m"
        assert cases.VIE_10.agrees(name, element_to_disc(0.5, 1.0, offset))
    tilt = (sin(radians(40)), 0.0, -cos(radians(40)))
    across = (cos(radians(40)), 0.0, sin(radians(40)))
    name = "F element to disc, on axis, element tilted 40 deg"
    tilted = element_to_polygon((0, 0, 1), tilt, polygon(2000, 0.5).vertex[:-1])
    assert tilted == pytest.approx(cases.VIE_10[name], rel=1e-5)  # 2000 sides for a disc

    study.source(
        "lamp", disc={"center": (0, 0, 0), "normal": Z, "radius": 0.5}, pattern="lambertian"
    )
    study.detector("row", (0.6, 0, 1), minus(Z), (1.4, 0.2), cells=(7, 1))
    study.detector("tilted", (0, 0, 1), tilt, (0.1, 0.1), across=across)
    result = study.trace(16)
    # irradiance is exitance x factor; the source's exitance is 1 W over its area
    area = pi * 0.25
    means = cell_means(
        lambda p: element_to_disc(0.5, 1.0, np.hypot(p[:, 0], p[:, 1])) / area,
        (0.6, 0, 1), X, Y, (1.4, 0.2), (7, 1),
    )  # fmt: skip
    agree(result.cells("row"), means)
    up = np.cross(tilt, across)
    mean = cell_means(
        lambda p: element_to_polygon(p, tilt, polygon(2000, 0.5).vertex[:-1]) / area,
        (0, 0, 1), across, up, (0.1, 0.1), (1, 1),
    )  # fmt: skip
    agree(result.cells("tilted"), mean)


def test_point_and_elements_before_a_rectangle(study):
    """VIE-12: 1000 lm from a point on a rectangle; elements facing it, parallel and upright."""
    window = corners((0, 0), (1, 2), 1.5)
    facing = {"parallel": Z, "perpendicular": X}
    for name, normal in facing.items():
        factor = element_to_polygon((0, 0, 0), normal, window)
        assert cases.VIE_12.agrees(f"F {name} element to rectangle", factor)

    study.source("point", point=(0, 0, 0), flux={"lumens": 1000.0}, pattern="isotropic")
    study.source(
        "window",
        rectangle={"center": (0.5, 1, 1.5), "normal": minus(Z), "across": X, "size": (1, 2)},
        flux={"lumens": 1000.0},
        pattern="lambertian",
    )
    study.detector("rectangle", (0.5, 1, 1.4999999), minus(Z), (1, 2), counts="illuminance")
    study.detector("parallel", (0, 0, 0), Z, (0.2, 0.2), counts="illuminance")
    study.detector("perpendicular", (0, 0, 0), X, (0.2, 0.2), across=Y, counts="illuminance")
    result = study.trace(16)
    agree(
        [result.flux("rectangle")],
        [cases.VIE_12["flux on the rectangle from an isotropic 1000 lm point source"]],
    )
    for name, normal in facing.items():
        across = Y if normal == X else X
        mean = cell_means(
            lambda p, n=normal: 500 * element_to_polygon(p, n, window),
            (0, 0, 0), across, np.cross(normal, across), (0.2, 0.2), (1, 1),
        )  # fmt: skip
        agree([of_batches(result.run.detector(name)["flux"].sel(group="window") / 0.04)], mean)


def test_inside_of_a_cylinder(study):
    """VIE-14: from base to base and side, from side to base and to itself; 256 sides."""
    tube = cylinder(256, 1.0, 0.0, 2.0, ("base", "side", "top"))
    study.part("tube", hollow(tube), medium="opaque", finish="black")
    for tag in ("base", "side"):
        study.source(tag, faces={"part": "tube", "tag": tag}, pattern="lambertian")
    result = study.trace(16)
    agree(
        [
            result.absorbed("tube:top", "base"),
            result.absorbed("tube:side", "base"),
            result.absorbed("tube:base", "side"),
            result.absorbed("tube:side", "side"),
        ],
        [
            cases.VIE_14["F base to base"],
            cases.VIE_14["F base to side"],
            cases.VIE_14["F side to one base"],
            cases.VIE_14["F side to itself"],
        ],
    )


def test_concentric_spheres(study):
    """VIE-16: the outer sphere shines inward. By reciprocity exact for facets too.

    Both spheres have the same 1280 facets, so that their areas are as 1 to 4.
    """
    study.part("shell", hollow(sphere(3, 2.0).tagged("inside")), medium="opaque", finish="black")
    study.part("ball", sphere(3, 1.0), medium="opaque", finish="black")
    study.source("lamp", faces={"part": "shell", "tag": "inside"}, pattern="lambertian")
    result = study.trace(16)
    agree(
        [result.absorbed("ball:default"), result.absorbed("shell:inside")],
        [cases.VIE_16["F outer to inner"], cases.VIE_16["F outer to itself"]],
    )


@pytest.mark.parametrize(
    ("case", "intensity", "height", "radii"),
    [(cases.VIE_17, 1000.0, 2.0, (0, 1, 3)), (cases.VIE_18, 750.0, 3.2, (0, 1.5, 4))],
    ids=["VIE-17", "VIE-18"],
)
def test_point_over_a_plane(study, case, intensity, height, radii):
    """VIE-17, VIE-18: a row of level cells, and upright planes that face the foot point."""

    def level(p):
        return intensity * height / (p[:, 0] ** 2 + p[:, 1] ** 2 + height**2) ** 1.5

    def upright(p):
        return intensity * p[:, 0] / (p[:, 0] ** 2 + p[:, 1] ** 2 + (p[:, 2] - height) ** 2) ** 1.5

    for r in radii:
        point = np.array([[r, 0.0, 0.0]])
        assert case.agrees(f"horizontal illuminance at {r} m", level(point)[0])
        name = f"vertical illuminance (facing the foot point) at {r} m"
        assert case.agrees(name, upright(point)[0])

    study.source(
        "lamp", point=(0, 0, height), flux={"lumens": 4 * pi * intensity}, pattern="isotropic"
    )
    row = ((2.1, 0, 0), X, Y, (4.8, 0.6), (8, 1))
    study.detector("row", row[0], Z, row[3], cells=row[4], counts="illuminance")
    for i, r in enumerate(radii[1:]):
        study.detector(f"wall{i}", (r, 0, 0), minus(X), (0.6, 0.6), across=Y, counts="illuminance")
    result = study.trace(8)
    estimates = result.cells("row")
    expected = list(cell_means(level, *row))
    for i, r in enumerate(radii[1:]):
        estimates += result.cells(f"wall{i}")
        expected += list(
            cell_means(upright, (r, 0, 0), Y, np.cross(minus(X), Y), (0.6, 0.6), (1, 1))
        )
    agree(estimates, expected)


def test_ceiling_panel(study):
    """VIE-41: 1 m2 of 1000 cd/m2, 2 m over a grid of 9 x 9 cells."""
    panel = corners((-0.5, -0.5), (0.5, 0.5), 2.0)
    for x, y in (("0", "0"), ("1", "0"), ("1.5", "1.5")):
        exact = 1000 * pi * element_to_polygon((float(x), float(y), 0), Z, panel)
        assert cases.VIE_41.agrees(f"illuminance at ('{x}', '{y}')", exact)
    study.source(
        "panel",
        rectangle={"center": (0, 0, 2), "normal": minus(Z), "across": X, "size": (1, 1)},
        flux={"lumens": cases.VIE_41["total flux of the panel"]},
        pattern="lambertian",
    )
    floor = ((0.8, 0.8, 0), X, Y, (1.8, 1.8), (9, 9))
    study.detector("floor", floor[0], Z, floor[3], cells=floor[4], counts="illuminance")
    result = study.trace(16)
    expected = cell_means(lambda p: 1000 * pi * element_to_polygon(p, Z, panel), *floor)
    agree(result.cells("floor"), expected)


@pytest.mark.parametrize("obstructed", [False, True])
def test_light_from_a_lit_square(study, obstructed):
    """VIE-39: a white square under a parallel beam of 500 lx lights planes above and beside it.

    With and without a black square half way up, which the beam starts below.
    """

    def above(p):
        """The obstruction hides its central projection on the floor, twice as large and away."""
        factor = element_to_polygon(p, minus(Z), corners((-2, -2), (2, 2), 0))
        if not obstructed:
            return 400 * factor
        hidden = [
            element_to_polygon(
                q, minus(Z), corners((-1 - q[0], -1 - q[1]), (1 - q[0], 1 - q[1]), 0)
            )
            for q in p
        ]
        return 400 * (factor - hidden)

    def beside(p):
        return 400 * element_to_polygon(p, X, corners((-2, -2), (2, 2), 0))

    name = "(c) illuminance with obstruction" if obstructed else "(a) illuminance"
    assert cases.VIE_39.agrees(name, above(np.array([[0.0, 0.0, 3.0]]))[0])
    study.finish("paint", diffuse=0.8)
    study.part("floor", rectangle((4, 4)), medium="sheet", finish="paint")
    square = {"center": (0, 0, 0.5), "normal": minus(Z), "across": X, "size": (4, 4)}
    study.source("beam", rectangle=square, flux={"lumens": 8000.0}, pattern={"collimated": 0})
    study.detector("above", (0, 0, 3), minus(Z), (0.4, 0.4), counts="illuminance")
    expected = list(cell_means(above, (0, 0, 3), X, minus(Y), (0.4, 0.4), (1, 1)))
    if obstructed:
        plate = rectangle((1, 1), (0, 0, 1.5))
        study.part("plate", plate, medium="sheet", finish="black")
    else:
        assert cases.VIE_39.agrees("(b) illuminance", beside(np.array([[-3.0, 0.0, 1.0]]))[0])
        study.detector("beside", (-3, 0, 1), X, (0.4, 0.4), across=Y, counts="illuminance")
        expected += list(cell_means(beside, (-3, 0, 1), Y, Z, (0.4, 0.4), (1, 1)))
    result = study.trace(8)
    agree([result.cells(d["name"])[0] for d in study.lists["detector"]], expected)


def test_shadow_of_a_disc(tmp_path):
    """POS-14: nothing falls in the umbra, all of it beyond the penumbra, some of it between."""
    study = Study(tmp_path, length="mm")
    study.finish("black", **BLACK)
    # its 256 sides touch the disc from outside
    study.part("stop", polygon(256, 8 / cos(pi / 256), 100.0), medium="sheet", finish="black")
    study.source(
        "lamp", disc={"center": (0, 0, 0), "normal": Z, "radius": 20}, pattern="lambertian"
    )
    study.detector("screen", (0, 0, 150), minus(Z), (70, 70), cells=(70, 70))
    result = study.trace(16)
    agree([result.absorbed("stop:default")], [disc_to_disc(20.0, 8.0, 100.0)])

    flux = result.cell_flux("screen")
    middle = np.arange(70) - 34.5
    near = np.hypot(*(np.abs(np.meshgrid(middle, middle)) - 0.5))
    far = np.hypot(*(np.abs(np.meshgrid(middle, middle)) + 0.5))
    umbra = cases.POS_14["umbra radius (negative: antumbra of that size)"]
    penumbra = cases.POS_14["penumbra outer radius"]
    assert (far <= umbra).sum() == 4
    assert flux[far <= umbra].sum() == cases.POS_14["centre irradiance / unobstructed"] == 0.0
    assert flux[(near > umbra + 1) & (far < umbra + 4)].sum() > 0.0

    clear = cell_means(
        lambda p: element_to_disc(20.0, 150.0, np.hypot(p[:, 0], p[:, 1])) / (pi * 400),
        (0, 0, 150), X, minus(Y), (70, 70), (70, 70),
    ).reshape(70, 70)  # fmt: skip
    outside = near >= penumbra
    agree([of_batches(flux[outside].sum(axis=0))], [clear[outside].sum()])
    rim = (near >= umbra + 4) & (far <= penumbra - 6)
    dimmed = of_batches(flux[rim].sum(axis=0))
    assert dimmed.z(clear[rim].sum()) < -4
