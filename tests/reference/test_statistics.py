"""Errors, bounds and halves against published and elementary values.

Each case names its source and how far the citation, not the number, was confirmed. The values are
exact evaluations: relative 1e-9, unless a test says otherwise.
"""

from math import sqrt

import numpy as np
import pytest

from lumentrace.analysis.cells import Cells
from lumentrace.analysis.statistics import no_hit_upper, poisson_bounds, t_bounds
from lumentrace.run.estimate import block_error, effective_number, standard_error

EXACT = 1e-9
NORMAL = 10**12  # degrees of freedom at which Student's t is normal to 1e-10


# Expected minimum of N standard normals, E = int x N phi(x) (1 - Phi(x))^(N - 1) dx.
# H. A. David and H. N. Nagaraja, Order Statistics; the value for N = 10 was found by search.
NORMAL_MINIMUM = {10: -1.538752730835173, 100: -2.507593636441684}
# and the expected minimum over mean of a uniform field with 3 % independent noise a cell
UNIFORM_FIELD = {10: 0.9538374180749448, 100: 0.9247721909067494}
MINIMUM_DEVIATION = {10: 0.58680816563907, 100: 0.4294238158111697}


@pytest.mark.parametrize("cells", [10, 100])
def test_the_minimum_of_noisy_cells_is_biased_and_its_split_twin_is_not(cells):
    """Claim: chosen on the even and valued on the odd batches the minimum of a uniform field is
    1 on average; chosen and valued on all it is as low as order statistics say. z <= 4 each.

    64 batches whose mean has 3 % noise; the mean over the cells is exactly 1, as in the case.
    """
    trials, noise = 2000, 0.03
    rng = np.random.default_rng(cells)
    plain, split = np.empty(trials), np.empty(trials)
    for i in range(trials):
        batch = 1.0 + noise * 8 * rng.standard_normal((cells, 64))
        half = batch[:, 0::2].mean(axis=-1), batch[:, 1::2].mean(axis=-1)
        whole = batch.mean(axis=-1)
        for target, choice, value in ((plain, whole, whole), (split, half[0], half[1])):
            found = Cells(
                node=None, split=target is split, choice=choice, value=value, effective=None,
                mean_batch=None, blocks=64, largest=None,
            )  # fmt: skip
            target[i] = found.value[found.darkest]
    error = noise * MINIMUM_DEVIATION[cells] / sqrt(trials)
    assert abs(plain.mean() - UNIFORM_FIELD[cells]) < 4 * error
    assert UNIFORM_FIELD[cells] == pytest.approx(1 + noise * NORMAL_MINIMUM[cells], rel=EXACT)
    assert abs(split.mean() - 1.0) < 4 * noise * sqrt(2 / trials)


# Binomial distribution (common practice, no source): N rays of weight 1, chance p each.
@pytest.mark.parametrize(
    "p, n, error, no_hit_in_1000",
    [
        (0.001, 1_000_000, 3.1606961258558214e-05, 0.36769542477096406),
        (0.0004, 250_000, 3.999199919983996e-05, 0.6702664082736155),
    ],
)
def test_standard_error_of_a_hit_fraction(p, n, error, no_hit_in_1000):
    """Claim: with each ray a block of its own the error from mean and mean square is
    sqrt(p (1 - p) / N), after N - 1 is put back for N; and the chance of no hit in 1000 rays is
    what the bound for no hit allows: at that rate it is p or a little more, the log of 1 - p
    being below -p."""
    found = block_error(np.array(p), np.array(p), n) * sqrt((n - 1) / n)
    assert found == pytest.approx(error, rel=EXACT)
    upper = no_hit_upper(no_hit_in_1000, 1.0, 1000)
    assert p <= upper < p * (1 + p)


def test_false_alarms_of_a_gate_in_standard_errors():
    """Claim: one-sided bounds at half of P(|z| > 4) = 6.334248366623985e-05 lie 4 standard errors
    off, at half of P(|z| > 3) 3, and at the Sidak rate for 1e-3 over 200 checks 4.5647 (normal
    distribution; common practice, no source)."""
    sidak = 1 - (1 - 1e-3) ** (1 / 200)
    for both, z in (
        (6.334248366623985e-05, 4.0),
        (0.002699796063260189, 3.0),
        (sidak, 4.564683314092411),
    ):
        low, high = t_bounds(0.0, 1.0, NORMAL, both / 2)
        assert (-low, high) == (pytest.approx(z, rel=EXACT), pytest.approx(z, rel=EXACT))


def test_poisson_bounds_are_quantiles_of_chi_square():
    """Claim: the upper bound for n counted is chi2(2 n + 2) / 2. For 100 degrees, n = 49: the
    99.9 % limit is 149.4492527790389, and 130 is passed with p = 0.023512397809808676
    (chi-square distribution; common practice, no source)."""
    for alpha, chi2 in ((1e-3, 149.4492527790389), (0.023512397809808676, 130.0)):
        assert 2 * poisson_bounds(49, alpha)[1] == pytest.approx(chi2, rel=EXACT)


def test_a_weighted_tally():
    """Claim: sum 3, mean 0.3, errors and effective number of ten rays (elementary)."""
    weights = np.array([0.5, 0.0, 0.25, 0.0, 0.0, 1.0, 0.125, 0.0, 0.5, 0.625])
    n = len(weights)
    assert standard_error(weights) == pytest.approx(0.10897247358851683, rel=EXACT)
    assert n * standard_error(weights) == pytest.approx(1.0897247358851683, rel=EXACT)
    by_squares = block_error(weights.mean(), (weights**2).mean(), n)
    assert by_squares == pytest.approx(0.10897247358851683, rel=EXACT)
    total, square = weights.sum(), (weights**2).sum()
    assert effective_number(total, square) == pytest.approx(4.571428571428571, rel=EXACT)


def test_upper_limit_when_1000_rays_give_no_hit():
    """Claim: -ln(alpha) / N is the exact binomial limit 1 - alpha^(1 / N) or a little more (it
    holds for any number of rays a block), and at 95 % the rule of three (C. J. Clopper and
    E. S. Pearson, Biometrika 26 (1934) 404; value from memory)."""
    for alpha, exact in ((0.05, 0.0029912495450952962), (0.01, 0.004594582648473037)):
        upper = no_hit_upper(alpha, 1.0, 1000)
        assert exact < upper < exact * 1.0025
        assert upper == pytest.approx(poisson_bounds(0, alpha)[1] / 1000, rel=EXACT)
        assert 1 - alpha ** (1 / 1000) == pytest.approx(exact, rel=EXACT)
    assert no_hit_upper(0.05, 1.0, 1000) == pytest.approx(0.003, rel=2e-3)
