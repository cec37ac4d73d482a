"""Uniform numbers: their range, and that nothing shares them."""

from itertools import product

import numpy as np

from lumentrace.kernels import rng


def test_range_is_half_open():
    assert rng.uniform(np.uint64(0)) == 0.0
    assert rng.uniform(np.uint64(2**11 - 1)) == 0.0
    assert rng.uniform(np.uint64(2**11)) == 2.0**-53
    assert rng.uniform(np.uint64(2**64 - 1)) == 1.0 - 2.0**-53
    for event in range(20_000):
        assert all(0.0 <= u < 1.0 for u in rng.uniforms(1, np.uint64(2), 3, 0, event, rng.LOBE))


def test_purposes_are_different():
    purposes = (rng.PLACE, rng.DIRECTION, rng.SURFACE, rng.LOBE)
    assert len(set(purposes)) == len(purposes)


def test_nothing_shares_numbers():
    """Another seed, source, ray, branch, event or purpose gives four other numbers."""
    drawn = {}
    for words in product(
        range(3), (7, 2**63 + 1, 2**64 - 1), range(4), range(2), range(5), range(5)
    ):
        seed, source, ray, branch, event, purpose = words
        four = rng.uniforms(seed, np.uint64(source), ray, branch, event, purpose)
        for u in four:
            drawn.setdefault(u, []).append(words)
    assert len(drawn) == 4 * 3 * 3 * 4 * 2 * 5 * 5


def test_the_same_words_give_the_same_numbers():
    words = (11, np.uint64(2**64 - 5), 123_456_789_012, 0, 99_999, rng.SURFACE)
    assert rng.uniforms(*words) == rng.uniforms(*words)


def test_no_correlation_of_neighbours():
    """Mean 1/2, variance 1/12, and no correlation between draws, events and rays (z <= 4)."""
    n = 200
    u = np.array(
        [rng.uniforms(5, np.uint64(6), ray, 0, event, 3) for ray in range(n) for event in range(n)]
    ).reshape(n, n, 4)
    z = [
        (u.mean() - 0.5) * np.sqrt(12 * u.size),
        (((u - 0.5) ** 2).mean() * 12 - 1) / np.sqrt(0.8 / u.size),
    ]
    centred = (u - 0.5) * np.sqrt(12)
    for a, b in (
        (centred[:-1], centred[1:]),
        (centred[:, :-1], centred[:, 1:]),
        (centred[..., :-1], centred[..., 1:]),
    ):
        z.append((a * b).mean() * np.sqrt(a.size))
    assert np.abs(z).max() <= 4, z
