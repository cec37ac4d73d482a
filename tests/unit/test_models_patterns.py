"""The contract of all patterns of sources, by quadrature but where a test says."""

from math import cos, inf, radians

import numpy as np
import pytest

from lumentrace.models.registry import PATTERNS
from tests.unit.directions import counted_as, integral, stratified

EXAMPLES = {
    "isotropic": [0.0],
    "lambertian": [0.0],
    "cosine_power": [0.0, 0.5, 1.0, 1.4, 30.0],
    "collimated": [cos(radians(a)) for a in (0.2667, 5.0, 40.0, 89.0)],
}  # values[0] of each pattern
CASES = [
    pytest.param(pattern, np.array([value, 0.0]), id=f"{pattern.name}-{value:.6g}")
    for pattern in PATTERNS
    for value in EXAMPLES[pattern.name]
]


def edges(pattern, values):
    """Where the density begins, and bins of the cosine that resolve it."""
    low = values[0] if pattern.name == "collimated" else 0.0
    steps = np.linspace(low, 1.0, 9)
    return np.concatenate([[-1.0, -0.5], [0.0] if low > 0 else [], steps])


@pytest.mark.parametrize(("pattern", "values"), CASES)
def test_density_integrates_to_one(pattern, values):
    """Piece by piece between the edges; 1e-6, from m < 1, whose density is steep at 90 degrees."""
    bins = edges(pattern, values)
    total = sum(
        integral(lambda d: pattern.pdf(values, d), a, b)
        for a, b in zip(bins, bins[1:], strict=False)
    )
    assert total == pytest.approx(1, abs=1e-6)


@pytest.mark.parametrize(("pattern", "values"), CASES)
def test_directions_are_spread_as_the_density_says(pattern, values):
    """40,000 unit directions over a grid of uniforms."""
    u = stratified(200, np.random.default_rng(1))[:, :2].tolist()
    out = np.array([pattern.emit(values, *pair) for pair in u])
    assert np.abs(np.linalg.norm(out, axis=1) - 1).max() < 1e-12
    counted_as(lambda d: pattern.pdf(values, d), out, edges(pattern, values))


@pytest.mark.parametrize(("pattern", "values"), CASES)
def test_the_density_is_that_of_emission_about_z(pattern, values):
    """d(cosine) / d(u1) = 1 / (2 pi density): exact inversion, point by point; relative 1e-4."""
    step = 1e-6
    for u in (0.05, 0.3, 0.6, 0.9):
        before, here, after = (pattern.emit(values, u + k * step, 0.3) for k in (-1, 0, 1))
        slope = abs(after[2] - before[2]) / (2 * step)
        assert 1 / (2 * np.pi * pattern.pdf(values, here)) == pytest.approx(slope, rel=1e-4)


def test_a_parallel_beam():
    """A half-angle of 0 has one direction and no finite density."""
    collimated = next(p for p in PATTERNS if p.name == "collimated")
    values = np.array([1.0, 0.0])
    for u in (0.0, 0.4, 1 - 2.0**-53):
        assert collimated.emit(values, u, 0.7) == (0.0, 0.0, 1.0)
    assert collimated.pdf(values, (0.0, 0.0, 1.0)) == inf
    assert collimated.pdf(values, (0.1, 0.0, 0.99)) == 0.0


def test_cosine_power_one_is_lambertian():
    by_name = {p.name: p for p in PATTERNS}
    for u1 in (0.0, 0.2, 0.7, 0.999):
        power = by_name["cosine_power"].emit(np.array([1.0, 0.0]), u1, 0.35)
        plain = by_name["lambertian"].emit(np.array([0.0, 0.0]), u1, 0.35)
        assert power == pytest.approx(plain, abs=1e-15)
