"""Standard errors and effective numbers from batches, blocks and squares."""

import numpy as np
import pytest

from lumentrace.run.estimate import block_error, effective_number, standard_error


def test_standard_error_is_that_of_the_mean():
    batch = np.array([[1.0, 2.0, 4.0, 5.0], [7.0, 7.0, 7.0, 7.0]])
    # by hand: mean 3, squares 4 + 1 + 1 + 4 = 10, s^2 = 10 / 3, error sqrt(10 / 12)
    assert standard_error(batch) == pytest.approx([np.sqrt(10 / 12), 0.0], rel=1e-14)


def test_block_error_equals_standard_error_of_the_blocks():
    blocks = np.random.default_rng(1).gamma(2.0, size=(5, 640))
    found = block_error(blocks.mean(axis=-1), (blocks**2).mean(axis=-1), 640)
    assert found == pytest.approx(standard_error(blocks), rel=1e-10)


def test_block_error_of_equal_blocks_is_zero_and_not_the_root_of_a_negative():
    value = np.full(1000, 0.1)
    assert block_error(value.mean(), (value**2).mean() * (1 - 1e-15), 1000) == 0.0


def test_effective_number_of_equal_contributions_is_their_number():
    blocks, weight, n = 128, 0.3, 50
    value, square = n * weight / blocks, n * (weight / blocks) ** 2
    assert effective_number(np.array(value), np.array(square)) == pytest.approx(50, rel=1e-13)


def test_effective_number_of_nothing_is_zero():
    assert effective_number(np.zeros(3), np.zeros(3)).tolist() == [0.0, 0.0, 0.0]
