"""Errors and bounds as pure functions. Every bound is one-sided and misses at the stated rate, or
less often; a pair of them misses at most twice as often.

`value` and `error` are an estimate and its standard error, alpha is a rate in (0, 0.5). All
functions take arrays and work element by element.
"""

from collections.abc import Callable
from math import log, sqrt

import numpy as np
from scipy.special import gammainccinv, gammaincinv, stdtrit

ROUNDING = 1e-12  # relative spread of batches below which they are the same number


def jackknife(function: Callable[..., np.ndarray], *batches: np.ndarray) -> np.ndarray:
    """Standard error of function(mean of each of batches), for smooth functions only.

    sqrt((n - 1) / n sum_i (f_i - mean f)^2), f_i with batch i left out (B. Efron, The Jackknife,
    the Bootstrap and Other Resampling Plans, 1982, chapter 3; citation from memory).

    batches: (..., n) float each, with one n; function takes as many arrays and works element by
    element. Returns (...).
    """
    n = batches[0].shape[-1]
    left_out = [(n * b.mean(axis=-1, keepdims=True) - b) / (n - 1) for b in batches]
    values = function(*left_out)
    spread = values - values.mean(axis=-1, keepdims=True)
    return np.sqrt((n - 1) / n * (spread**2).sum(axis=-1))


def odd(batch: np.ndarray) -> np.ndarray:
    """The odd ones of batches, (..., n) -> (..., n / 2): those that value a cell which the even
    ones have chosen, so that the choice does not bias the value."""
    return batch[..., 1::2]


def skewness_of_mean(batch: np.ndarray) -> np.ndarray:
    """Estimated skewness of the mean of n batches, m3 / (m2^(3/2) sqrt(n)) with the moments
    m_k = sum (x - mean)^k / n and m2 with n - 1, as Johnson (1978) has them; 0 without spread, or
    with one that is only rounding.

    batch: (..., n) float. Returns (...).
    """
    n = batch.shape[-1]
    mean = batch.mean(axis=-1)
    spread = batch - mean[..., None]
    deviation = np.sqrt((spread**2).sum(axis=-1) / (n - 1))
    third = (spread**3).sum(axis=-1) / n
    real = deviation > ROUNDING * np.abs(mean)
    return np.divide(third, deviation**3 * sqrt(n), out=np.zeros_like(third), where=real)


def t_bounds(value, error, freedom: int, alpha: float, skew=0.0) -> tuple[np.ndarray, np.ndarray]:
    """Lower and upper bound on the true mean by Student's t, corrected for skewness.

    N. J. Johnson, Modified t tests and confidence intervals for asymmetrical populations,
    J. Am. Stat. Assoc. 73 (1978) 536: with mean x, variance s^2 and third moment m3 of n values,

        (x - mu + m3 / (6 s^2 n) + m3 (x - mu)^2 / (3 s^4)) sqrt(n) / s

    is nearly Student's t with n - 1 degrees. In z = (x - mu) / error and the skewness of the mean
    g = m3 / (s^3 sqrt(n)) this is z + g / 6 + g z^2 / 3. A bound is where it equals t or -t: the
    root of that quadratic next to the estimate. Where there is none, the data set no bound there:
    -inf or inf. With skew = 0 it is Student's bound.
    """
    t = -stdtrit(freedom, alpha)
    value, error, skew = np.broadcast_arrays(value, error, np.asarray(skew, dtype=float))
    return value - error * _root(skew, t), value - error * _root(skew, -t)


def _root(skew: np.ndarray, t: float) -> np.ndarray:
    """z next to 0 with z + g / 6 + g z^2 / 3 = t; of the sign of t and infinite for none."""
    rest = t - skew / 6.0
    inside = 1.0 + 4.0 / 3.0 * skew * rest
    # 2 c / (1 + sqrt(d)) instead of (sqrt(d) - 1) / (2 a): no cancellation, and right for g = 0
    root = 2.0 * rest / (1.0 + np.sqrt(np.maximum(inside, 0.0)))
    return np.where(inside >= 0.0, root, np.copysign(np.inf, t))


def poisson_bounds(count, alpha: float) -> tuple[np.ndarray, np.ndarray]:
    """Lower and upper bound on the mean of a Poisson number that came out as `count`, exact.

    chi2(alpha, 2 n) / 2 and chi2(1 - alpha, 2 n + 2) / 2 (F. Garwood, Biometrika 28 (1936) 437),
    as quantiles of gamma distributions, so that an effective number between integers has bounds
    too. 0 counted: 0 and -ln(alpha).
    """
    count = np.asarray(count, dtype=float)
    some = count > 0.0
    low = np.where(some, gammaincinv(np.where(some, count, 1.0), alpha), 0.0)
    return low, gammainccinv(count + 1.0, alpha)


def no_hit_upper(alpha: float, largest: float, blocks: int) -> float:
    """Upper bound on a sum to which no ray has added: -ln(alpha) largest / blocks.

    largest: proven bound on what one ray with all its branches can add in its block. With n_s rays
    of source s in a block and p_s its chance to hit, no hit has the chance prod (1 - p_s)^(n_s B)
    <= exp(-B sum n_s p_s), and the sum is at most largest x sum n_s p_s. The rule of three.
    """
    return -log(alpha) * largest / blocks
