"""Bounds and errors against scipy's distributions and closed forms."""

from math import inf, log, sqrt

import numpy as np
import pytest
from scipy import stats

from lumentrace.analysis.statistics import (
    jackknife,
    no_hit_upper,
    odd,
    poisson_bounds,
    skewness_of_mean,
    t_bounds,
)
from lumentrace.run.estimate import standard_error

ALPHAS = (0.2, 0.05, 0.01, 1e-3, 1e-6)


@pytest.mark.parametrize("alpha", ALPHAS)
@pytest.mark.parametrize("freedom", [31, 63, 4095])
def test_without_skewness_the_bounds_are_students(alpha, freedom):
    low, high = t_bounds(np.array([5.0, -1.0]), np.array([0.3, 2.0]), freedom, alpha)
    t = stats.t.isf(alpha, freedom)
    assert low == pytest.approx([5 - 0.3 * t, -1 - 2 * t], rel=1e-10)
    assert high == pytest.approx([5 + 0.3 * t, -1 + 2 * t], rel=1e-10)


def johnson(values, mu):
    """Johnson's variable as he prints it, from the values themselves."""
    n, mean, s = len(values), values.mean(), values.std(ddof=1)
    third = ((values - mean) ** 3).mean()
    inner = mean - mu + third / (6 * s**2 * n) + third * (mean - mu) ** 2 / (3 * s**4)
    return inner * sqrt(n) / s


@pytest.mark.parametrize("alpha", ALPHAS)
@pytest.mark.parametrize("sign", [1, -1])
def test_at_a_bound_johnsons_variable_is_the_quantile(alpha, sign):
    values = sign * np.random.default_rng(3).lognormal(0, 0.2, 64)
    skew = skewness_of_mean(values)
    assert abs(skew) > 0.03  # the case has something to correct
    low, high = t_bounds(values.mean(), standard_error(values), 63, alpha, skew)
    t = stats.t.isf(alpha, 63)
    assert johnson(values, low) == pytest.approx(t, rel=1e-9)
    assert johnson(values, high) == pytest.approx(-t, rel=1e-9)


def test_skewness_moves_both_bounds_toward_the_long_tail():
    low, high = t_bounds(0.0, 1.0, 63, 0.01, 0.1)
    plain_low, plain_high = t_bounds(0.0, 1.0, 63, 0.01)
    assert low > plain_low and high > plain_high


def test_where_johnsons_variable_never_falls_so_low_there_is_no_upper_bound():
    """Its least value over mu is g / 6 - 3 / (4 g)."""
    g = 0.4
    least = -(g / 6 - 3 / (4 * g))
    alpha = stats.t.sf(least, 63)
    assert t_bounds(1.0, 0.1, 63, alpha * 1.01, g)[1] < inf
    assert t_bounds(1.0, 0.1, 63, alpha * 0.99, g)[1] == inf
    assert t_bounds(1.0, 0.1, 63, alpha * 0.99, g)[0] > 0.0
    assert t_bounds(1.0, 0.1, 63, alpha * 0.99, -g)[0] == -inf


def test_a_value_without_spread_is_its_own_bound():
    assert t_bounds(2.0, 0.0, 63, 0.01) == (2.0, 2.0)


def test_skewness_of_mean_is_that_of_the_values_over_root_n():
    values = np.random.default_rng(4).gamma(2.0, size=(3, 64))
    moments = stats.skew(values, axis=-1) * (63 / 64) ** 1.5  # scipy's has n in the variance too
    assert skewness_of_mean(values) == pytest.approx(moments / 8, rel=1e-12)
    assert skewness_of_mean(np.full(64, 0.1)) == 0.0


@pytest.mark.parametrize("alpha", ALPHAS)
def test_poisson_bounds_are_the_exact_ones(alpha):
    """The chance to count n or more at the lower bound, and n or fewer at the upper, is alpha."""
    count = np.array([1, 3, 10, 100, 999])
    low, high = poisson_bounds(count, alpha)
    assert stats.poisson.sf(count - 1, low) == pytest.approx(alpha, rel=1e-8)
    assert stats.poisson.cdf(count, high) == pytest.approx(alpha, rel=1e-8)


def test_poisson_bounds_of_nothing():
    assert poisson_bounds(0, 0.05)[0] == 0.0
    assert poisson_bounds(0, 0.05)[1] == pytest.approx(-log(0.05), rel=1e-12)


def test_poisson_bounds_grow_between_whole_numbers():
    low, high = poisson_bounds(np.array([4.0, 4.5, 5.0]), 0.05)
    assert (np.diff(low) > 0).all() and (np.diff(high) > 0).all()


def test_no_hit_upper_is_the_rule_of_three_per_block():
    assert no_hit_upper(0.05, 2.0, 640) == pytest.approx(2.0 * 2.995732273553991 / 640, rel=1e-14)


def test_jackknife_of_a_mean_is_its_standard_error():
    batch = np.random.default_rng(5).gamma(2.0, size=(4, 64))
    assert jackknife(lambda x: 3.0 * x, batch) == pytest.approx(
        3 * standard_error(batch), rel=1e-12
    )


def test_jackknife_of_a_ratio_agrees_with_its_linearisation():
    """var(x / y) = (var x - 2 r cov + r^2 var y) / y^2 for small relative errors; the two differ in
    the next order, some 1e-3 here."""
    rng = np.random.default_rng(6)
    y = rng.normal(10.0, 0.3, 64)
    x = 0.4 * y + rng.normal(0.0, 0.1, 64)
    ratio = x.mean() / y.mean()
    linear = np.std(x - ratio * y, ddof=1) / 8 / y.mean()
    assert jackknife(np.divide, x, y) == pytest.approx(linear, rel=2e-3)
    assert jackknife(np.divide, x, x) == pytest.approx(0.0, abs=1e-15)


def test_odd_batches():
    assert odd(np.arange(12).reshape(2, 6)).tolist() == [[1, 3, 5], [7, 9, 11]]
