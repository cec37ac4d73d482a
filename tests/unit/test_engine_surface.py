"""One surface event: the choice of a lobe, what is absorbed, and the ending of rays by chance.

Two parallel mirrors a (above) and b (below) with a beam between them: every weight is known
exactly, so that only the number of survivors is sampled (z <= 4).
"""

from math import exp

import numpy as np
import pytest

from lumentrace.engine.sums import account_rows
from lumentrace.engine.surface import choose_lobe
from lumentrace.models.registry import LOBES, number
from tests.unit.engine_study import (
    DOWN,
    UP,
    account_of,
    beam,
    path_texts,
    slab,
    sums_of,
    world_of,
)
from tests.worlds import ROUND, Study, agree, box, hollow, of_batches, rectangle

INCOMING = (0.6, 0.0, -0.8)


@pytest.fixture
def study(tmp_path):
    return Study(tmp_path, length="mm")


def finish_table(study, **shares):
    """(finishes, row) of a finish with these shares."""
    study.finish("mix", **shares)
    study.part("screen", rectangle((2, 2)), medium="sheet", finish="mix")
    beam(study, 1)
    arrays = world_of(study).arrays
    return arrays.finishes, arrays.tags.front[0]


@pytest.mark.parametrize(
    "shares",
    [
        {"diffuse": 0.3, "mirror": 0.2, "diffuse_through": 0.1},
        {"diffuse": 0.05, "mirror": 0.9},
        {"mirror": 1.0},
        {"diffuse_through": 1e-6},
    ],
)
def test_a_lobe_is_chosen_in_proportion_to_its_share(study, shares):
    """Of equal steps of the uniform each lobe gets its share of the sum; the sum is what leaves."""
    finishes, row = finish_table(study, **shares)
    n = 1500
    chosen = []
    for k in range(n):
        lobe, albedo, total = choose_lobe(finishes, row, INCOMING, 1.0, 1.0, (k + 0.5) / n)
        chosen.append(LOBES[finishes.lobe_model[lobe]].name)
        assert albedo == 1.0
        assert total == pytest.approx(sum(shares.values()), rel=1e-15)
    names = {"diffuse": "lambertian", "mirror": "mirror", "diffuse_through": "lambertian_through"}
    for key, share in shares.items():
        found = chosen.count(names[key]) / n
        assert found == pytest.approx(share / sum(shares.values()), abs=1.001 / n)
    last = choose_lobe(finishes, row, INCOMING, 1.0, 1.0, 1 - 2.0**-53)
    assert last[0] == choose_lobe(finishes, row, INCOMING, 1.0, 1.0, (n - 0.5) / n)[0]


def test_black_has_no_lobe(study):
    finishes, row = finish_table(study, diffuse=0.0)
    assert choose_lobe(finishes, row, INCOMING, 1.0, 1.0, 0.5) == (-1, 0.0, 0.0)


def test_the_uncoated_finish_is_the_first(study):
    finishes, row = finish_table(study, diffuse=0.5)
    lobe, albedo, total = choose_lobe(finishes, 0, INCOMING, 1.0, 1.5, 0.5)
    assert row > 0 and finishes.lobe_model[lobe] == number(LOBES, "fresnel")
    assert (albedo, total) == (1.0, 1.0)


def mirrors(study, share, **settings):
    """The beam starts toward a, 1/4 below the plane that counts each crossing."""
    study.finish("metal", mirror=share)
    study.part("a", rectangle((2, 2), (0, 0, 1)), medium="sheet", finish="metal")
    study.part("b", rectangle((2, 2), (0, 0, 0)), medium="sheet", finish="metal")
    study.detector("middle", (0, 0, 0.5), UP, (1, 1), side="both")
    beam(study, 0.25, UP)
    return world_of(study, **settings)


def crossings(world, sums):
    """(weight of a crossing, number of crossings) after 0, 1, 2 ... events."""
    texts = path_texts(world, sums)
    found, path = [], "middle: "
    while path in texts:
        row = texts.index(path)
        count = int(sums.paths.count[row])
        found.append((sums.paths.batch[row].sum() / count * 1024, count))
        path += (
            "" if path.endswith(": ") else ", "
        ) + f"{'ab'[(len(found) - 1) % 2]}:default mirror"
    return found


def check_survivors(found, weights, chance):
    """The first seven events end no ray, each later one lets `chance` of them go on."""
    assert len(found) > 10
    for k, (weight, count) in enumerate(found):
        assert weight == pytest.approx(weights(k), rel=1e-9)
        expected = ROUND * chance ** max(0, k - 7)
        assert abs(count - expected) <= 4 * np.sqrt(expected * (1 - min(1, expected / ROUND)))


def test_roulette_by_the_reflectance(study):
    """Half is absorbed at each event: from the 8th on half the rays go on with an equal weight."""
    world = mirrors(study, 0.5)
    check_survivors(crossings(world, sums_of(world)), lambda k: 0.5 ** min(k, 7), 0.5)


def test_roulette_keeps_one_in_ten(study):
    world = mirrors(study, 0.05)
    found = crossings(world, sums_of(world))
    assert [round(weight / 0.05**7 / 0.5**k, 9) for k, (weight, _) in enumerate(found[7:])] == [
        1.0
    ] * (len(found) - 7)
    for k, (_, count) in enumerate(found[7:]):
        assert abs(count - ROUND * 0.1**k) <= 4 * np.sqrt(ROUND * 0.1**k) + (k > 4)


def test_roulette_takes_the_way_before_into_account(study):
    """In absorbing air the chance is reflectance times the transmittance from mirror to mirror.

    A plane on the way that lets pass does not end the segment.
    """
    study.medium("fog", 1.0, 0.3)
    world = mirrors(study, 0.8, surroundings="fog")
    sums = sums_of(world)
    way = exp(-0.3)

    def weight(k):
        # to the plane: 1/4, or 3/4 to the first mirror and 1/2 back; then 1 between two mirrors
        if k == 0:
            return exp(-0.3 * 0.25)
        return exp(-0.3 * 1.25) * (0.8 * way) ** (min(k, 7) - 1) * 0.8

    check_survivors(crossings(world, sums), weight, 0.8 * way)
    row = account_rows(2, 2).surroundings
    assert sums.account[0, row].sum() > 0


def test_absorption_is_by_weight(study):
    """What a finish keeps is the same for every ray: no spread at the first event."""
    study.finish("mix", diffuse=0.3, mirror=0.2, diffuse_through=0.15)
    study.part("screen", rectangle((2, 2)), medium="sheet", finish="mix")
    beam(study, 1)
    world = world_of(study)
    absorbed = account_of(world, sums_of(world), 0)
    assert absorbed.value == pytest.approx(0.35, rel=1e-12)
    assert absorbed.error < 1e-12


def test_lobes_of_a_mixture_share_the_light(study):
    """Diffuse light back and through a sheet, and the mirror's, on planes of known factor."""
    shares = {"diffuse": 0.3, "mirror": 0.2, "diffuse_through": 0.15}
    study.finish("mix", **shares)
    study.part("screen", rectangle((50, 50)), medium="sheet", finish="mix")
    beam(study, 5)
    half, height = 2.0, 3.0
    for name, z, normal in (("over", height, DOWN), ("under", -height, UP)):
        study.detector(name, (0.1, 0.03, z), normal, (2 * half, 2 * half))
    # a square before the middle of a small Lambertian plane; Howell's catalogue, section B
    q = half / np.hypot(half, height)
    factor = 4 / np.pi * q * np.arctan(q)
    world = world_of(study)
    sums = sums_of(world, rounds=2)
    flux = {
        text: sums.paths.batch[row] / sums.rounds
        for row, text in enumerate(path_texts(world, sums))
    }
    agree(
        [
            of_batches(flux["over: screen:default scatter"]),
            of_batches(flux["under: screen:default scatter_through"]),
            of_batches(flux["over: screen:default mirror"]),
        ],
        [0.3 * factor, 0.15 * factor, 0.2],
    )
    assert len(flux) == 3


def test_two_sides_of_a_sheet(study):
    """Front and back have their own finish; `flip` turns them."""
    for flip, expected in ((False, 0.1), (True, 0.8)):
        study.lists.clear()
        study.finish("bright", diffuse=0.9)
        study.finish("dark", diffuse=0.2)
        study.part(
            "screen",
            rectangle((2, 2)),
            medium="sheet",
            finish={"default": {"front": "bright", "back": "dark"}},
            flip=flip,
        )
        beam(study, 1)
        world = world_of(study)
        assert account_of(world, sums_of(world), 0).value == pytest.approx(expected, rel=1e-12)


def test_sampling_is_zero_in_the_mean(study):
    """A white hall, a lossy glass block: roulette takes and gives alike, walls keep the rest."""
    study.finish("white", diffuse=0.85, mirror=0.05)
    study.medium("glass", 1.5, 0.2)
    study.part("hall", hollow(box((-2, -2, -2), (2, 2, 2))), medium="opaque", finish="white")
    study.part("block", slab(-1, 0.5, 0.7), medium="glass")
    study.source("lamp", point=(1.2, 0.3, 1.1))
    world = world_of(study)
    sums = sums_of(world, rounds=4)
    rows = account_rows(len(world.tag_names), 2)
    sampling = account_of(world, sums, rows.sampling)
    assert 0 < sampling.error < 0.0015
    assert abs(sampling.value) <= 4 * sampling.error
    for row in (rows.escaped, rows.unresolved, rows.cut_off):
        assert account_of(world, sums, row).value == 0
