"""Dry pairs: an opaque part or a sheet on a clear one, with air of no width between.

Closed forms for a wide plate of index 1.5, each event with the mean of R_s and R_p. Light of an
isotropic point inside leaves by the two cones of the critical angle c, (1 - cos c) / 2 each; the
rest, cos c, is guided to the painted sides. What a gap gives back as Lambertian light passes the
plate with T = integral of 2 sin cos (1 - R) / (1 + R), or returns. z <= 4.
"""

from math import asin, cos, pi, sin

import numpy as np
import pytest

from lumentrace.engine.sums import account_rows
from lumentrace.kernels.fresnel import unpolarised_reflectance
from tests.unit.engine_study import (
    DOWN,
    UP,
    account_of,
    path_texts,
    slab,
    sums_of,
    world_of,
)
from tests.worlds import Study, agree, joined, precise, rectangle

INDEX = 1.5
HALF = 15.0  # the plate is 1 thick: light that may leave does so long before its sides
GUIDED = cos(asin(1 / INDEX))
CONE = (1 - GUIDED) / 2
GRAZING = 2e-4  # share that enters within a thousandth of the critical angle and stays long


def plate_transmittance():
    """T of the plate for Lambertian light, by Gauss's rule in pieces toward grazing incidence."""
    node, weight = np.polynomial.legendre.leggauss(40)
    edges = pi / 2 * (1 - 0.5 ** np.arange(40))
    total = 0.0
    for low, high in zip(edges, edges[1:], strict=False):
        for x, w in zip(node, weight, strict=True):
            angle = (low + high) / 2 + x * (high - low) / 2
            r = unpolarised_reflectance(1.0, INDEX, cos(angle))
            total += w * (high - low) * sin(angle) * cos(angle) * (1 - r) / (1 + r)
    return total


T = plate_transmittance()
R = 1 - T


@pytest.fixture
def study(tmp_path):
    made = Study(tmp_path, length="mm")
    made.medium("clear", INDEX)
    made.finish("black", diffuse=0.0)
    made.finish("white", diffuse=0.8)
    made.finish("veil", diffuse=0.3, diffuse_through=0.5)
    finish = {"default": "uncoated", "side": "black"}
    made.part("plate", slab(-1, 0, HALF), medium="clear", finish=finish)
    return made


def point_inside(study):
    study.source("lamp", point=(0.1, 0.03, -0.5))


def backing(study, kind, finish, name="back", top=-1.0):
    """An opaque block or a sheet that lies under the plate, or with its foot on it."""
    if kind == "sheet":
        study.part(name, rectangle((2 * HALF, 2 * HALF), (0, 0, top)), medium=kind, finish=finish)
    else:
        study.part(name, slab(top - 1, top, HALF), medium=kind, finish=finish)


class Shares:
    """Where the light went, as shares of what was emitted."""

    def __init__(self, study, rounds=1):
        self.world = world_of(study)
        self.sums = sums_of(self.world, rounds)
        self.rows = account_rows(len(self.world.tag_names), len(self.world.part_names))
        assert self.sums.lost_count == 0

    def __getitem__(self, name):
        """Of a part, a part:tag, or "escaped"."""
        if name == "escaped":
            row = self.rows.escaped
        elif ":" in name:
            row = self.world.tag_names.index(name)
        else:
            row = self.rows.part + self.world.part_names.index(name)
        return account_of(self.world, self.sums, row)


@pytest.mark.parametrize("kind", ["opaque", "sheet"])
def test_total_reflection_keeps_light_off_a_black_backing(study, kind):
    """Guided light never touches the black that the plate lies on."""
    backing(study, kind, "black")
    point_inside(study)
    shares = Shares(study, rounds=3)
    precise(shares["plate:side"], GUIDED)
    agree([shares["back"], shares["escaped"]], [CONE, CONE])


def test_black_on_both_faces(study):
    backing(study, "opaque", "black")
    backing(study, "sheet", "black", "lid", 0.0)
    point_inside(study)
    shares = Shares(study)
    agree([shares["plate:side"], shares["back"], shares["lid"]], [GUIDED, CONE, CONE])
    assert shares["escaped"].value == 0


@pytest.mark.parametrize("kind", ["opaque", "sheet"])
def test_a_white_backing_cannot_send_light_into_the_guide(study, kind):
    """What it scatters enters the plate from air: it leaves by the top or comes back."""
    backing(study, kind, "white")
    point_inside(study)
    shares = Shares(study, rounds=2)
    left = CONE / (1 - 0.8 * R)
    agree(
        [shares["plate:side"], shares["back"], shares["escaped"]],
        [GUIDED, left * 0.2, CONE + left * 0.8 * T],
    )
    study.detector("over", (0, 0, 0.5), DOWN, (40, 40))
    world = world_of(study)
    cover = "back:default" if kind == "sheet" else "back:top"
    text = f"over: plate:bottom through, {cover} scatter, plate:bottom through, plate:top through"
    assert text in path_texts(world, sums_of(world))


def test_a_veil_under_the_plate_passes_light(study):
    """A sheet that scatters both ways: 0.3 back, 0.5 through, 0.2 lost, at each arrival."""
    backing(study, "sheet", "veil")
    point_inside(study)
    shares = Shares(study, rounds=2)
    arriving = CONE / (1 - 0.3 * R)
    agree(
        [shares["plate:side"], shares["back"], shares["escaped"]],
        [GUIDED, arriving * 0.2, CONE + arriving * (0.3 * T + 0.5)],
    )


def test_a_veil_lit_from_behind(study):
    """Light from below meets the sheet first; what it passes enters the plate from the gap."""
    backing(study, "sheet", "veil")
    study.source(
        "beam",
        disc={"center": (0.1, 0.03, -5), "normal": UP, "radius": 0.1},
        pattern={"collimated": 0},
    )
    shares = Shares(study, rounds=2)
    between = 0.5 / (1 - 0.3 * R)  # that goes up in the gap, all passes together
    agree(
        [shares["back"], shares["escaped"]],
        [0.2 * (1 + between * R), 0.3 + between * (T + 0.5 * R)],
    )
    assert shares["plate:side"].value < GRAZING


def patch(name="patch"):
    """A square as wide as the plate with one of 2 x 2 in its middle, all corners shared."""
    steps = (-HALF, -1.0, 1.0, HALF)
    tiles = []
    for x0, x1 in zip(steps, steps[1:], strict=False):
        for y0, y1 in zip(steps, steps[1:], strict=False):
            middle = x0 == y0 == -1.0
            tile = rectangle((x1 - x0, y1 - y0), ((x0 + x1) / 2, (y0 + y1) / 2, -1))
            tiles.append(tile.tagged(name if middle else "around"))
    return joined(*tiles)


@pytest.mark.parametrize("kind", ["opaque", "sheet"])
@pytest.mark.parametrize(("finish", "rho"), [("black", 0.0), ("white", 0.8)])
def test_light_emitted_into_a_gap(study, kind, finish, rho):
    """An emitting face dry against the plate starts in air: T passes, none is guided."""
    study.part("die", patch(), medium=kind, finish=finish)
    study.source("lamp", faces={"part": "die", "tag": "patch"}, pattern="lambertian")
    shares = Shares(study, rounds=2)
    assert "gap to plate" in shares.world.source_start[0]
    left = 1 / (1 - rho * R)
    precise(shares["escaped"], left * T)
    agree([shares["die"]], [left * (1 - rho) * R])
    assert shares["plate:side"].value < GRAZING


def test_light_emitted_by_a_clear_face_starts_outside(study):
    study.source("lamp", faces={"part": "plate", "tag": "top"}, pattern="lambertian")
    shares = Shares(study)
    assert shares["escaped"].value == pytest.approx(1, rel=1e-12)
