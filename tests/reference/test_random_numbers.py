"""The random numbers against another implementation of the same published generator.

Philox4x64-10: Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC11
(2011). Tolerance: none, all bits agree.
"""

import numpy as np
import pytest

from lumentrace.kernels.rng import philox, uniforms

MASK = 2**64 - 1


def numpy_philox(key, counter):
    """Four uint64 of numpy.random.Philox, which counts up before it draws."""
    before = (sum(word << (64 * i) for i, word in enumerate(counter)) - 1) % 2**256
    words = [(before >> (64 * i)) & MASK for i in range(4)]
    generator = np.random.Philox(key=np.array(key, np.uint64), counter=np.array(words, np.uint64))
    return tuple(int(x) for x in generator.random_raw(4))


def ours(key, counter):
    return philox(*(np.uint64(x) for x in (*key, *counter)))


def test_philox_is_that_of_numpy():
    """2000 random keys and counters, and those at the ends of the words."""
    rng = np.random.default_rng(2024)
    words = rng.integers(0, 2**64, size=(2000, 6), dtype=np.uint64).tolist()
    words += [[0] * 6, [MASK] * 6]
    words += [[MASK if i == k else 0 for i in range(6)] for k in range(6)]
    words += [[1 if i == k else 0 for i in range(6)] for k in range(6)]
    for word in words:
        key, counter = word[:2], word[2:]
        assert ours(key, counter) == numpy_philox(key, counter)


@pytest.mark.parametrize(
    ("key", "counter", "expected"),
    [
        (
            (0, 0),
            (0, 0, 0, 0),
            (0x16554D9ECA36314C, 0xDB20FE9D672D0FDC, 0xD7E772CEE186176B, 0x7E68B68AEC7BA23B),
        ),
        (
            (MASK, MASK),
            (MASK, MASK, MASK, MASK),
            (0x87B092C3013FE90B, 0x438C3C67BE8D0224, 0x9CC7D7C69CD777B6, 0xA09CAEBF594F0BA0),
        ),
    ],
)
def test_known_answers(key, counter, expected):
    """The authors' known answers for philox4x64-10 (values from memory; numpy gives the same)."""
    assert numpy_philox(key, counter) == expected
    assert ours(key, counter) == expected


def test_uniforms_are_the_upper_bits_of_the_words():
    """Key: seed and source; counter: ray, branch, event, purpose; 53 bits each, as numpy does."""
    rng = np.random.default_rng(7)
    for _ in range(200):
        seed, source = (int(x) for x in rng.integers(0, 2**63, size=2))
        ray, branch, event, purpose = (int(rng.integers(0, 10**k)) for k in (12, 2, 5, 1))
        raw = numpy_philox((seed, source), (ray, branch, event, purpose))
        expected = tuple((word >> 11) / 2**53 for word in raw)
        assert uniforms(seed, np.uint64(source), ray, branch, event, purpose) == expected
