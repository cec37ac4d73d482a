"""How often bounds miss, by simulation with fixed seeds.

Each rate is held against the stated one plus four standard errors of the simulation. That the
simulations can fail is shown by plain Student's t, which does.
"""

from math import sqrt

import numpy as np
import pytest

from lumentrace.analysis.samples import Largest, Sample, bounds_of
from lumentrace.analysis.statistics import skewness_of_mean, t_bounds
from lumentrace.run.estimate import effective_number, standard_error

ALPHA = 0.01
NOTHING = Largest(0.0, proven=False)


def sample(batch: np.ndarray, square: np.ndarray, largest=NOTHING) -> Sample:
    """From (..., 64) sums of a batch and sums of squared contributions. 64 blocks in all."""
    value = batch.mean(axis=-1)
    return Sample(
        value=value,
        error=standard_error(batch),
        skew=skewness_of_mean(batch),
        effective=effective_number(value, square / 64**2),
        freedom=63,
        blocks=64,
        largest=largest,
    )


def counted(batch: np.ndarray) -> Sample:
    """Contributions of weight one."""
    return sample(batch, batch.sum(axis=-1))


def allowed(trials: int, alpha: float = ALPHA) -> float:
    return alpha + 4 * sqrt(alpha * (1 - alpha) / trials)


@pytest.mark.parametrize("contributions", [3, 10, 100, 1000, 3000])
def test_bounds_on_counts_hold_their_rate(contributions):
    trials, truth = 20_000, contributions / 64
    batch = np.random.default_rng(contributions).poisson(truth, (trials, 64)).astype(float)
    hit = batch[batch.any(axis=-1)]  # the bound of a number without a hit is another matter
    low, high = bounds_of(counted(hit), ALPHA)
    assert (low > truth).sum() / trials <= allowed(trials)
    assert (high < truth).sum() / trials <= allowed(trials)


def test_plain_t_does_not_hold_its_rate():
    """The simulation above is sharp enough to see it."""
    trials, truth = 20_000, 10 / 64
    batch = np.random.default_rng(10).poisson(truth, (trials, 64)).astype(float)
    _, high = t_bounds(batch.mean(axis=-1), standard_error(batch), 63, ALPHA)
    assert (high < truth).mean() > 2 * allowed(trials)


@pytest.mark.parametrize("contributions", [100, 1000])
def test_bounds_on_the_minimum_and_maximum_of_cells_hold_their_rate(contributions):
    """400 equal cells, where a minimum is most biased; bounds as `bounds` combines them."""
    trials, cells, truth, alpha = 400, 400, contributions / 64, 0.05
    rng = np.random.default_rng(contributions + 1)
    missed = dict.fromkeys(("min low", "min high", "max low", "max high", "t"), 0)
    for _ in range(trials):
        batch = rng.poisson(truth, (cells, 64)).astype(float)
        found = counted(batch)
        low, high = bounds_of(found, alpha)
        low_all, high_all = bounds_of(found, alpha / cells)
        _, plain = t_bounds(found.value, found.error, 63, alpha / cells)
        missed["min low"] += low.min() > truth
        missed["min high"] += high_all.min() < truth
        missed["max low"] += low_all.max() > truth
        missed["max high"] += high.max() < truth
        missed["t"] += plain.min() < truth
    plain = missed.pop("t") / trials
    assert all(n / trials <= allowed(trials, alpha) for n in missed.values()), missed
    if contributions == 100:
        assert plain > 2 * allowed(trials, alpha)  # what Student's t would have missed


def test_bounds_on_log_normal_batches_hold_their_rate():
    """Skewed batches of many contributions: shape 0.3."""
    trials = 20_000
    batch = np.random.default_rng(8).lognormal(0.0, 0.3, (trials, 64))
    found = sample(batch, batch.sum(axis=-1) ** 2 / 5000)
    assert found.effective == pytest.approx(5000)
    low, high = bounds_of(found, ALPHA)
    truth = np.exp(0.3**2 / 2)
    assert (low > truth).mean() <= allowed(trials) and (high < truth).mean() <= allowed(trials)


def test_a_few_weak_contributions_do_not_hide_a_strong_path_that_was_missed():
    """Twenty contributions of 0.001 and, on average, half a one of 1: in 60 % of the runs the
    strong path is not met. Their effective number and mean weight alone would then bound the truth
    far below itself."""
    trials, truth = 20_000, (20 * 0.001 + 0.5) / 64
    rng = np.random.default_rng(11)
    weak, strong = rng.poisson(20 / 64, (trials, 64)), rng.poisson(0.5 / 64, (trials, 64))
    batch, square = 0.001 * weak + strong, (1e-6 * weak + strong).sum(axis=-1)
    met = batch.any(axis=-1)
    _, high = bounds_of(sample(batch[met], square[met], Largest(1.0, False)), ALPHA)
    assert (high < truth).sum() / trials <= allowed(trials)
    _, alone = bounds_of(sample(batch[met], square[met]), ALPHA)
    assert (alone < truth).mean() > 0.5


def test_the_no_hit_bound_holds_its_rate():
    """1024 rays a block in 64 blocks, each hitting with the chance that the bound just allows:
    no hit at all comes in 5 % of the runs."""
    rays, alpha, trials = 1024 * 64, 0.05, 40_000
    nothing = Sample(
        *map(np.array, (0.0, 0.0, 0.0, 0.0)), freedom=63, blocks=64, largest=Largest(1 / 1024, True)
    )
    low, high = bounds_of(nothing, alpha)
    assert low == 0.0
    hits = np.random.default_rng(9).binomial(rays, high, trials)
    assert (hits == 0).mean() == pytest.approx(alpha, abs=4 * sqrt(alpha / trials))
