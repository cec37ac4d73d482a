"""Bounds on the truth of measures, by the rules for minima, maxima, ratios and rare light."""

from math import inf

import numpy as np
import pytest
from scipy import stats

from lumentrace.analysis.bounds import BY_DETECTOR, bounds
from lumentrace.analysis.measures import measures
from lumentrace.errors import UserError
from lumentrace.run.make import make_run
from lumentrace.scene.measures import OF_DETECTOR
from tests.unit.synthetic_run import (
    AWAY,
    BLOCK_RAYS,
    CELL_AREA,
    CELL_CHANCE,
    CHANCE,
    COVER,
    DIRECT,
    FLUX,
    only,
    run,
    sums,
    world,
)

ALPHA = 0.01


def one_source():
    """The toy world with sources of one weight, so that Poisson bounds are exact."""
    of = world(photometric=(False, False))
    sources = of.tables.sources._replace(ray_flux=np.full(2, 1.0 / BLOCK_RAYS))
    return type(of)(**{**vars(of), "tables": of.tables._replace(sources=sources)})


def test_a_scene_may_name_what_has_bounds():
    assert set(BY_DETECTOR) == set(OF_DETECTOR)
    made = run()
    for name in measures(made):
        low, high = bounds(made, name, ALPHA)
        assert low <= high and low >= 0.0


@pytest.mark.parametrize("keep_batches", [True, False])
def test_values_lie_between_their_bounds(keep_batches):
    made = run(rounds=2, keep_batches=keep_batches)
    found = measures(made)
    for name in (
        "desk.flux",
        "desk.mean",
        "desk.min",
        "desk.uniformity",
        "rx.max",
        "wall.absorbed",
    ):
        low, high = bounds(made, name, ALPHA)
        assert low < found[name].value < high, name


def test_few_contributions_have_poisson_bounds():
    """Of weight w / blocks each: the bounds are those of scipy's chi-square."""
    few = np.zeros(len(CHANCE))
    few[[COVER, AWAY]] = 0.002, 0.998
    made = make_run(one_source(), sums(one_source(), chance=few))
    n = int(made.detector("rx")["flux_count"].sum())
    assert 80 < n < 200
    weight = 0.9 / BLOCK_RAYS / 64
    assert bounds(made, "rx.flux", ALPHA) == (
        pytest.approx(weight * stats.chi2.ppf(ALPHA / 2, 2 * n) / 2, rel=1e-9),
        pytest.approx(weight * stats.chi2.isf(ALPHA / 2, 2 * n + 2) / 2, rel=1e-9),
    )


def test_the_bounds_of_a_minimum_take_all_cells():
    """Of equal weights: lower at alpha, upper at alpha / 12, each the smallest over the cells."""
    of = one_source()
    few = np.zeros(len(CHANCE))
    few[[DIRECT, AWAY]] = 0.05, 0.95
    made = make_run(of, sums(of, chance=few))
    weight = 1.0 / BLOCK_RAYS / 64 / CELL_AREA
    n = np.rint(made.map("desk")["value"].values.ravel() / weight)
    assert n.max() < 1000
    low = stats.chi2.ppf(ALPHA / 2, 2 * n) / 2 * weight
    low_all = stats.chi2.ppf(ALPHA / 24, 2 * n) / 2 * weight
    high = stats.chi2.isf(ALPHA / 2, 2 * n + 2) / 2 * weight
    high_all = stats.chi2.isf(ALPHA / 24, 2 * n + 2) / 2 * weight
    expected_min = (low.min(), high_all.min())
    assert bounds(made, "desk.min", ALPHA) == pytest.approx(expected_min, rel=1e-9)
    assert bounds(made, "desk.min_split", ALPHA) == pytest.approx(expected_min, rel=1e-9)
    expected_max = (low_all.max(), high.max())
    assert bounds(made, "desk.max", ALPHA) == pytest.approx(expected_max, rel=1e-9)


def test_a_uniformity_shares_its_rate_between_minimum_and_mean():
    made = run()
    low, high = bounds(made, "desk.uniformity", ALPHA)
    min_low, min_high = bounds(made, "desk.min", ALPHA / 2)
    mean_low, mean_high = bounds(made, "desk.mean", ALPHA / 2)
    assert (low, high) == pytest.approx((min_low / mean_high, min_high / mean_low), rel=1e-12)


def test_the_bounds_of_the_toy_hold_their_rate():
    """60 seeds at alpha 0.1: more than 14 misses of a side have a chance of 0.0005."""
    truth = {
        "desk.uniformity": 12 * CELL_CHANCE.min(),
        "rx.flux": 0.9 * FLUX.sum() * CHANCE[COVER],
    }
    missed = dict.fromkeys([(n, side) for n in truth for side in (0, 1)], 0)
    for seed in range(60):
        made = run(seed=seed)
        for name, value in truth.items():
            low, high = bounds(made, name, 0.1)
            missed[name, 0] += low > value
            missed[name, 1] += high < value
    assert max(missed.values()) <= 14, missed


def test_what_was_not_hit_is_bounded_where_a_bound_is_proven():
    made = run(chance=only(DIRECT))
    weight = -np.log(ALPHA) * FLUX[0] / 512 / 64
    assert bounds(made, "rx.flux", ALPHA) == (0.0, pytest.approx(weight, rel=1e-12))
    assert bounds(made, "cover.absorbed", ALPHA) == (0.0, inf)
    passing = run(chance=only(COVER))
    assert bounds(passing, "desk.max", ALPHA) == (0.0, inf)
    assert bounds(passing, "desk.uniformity", ALPHA) == (0.0, 1.0)


def test_an_unknown_measure_is_named_with_the_nearest():
    with pytest.raises(UserError, match='no measure is named "desk.mini"; did you mean "desk.min"'):
        bounds(run(), "desk.mini", ALPHA)
