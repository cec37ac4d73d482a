"""From sums to a standard error and an effective number. The bounds are in analysis."""

from math import sqrt

import numpy as np


def standard_error(batch: np.ndarray) -> np.ndarray:
    """Standard error of the mean of independent batches, s / sqrt(n), s^2 with n - 1.

    batch: (..., n) float. Returns (...).
    """
    return batch.std(axis=-1, ddof=1) / sqrt(batch.shape[-1])


def block_error(mean: np.ndarray, mean_square: np.ndarray, blocks: int) -> np.ndarray:
    """Standard error of the mean of independent blocks from their mean and mean square,
    sqrt((<b^2> - <b>^2) / (n - 1)); the same as `standard_error` of the blocks' values.

    Rounding may leave a tiny negative difference where all blocks agree: that is 0.
    """
    return np.sqrt(np.maximum(mean_square - mean**2, 0.0) / (blocks - 1))


def grouped_error(error: np.ndarray) -> np.ndarray:
    """Standard error of a sum over groups, the first axis: they have rays of their own, so that
    their variances add."""
    return np.sqrt((error**2).sum(axis=0))


def effective_number(value: np.ndarray, square: np.ndarray) -> np.ndarray:
    """(sum w)^2 / sum w^2, the number of equal contributions with the same relative spread
    (L. Kish, Survey Sampling, 1965, section 11.7; citation from memory); 0 where there is none.

    value and square are scaled alike, as everywhere in a run: sum w / blocks, sum (w / blocks)^2.
    """
    value, square = np.broadcast_arrays(value, square)
    return np.divide(value**2, square, out=np.zeros(value.shape), where=square > 0.0)
