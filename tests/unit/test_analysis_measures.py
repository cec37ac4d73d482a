"""Measures of a toy run whose truth is known in closed form."""

from math import log, sqrt

import numpy as np
import pytest

from lumentrace.analysis.cells import cells_of
from lumentrace.analysis.measures import CELL_NOT_HIT, NOT_HIT, measures
from lumentrace.photometry import luminosity
from lumentrace.run.make import make_run
from lumentrace.scene.measures import OF_DETECTOR
from tests.unit.synthetic_run import (
    AWAY,
    BLUE,
    CELL_AREA,
    CELL_CHANCE,
    CHANCE,
    COVER,
    DIRECT,
    FLUX,
    GREEN,
    LOST_WAY,
    OFTEN,
    ONCE,
    ROULETTE,
    RX_AREA,
    UNKEPT,
    only,
    run,
    sums,
    world,
)

LUMENS = 683.0 * (FLUX[0] * luminosity(GREEN) + FLUX[1] * luminosity(BLUE))
OFTEN_LEFT = np.mean([0.5**n for n in (2, 3, 4)])
DESK_FLUX = LUMENS * (
    CHANCE[DIRECT] + 0.5 * CHANCE[ONCE] + OFTEN_LEFT * CHANCE[OFTEN] + CHANCE[UNKEPT]
)
TRUTH = {
    "desk.flux": DESK_FLUX,
    "desk.mean": DESK_FLUX / (12 * CELL_AREA),
    "desk.min": DESK_FLUX * CELL_CHANCE.min() / CELL_AREA,
    "desk.uniformity": 12 * CELL_CHANCE.min(),
    "desk.min_split": DESK_FLUX * CELL_CHANCE.min() / CELL_AREA,
    "desk.max_split": DESK_FLUX * CELL_CHANCE.max() / CELL_AREA,
    "desk.uniformity_split": 12 * CELL_CHANCE.min(),
    "rx.flux": 0.9 * FLUX.sum() * CHANCE[COVER],
    "rx.mean": 0.9 * FLUX.sum() * CHANCE[COVER] / RX_AREA,
    "wall.absorbed": 100
    * (
        CHANCE[DIRECT]
        + 0.5 * CHANCE[ONCE]
        + (1 - OFTEN_LEFT) * CHANCE[OFTEN]
        + 0.5 * CHANCE[ROULETTE]
    ),
    "cover:bulk.absorbed": 10 * CHANCE[COVER],
    "study.escaped": 100
    * (
        0.5 * CHANCE[ONCE]
        + OFTEN_LEFT * CHANCE[OFTEN]
        + CHANCE[UNKEPT]
        + 0.5 * CHANCE[ROULETTE]
        + CHANCE[AWAY]
    ),
}


@pytest.mark.parametrize("keep_batches", [True, False])
def test_measures_meet_the_truth_within_their_errors(keep_batches):
    """The brightest of eleven equal cells is left out: its plain maximum is biased upward."""
    found = measures(run(rounds=2, seed=3, keep_batches=keep_batches))
    z = {name: (found[name].value - truth) / found[name].error for name, truth in TRUTH.items()}
    assert max(map(abs, z.values())) < 4, z


def test_errors_are_those_of_the_spread_over_seeds():
    """48 seeds: the spread over the mean reported error, within four times its own uncertainty."""
    runs = [measures(run(seed=s)) for s in range(48)]
    for name in ("desk.flux", "desk.uniformity", "rx.mean", "wall.absorbed", "desk.min_split"):
        spread = np.std([m[name].value for m in runs], ddof=1)
        reported = np.mean([m[name].error for m in runs])
        assert abs(spread / reported - 1) < 4 / sqrt(2 * 47), name


def test_each_detector_has_the_measures_that_scenes_may_name():
    found = measures(run())
    for d in ("desk", "rx"):
        assert {n.partition(".")[2] for n in found if n.startswith(f"{d}.")} == set(OF_DETECTOR)
    assert {n for n in found if n.endswith("absorbed")} == {
        "wall.absorbed", "wall:default.absorbed", "cover.absorbed", "cover:inner.absorbed",
        "cover:outer.absorbed", "cover:bulk.absorbed",
    }  # fmt: skip
    assert all(m.name == name for name, m in found.items())


def test_every_measure_has_its_unit():
    found = measures(run(photometric=(True, False)))
    assert {n: found[n].unit for n in ("desk.flux", "desk.min", "rx.flux", "rx.max_split")} == {
        "desk.flux": "lm", "desk.min": "lx", "rx.flux": "W", "rx.max_split": "W/m2",
    }  # fmt: skip
    assert found["desk.uniformity"].unit == "1" and found["wall.absorbed"].unit == "%"


def test_areas_follow_the_unit_of_the_study():
    a, b = measures(run()), measures(run(lengths=("ft", 0.3048)))
    assert a["desk.mean"].value == pytest.approx(b["desk.mean"].value, rel=1e-12)


def test_split_values_come_from_the_odd_batches_of_the_cell_that_the_even_ones_chose():
    found = sums(world(), chance=only(DIRECT, AWAY))
    cell = found.cell_batch[:, :12].sum(axis=0)
    chosen = int(np.argmin(cell[:, 0::2].sum(axis=-1)))
    odd = cell[chosen, 1::2] / CELL_AREA
    measure = measures(make_run(world(), found))["desk.min_split"]
    assert measure.value == pytest.approx(odd.mean(), rel=1e-12)
    assert measure.error == pytest.approx(odd.std(ddof=1) / sqrt(32), rel=1e-12)


def test_split_extremes_have_half_the_contributions():
    found = measures(run(chance=only(DIRECT)))
    plain, split = found["rx.mean"], found["desk.flux"]
    assert plain.effective == 0.0
    assert found["rx.max_split"].effective == 0.0
    # two weights, so that the effective number is below the 65,536 rays
    assert split.effective < 65_536
    both = run(chance=only(DIRECT, COVER))
    whole, half = (cells_of(both, "rx", split) for split in (False, True))
    assert half.effective[0] == pytest.approx(whole.effective[0] / 2, rel=0.05)


def test_the_only_cell_of_a_detector_is_uniform():
    found = measures(run())["rx.uniformity"]
    assert (found.value, found.error, found.unseen) == (1.0, 0.0, 0.0)


@pytest.mark.parametrize("keep_batches", [True, False])
def test_what_was_not_hit_has_no_error_and_a_bound_where_one_is_proven(keep_batches):
    found = measures(run(chance=only(DIRECT), keep_batches=keep_batches))
    bound = -log(0.05) * (FLUX[0] / 512) / 64  # of the brighter source, in W
    expected = {
        "rx.flux": bound,
        "rx.mean": bound / RX_AREA,
        "rx.min": bound / RX_AREA,
        "rx.max_split": 2 * bound / RX_AREA,  # half of the blocks
        "study.escaped": 100 * bound / FLUX.sum(),
        "cover.absorbed": None,  # roulette restores weights: no bound is proven
    }
    for name, upper in expected.items():
        m = found[name]
        assert (m.value, m.error, m.effective) == (0.0, None, 0.0)
        assert m.note.startswith("not hit")
        assert m.upper == (None if upper is None else pytest.approx(upper, rel=1e-12))
    nothing = found["rx.uniformity"]
    assert (nothing.value, nothing.error, nothing.upper) == (None, None, None)


def test_a_passing_detector_that_was_not_hit_has_no_bound():
    found = measures(run(chance=only(COVER)))
    for name in ("desk.flux", "desk.min", "desk.uniformity"):
        assert found[name].upper is None and found[name].error is None


def test_the_uniformity_of_a_field_with_a_dark_cell_has_a_bound():
    """A catching desk of which the dark cell was never hit."""
    of = world()
    catching = of.tables.detectors._replace(catches=np.array([True, True]))
    of = type(of)(**{**vars(of), "tables": of.tables._replace(detectors=catching)})
    found = sums(of, chance=only(DIRECT))
    found.cell_batch[:, 0], found.cell_half[:, :, 0], found.cell_square[:, 0] = 0, 0, 0
    m = measures(make_run(of, found))
    lowest, uniformity = m["desk.min"], m["desk.uniformity"]
    assert (uniformity.value, uniformity.error) == (0.0, None)
    least = -log(0.05) * (FLUX[0] / 512) * 683 * luminosity(GREEN) / 64 / CELL_AREA
    assert lowest.upper == pytest.approx(least, rel=1e-12)
    # at half the rate for the cell, and the mean at its lower bound
    assert 1.0 < uniformity.upper / (least / m["desk.mean"].value) < 1.3


def test_few_contributions_say_so():
    few = np.zeros(len(CHANCE))
    few[[COVER, AWAY]] = 0.0005, 0.9995
    m = measures(run(chance=few))["rx.flux"]
    assert 0 < m.effective < 100
    assert m.note == "fewer than 100 effective contributions"
    assert measures(run())["rx.flux"].note == ""


def test_unseen_takes_all_lost_light_as_if_it_had_arrived():
    made = run(chance=only(DIRECT, COVER, LOST_WAY))
    m = measures(made)
    lost = made.account["ended"].sel(fate="cut_off").mean("batch").values
    lumens = 683.0 * float(lost @ [luminosity(GREEN), luminosity(BLUE)])
    assert m["rx.flux"].unseen == pytest.approx(lost.sum(), rel=1e-12)
    assert m["rx.max"].unseen == pytest.approx(lost.sum() / RX_AREA, rel=1e-12)
    assert m["wall.absorbed"].unseen == pytest.approx(100 * lost.sum() / FLUX.sum(), rel=1e-12)
    assert m["study.escaped"].unseen == m["wall.absorbed"].unseen
    assert m["desk.flux"].unseen == pytest.approx(lumens, rel=1e-12)
    assert m["desk.mean"].unseen == pytest.approx(lumens / (12 * CELL_AREA), rel=1e-12)
    assert m["desk.min"].unseen == pytest.approx(lumens / CELL_AREA, rel=1e-12)
    assert "an estimate" in m["desk.flux"].note and "an estimate" not in m["rx.flux"].note
    low, mean = m["desk.min"].value, m["desk.mean"].value
    raised = (low + lumens / CELL_AREA) / (mean + lumens / CELL_AREA / 12)
    assert m["desk.uniformity"].unseen == pytest.approx(raised - low / mean, rel=1e-9)


def test_unseen_takes_the_most_arrivals_of_one_ray_where_light_passes():
    found = sums(world())
    once = measures(make_run(world(), found))
    found.flux_most[:], found.cell_most[:] = 5, 3
    often = measures(make_run(world(), found))
    assert often["desk.mean"].unseen == pytest.approx(5 * once["desk.mean"].unseen)
    assert often["desk.max"].unseen == pytest.approx(3 * once["desk.max"].unseen)
    assert often["rx.flux"].unseen == once["rx.flux"].unseen  # it catches


def test_nothing_lost_is_nothing_unseen():
    assert all(m.unseen == 0.0 for m in measures(run(chance=only(DIRECT, COVER))).values())


def test_invisible_light_is_no_lumens_for_certain():
    """A photometric detector in the dark: the bound on lumens is 0."""
    of = world()
    sources = of.tables.sources._replace(wavelength=np.array([940.0, 940.0]))
    catching = of.tables.detectors._replace(catches=np.array([True, True]))
    arrays = of.tables._replace(sources=sources, detectors=catching)
    of = type(of)(**{**vars(of), "tables": arrays})
    m = measures(make_run(of, sums(of, chance=only(DIRECT))))["desk.flux"]
    assert (m.value, m.error, m.upper) == (0.0, None, 0.0)


def test_the_error_of_a_uniformity_knows_that_cell_and_mean_vary_together():
    """Cells that rise and fall as one, two to one: the ratio does not vary at all. Where batch
    values were not kept this is not known, and the largest possible error is given."""
    found = sums(world(), chance=only(DIRECT, AWAY))
    common = found.flux[0] / 18.0  # six dim cells of one share, six bright ones of two
    found.cell_batch[:, :12] = common[:, None, :] * np.repeat([1.0, 2.0], 6)[:, None]
    found.cell_half[0] = found.cell_batch[..., 0::2].sum(axis=-1)
    found.cell_half[1] = found.cell_batch[..., 1::2].sum(axis=-1)
    m = measures(make_run(world(), found))
    assert m["desk.uniformity"].value == pytest.approx(12 / 18, rel=1e-12)
    relative = m["desk.min"].error / m["desk.min"].value
    assert relative > 1e-3
    assert m["desk.uniformity"].error < 1e-12
    assert m["desk.uniformity_split"].error < 1e-12
    # blocks whose variance, all of it in one group, gives the dim cells the same error
    mean, error = found.cell_half.sum(axis=0) / 64, m["desk.min"].error * CELL_AREA
    found.cell_batch = None
    found.cell_block_square = np.stack([32 * mean**2, 32 * mean**2])
    found.cell_block_square[:, 0] += 32 * 63 * error**2
    apart = measures(make_run(world(), found))
    assert apart["desk.min"].error == pytest.approx(m["desk.min"].error, rel=1e-9)
    expected = 2 * relative * 12 / 18
    assert apart["desk.uniformity"].error == pytest.approx(expected, rel=1e-9)


def test_a_cell_without_a_hit_is_told_from_a_detector_without_one():
    chance = np.zeros(len(CHANCE))
    chance[DIRECT], chance[AWAY] = 1e-4, 1.0 - 1e-4  # some 6 rays to the desk's 12 cells
    found = measures(run(chance=chance))
    assert found["desk.mean"].error > 0.0 and found["desk.max"].error > 0.0
    for name in ("desk.min", "desk.uniformity"):
        assert found[name].error is None and found[name].note.split("; ")[0] == CELL_NOT_HIT
    for name in ("rx.flux", "rx.min", "rx.uniformity"):
        assert found[name].error is None and found[name].note.split("; ")[0] == NOT_HIT
