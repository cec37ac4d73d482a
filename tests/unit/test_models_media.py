"""The contract of all media, and the law of Beer and Lambert. Tolerance 1e-14 relative."""

from math import exp, inf

import numpy as np
import pytest

from lumentrace.models.events import ARRIVED, EVENTS
from lumentrace.models.media.uniform import advance, index, transmittance
from lumentrace.models.registry import MEDIA

EXAMPLES = {"uniform": [(1.0, 0.0), (1.5, 0.0), (1.33, 0.8)]}
CASES = [
    pytest.param(medium, np.array([*values, 0.0, 0.0]), id=f"{medium.name}-{values}")
    for medium in MEDIA
    for values in EXAMPLES[medium.name]
]
UNIFORMS = (0.1, 0.5, 0.9, 0.3)
ORIGIN, DIRECTION = (1.0, -2.0, 3.0), (0.6, 0.0, -0.8)


def go(medium, values, length, origin=ORIGIN):
    return medium.advance(values, 555.0, origin, DIRECTION, length, UNIFORMS)


@pytest.mark.parametrize(("medium", "values"), CASES)
def test_a_segment(medium, values):
    """No farther than asked, never more weight, lengths not below the way times index 1/1.1."""
    position, direction, factor, optical, group, event = go(medium, values, 2.5)
    way = np.linalg.norm(np.subtract(position, ORIGIN))
    assert way <= 2.5 + 1e-12
    assert np.linalg.norm(direction) == pytest.approx(1)
    assert 0 < factor <= 1
    assert optical >= way / 1.1 and group >= way / 1.1
    assert event == ARRIVED or 0 <= event < len(EVENTS)
    assert medium.index(values) >= 1 / 1.1


@pytest.mark.parametrize(("medium", "values"), CASES)
def test_two_halves_are_the_whole(medium, values):
    """Where nothing happens on the way, factors multiply and lengths add."""
    whole = go(medium, values, 2.5)
    first = go(medium, values, 1.0)
    second = go(medium, values, 1.5, first[0])
    if {whole[5], first[5], second[5]} == {ARRIVED}:
        assert second[0] == pytest.approx(whole[0])
        assert first[2] * second[2] == pytest.approx(whole[2])
        assert first[3] + second[3] == pytest.approx(whole[3])
        assert first[4] + second[4] == pytest.approx(whole[4])


def test_uniform_goes_straight():
    values = np.array([1.5, 0.4, 0.0, 0.0])
    position, direction, factor, optical, group, event = advance(
        values, 555.0, ORIGIN, DIRECTION, 2.5, UNIFORMS
    )
    assert position == pytest.approx((2.5, -2.0, 1.0), rel=1e-15)
    assert direction == DIRECTION
    assert factor == pytest.approx(exp(-1.0), rel=1e-14)
    assert optical == group == pytest.approx(3.75, rel=1e-15)
    assert event == ARRIVED
    assert index(values) == 1.5


@pytest.mark.parametrize("absorption", [0.0, 1e-9, 0.3, 40.0])
@pytest.mark.parametrize("length", [0.0, 1e-6, 2.0, 300.0])
def test_transmittance(absorption, length):
    assert transmittance(absorption, length) == pytest.approx(exp(-absorption * length), rel=1e-14)


def test_an_endless_way():
    """Nothing is lost where nothing absorbs, everything where something does."""
    assert transmittance(0.0, inf) == 1.0
    assert transmittance(1e-12, inf) == 0.0
