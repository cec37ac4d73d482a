"""The contract of all detectors; planes of cells; the response of the eye."""

from math import inf

import numpy as np
import pytest

from lumentrace.models.detectors.plane import bin_of, efficacy, intersect
from lumentrace.models.registry import DETECTORS
from lumentrace.photometry import luminosity_table
from tests.unit.world_study import built, new_study

LUMINOSITY = luminosity_table()
BY_NAME = pytest.mark.parametrize("model", DETECTORS, ids=lambda model: model.name)
CENTER, NORMAL, ACROSS = np.array([10.0, -20.0, 30.0]), np.array([0, 0.6, 0.8]), [1.0, 0, 0]
UP = np.cross(NORMAL, ACROSS)
SIZE, CELLS = (4.0, 2.0), (4, 3)
PLANE, LUX, BOTH, PLAIN = range(4)


@pytest.fixture(scope="module")
def detectors(tmp_path_factory):
    study = new_study(tmp_path_factory.mktemp("detectors"))
    plane = {"center": CENTER, "normal": NORMAL, "size": SIZE, "cells": CELLS, "across": ACROSS}
    study.detector("plane", **plane)
    study.detector("lux", **{**plane, "cells": (1, 2)}, counts="illuminance")
    study.detector("both", **{**plane, "cells": (2, 1)}, side="both")
    study.detector("plain", (0, 0, 0), (0, 0, 1), (2, 2))
    return built(study).arrays.detectors


def at(u, v):
    """Scene's point at shares (u, v) of the rectangle."""
    return CENTER + (2 * u - 1) * SIZE[0] / 2 * np.array(ACROSS) + (2 * v - 1) * SIZE[1] / 2 * UP


def counted(detectors, d, u, v, front=True, wavelength=555.0):
    return bin_of(detectors, d, u, v, front, wavelength, LUMINOSITY)


@BY_NAME
def test_every_cell_can_be_hit_and_no_other(detectors, model):
    """All (u, v) in [0, 1) fall into the detector's own cells, and each gets its share."""
    for d in (PLANE, LUX, BOTH, PLAIN):
        if detectors.model[d] != DETECTORS.index(model):
            continue
        n = 60
        cells = [
            model.bin_of(detectors, d, (i + 0.5) / n, (j + 0.5) / n, True, 555.0, LUMINOSITY)[0]
            for i in range(n)
            for j in range(n)
        ]
        own = np.arange(detectors.cell_first[d], detectors.cell_first[d + 1])
        found, counts = np.unique(cells, return_counts=True)
        assert found.tolist() == own.tolist()
        assert set(counts.tolist()) == {n * n // len(own)}


def test_cells_run_across_then_up(detectors):
    first = detectors.cell_first[PLANE]
    assert counted(detectors, PLANE, 0.0, 0.0)[0] == first
    assert counted(detectors, PLANE, 0.3, 0.0)[0] == first + 1
    assert counted(detectors, PLANE, 0.99, 0.0)[0] == first + 3
    assert counted(detectors, PLANE, 0.0, 0.4)[0] == first + 4
    assert counted(detectors, PLANE, 0.99, 0.99)[0] == first + 11


def test_edges_belong_to_the_next_cell(detectors):
    first = detectors.cell_first[PLANE]
    below = np.nextafter(0.25, 0)
    assert counted(detectors, PLANE, below, 0.0)[0] == first
    assert counted(detectors, PLANE, 0.25, 0.0)[0] == first + 1
    last = np.nextafter(1.0, 0)
    assert counted(detectors, PLANE, last, last)[0] == first + 11


def test_sides(detectors):
    """A front detector takes nothing from behind, one of both sides takes it in the same cell."""
    assert counted(detectors, PLANE, 0.5, 0.5, front=False)[0] == -1
    assert counted(detectors, BOTH, 0.7, 0.5, front=False) == counted(detectors, BOTH, 0.7, 0.5)
    assert counted(detectors, BOTH, 0.7, 0.5)[0] == detectors.cell_first[BOTH] + 1


def test_response(detectors):
    assert counted(detectors, PLANE, 0.5, 0.5)[1] == 1.0
    assert counted(detectors, PLANE, 0.5, 0.5, wavelength=940.0)[1] == 1.0
    assert counted(detectors, LUX, 0.5, 0.5)[1] == 683.0  # V(555 nm) = 1; CIE 018:2019
    assert counted(detectors, LUX, 0.5, 0.5, wavelength=940.0)[1] == 0.0


def test_efficacy():
    """683 lm/W V, linear between the table's steps, 0 beyond 360 nm to 830 nm.

    V(510 nm) = 0.503, V(555 nm) = 1, V(610 nm) = 0.503, V(650 nm) = 0.107; CIE 018:2019.
    """
    values = {510.0: 0.503, 555.0: 1.0, 610.0: 0.503, 650.0: 0.107}
    for wavelength, v in values.items():
        assert efficacy(wavelength, LUMINOSITY) == pytest.approx(683 * v, rel=1e-6)
    for wavelength in (360.0, 500.0, 612.0, 829.0):
        here, there = (efficacy(w, LUMINOSITY) for w in (wavelength, wavelength + 1))
        between = efficacy(wavelength + 0.25, LUMINOSITY)
        assert between == pytest.approx(0.75 * here + 0.25 * there, rel=1e-12)
    assert efficacy(830.0, LUMINOSITY) == 683 * LUMINOSITY[-1] > 0
    for wavelength in (359.999, 830.001, 100.0, 1e5):
        assert efficacy(wavelength, LUMINOSITY) == 0.0


@pytest.mark.parametrize("side", [1.0, -1.0])
def test_place_of_a_hit(detectors, side):
    """t > 0 before and < 0 behind the origin; (u, v) along across and along normal x across."""
    rng = np.random.default_rng(1)
    for u, v in rng.uniform(0.001, 0.999, (200, 2)):
        origin = at(u, v) + side * rng.uniform(0.1, 5) * NORMAL + rng.normal(size=3)
        direction = at(u, v) - origin
        length = np.linalg.norm(direction)
        for sign in (1.0, -1.0):
            t, found_u, found_v = intersect(
                detectors, PLANE, tuple(origin), tuple(sign * direction / length)
            )
            assert (sign * t, found_u, found_v) == pytest.approx((length, u, v), rel=1e-9)


def test_misses(detectors):
    down = tuple(-NORMAL)

    def t_above(u, v):
        return intersect(detectors, PLANE, tuple(at(u, v) + NORMAL), down)[0]

    assert t_above(0.5, 0.5) == pytest.approx(1)
    for u, v in ((-0.01, 0.5), (1.01, 0.5), (0.5, -0.01), (0.5, 1.01)):
        assert t_above(u, v) == inf
    in_plane = intersect(detectors, PLANE, tuple(CENTER + NORMAL), (1.0, 0.0, 0.0))
    assert in_plane[0] == inf


def test_upper_edges_do_not_belong_to_it(detectors):
    """A plane of size 2 about the origin, asked at coordinates that are exact."""
    inner = 1 - 1e-12
    for (x, y), inside in {
        (-1.0, -1.0): True,
        (1.0, 0.0): False,
        (0.0, 1.0): False,
        (inner, inner): True,
    }.items():
        t, u, v = intersect(detectors, PLAIN, (x, y, 1.0), (0.0, 0.0, -1.0))
        assert (t == 1.0) == inside
        assert t == inf or (0 <= u < 1 and 0 <= v < 1)
