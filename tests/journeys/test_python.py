"""The Python interface refuses what cannot be, in one line, before anything is traced."""

import numpy as np
import pytest

import lumentrace
from tests.journeys.command import small_scene


@pytest.mark.parametrize(
    ("words", "line"),
    [
        ({"rays": "1e5"}, "rays: '1e5' is not a whole number; allowed: 1 to 1000000000000000"),
        ({"rays": 0}, "rays: 0 is out of range; allowed: 1 to 1000000000000000"),
        ({"threads": 1.0}, "threads: 1.0 is not a whole number; allowed: 1 to 1024"),
        ({"threads": 0}, "threads: 0 is out of range; allowed: 1 to 1024"),
        ({"seed": -1}, "seed: -1 is out of range; allowed: 0 to 9223372036854775807"),
        ({"seed": 2**70}, f"seed: {2**70} is out of range; allowed: 0 to 9223372036854775807"),
        ({"seed": "a"}, "seed: 'a' is not a whole number; allowed: 0 to 9223372036854775807"),
    ],
)
def test_a_number_that_cannot_be_is_refused(words, line, tmp_path):
    with pytest.raises(lumentrace.UserError) as refused:
        lumentrace.trace(small_scene(tmp_path), **words)
    assert str(refused.value) == line


def test_any_type_of_whole_number_is_taken(tmp_path):
    scene = lumentrace.load(small_scene(tmp_path), seed=np.int64(5))
    assert scene.study.seed == 5 and type(scene.study.seed) is int
