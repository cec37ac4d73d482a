"""The contract of all lobes that finishes are mixed of, by quadrature but where a test says.

A lobe whose density is zero everywhere sends light in single directions; it must obey the laws of
reflection and refraction. Tolerance 1e-6 (quadrature), 1e-12 (single values).
"""

from math import radians, sin, sqrt

import numpy as np
import pytest

from lumentrace.kernels.fresnel import is_total, unpolarised_reflectance
from lumentrace.models import events
from lumentrace.models.registry import LOBES
from tests.unit.directions import counted_as, directions, integral, stratified

BY_NAME = pytest.mark.parametrize("lobe", LOBES, ids=lambda lobe: lobe.name)
INDICES = [(1.0, 1.0), (1.0, 1.5), (1.5, 1.0), (1.49, 1.62)]
ANGLES = [0.0, 20.0, 50.0, 80.0]
FAR_SIDE = {events.THROUGH, events.SCATTER_THROUGH}


def incoming_directions():
    for angle, azimuth in zip(ANGLES, (0.0, 1.0, 3.0, 5.0), strict=True):
        x, y, z = directions(np.cos(radians(angle)), azimuth).tolist()
        yield x, y, -z


def situations():
    return [(d, n1, n2) for d in incoming_directions() for n1, n2 in INDICES]


def is_single(lobe):
    """Whether it sends light in single directions: no density anywhere."""
    incoming, n1, n2 = situations()[-1]
    return integral(lambda out: lobe.pdf(incoming, out, n1, n2)) == 0.0


SPREAD = [lobe for lobe in LOBES if not is_single(lobe)]
SINGLE = [lobe for lobe in LOBES if is_single(lobe)]
SPREADING = pytest.mark.parametrize("lobe", SPREAD, ids=lambda lobe: lobe.name)


def test_lobes_of_both_kinds_are_registered():
    assert {"lambertian", "lambertian_through"} <= {lobe.name for lobe in SPREAD}
    assert {"fresnel", "mirror"} <= {lobe.name for lobe in SINGLE}


@BY_NAME
def test_a_sample_is_a_direction_a_gain_and_an_event(lobe):
    """Unit length, gain >= 0, and the side that the event tells."""
    rng = np.random.default_rng(1)
    for incoming, n1, n2 in situations():
        for u in rng.random((200, 4)):
            out, gain, event = lobe.sample(incoming, n1, n2, tuple(u.tolist()))
            assert sum(x * x for x in out) == pytest.approx(1, abs=1e-12)
            assert gain >= 0.0
            assert 0 <= event < len(events.EVENTS)
            assert (out[2] < 0) == (event in FAR_SIDE) and out[2] != 0


@BY_NAME
def test_albedo_is_the_mean_gain_and_at_most_one(lobe):
    rng = np.random.default_rng(2)
    for incoming, n1, n2 in situations():
        gains = [lobe.sample(incoming, n1, n2, tuple(u))[1] for u in stratified(30, rng).tolist()]
        albedo = lobe.albedo(incoming, n1, n2)
        assert 0 < albedo <= 1
        assert np.mean(gains) == pytest.approx(albedo, abs=5e-3 if np.ptp(gains) > 0 else 1e-12)


@SPREADING
def test_density_integrates_to_one(lobe):
    for incoming, n1, n2 in situations():
        assert integral(lambda out, i=incoming, a=n1, b=n2: lobe.pdf(i, out, a, b)) == (
            pytest.approx(1, abs=1e-6)
        )


@SPREADING
def test_samples_are_spread_as_the_density_says(lobe):
    """40,000 directions over a grid of uniforms."""
    rng = np.random.default_rng(3)
    incoming, n1, n2 = situations()[6]
    out = [lobe.sample(incoming, n1, n2, tuple(u))[0] for u in stratified(200, rng).tolist()]
    counted_as(lambda out: lobe.pdf(incoming, out, n1, n2), np.array(out))


@SPREADING
def test_gain_times_density_is_value_times_cosine(lobe):
    rng = np.random.default_rng(4)
    for incoming, n1, n2 in situations():
        for u in rng.random((50, 4)):
            out, gain, _ = lobe.sample(incoming, n1, n2, tuple(u.tolist()))
            carried = gain * lobe.pdf(incoming, out, n1, n2)
            expected = lobe.value(incoming, out, n1, n2) * abs(out[2])
            assert carried == pytest.approx(expected, rel=1e-12)


@SPREADING
def test_albedo_is_the_integral_of_value_times_cosine(lobe):
    for incoming, n1, n2 in situations():

        def leaving(out, i=incoming, a=n1, b=n2):
            return lobe.value(i, out, a, b) * abs(out[2])

        assert integral(leaving) == pytest.approx(lobe.albedo(incoming, n1, n2), abs=1e-6)


@SPREADING
def test_value_is_reciprocal(lobe):
    """f(in, out) = f(-out, -in); through the surface f / n^2 of the far side, axis turned."""
    rng = np.random.default_rng(5)
    for incoming, n1, n2 in situations():
        for z in rng.uniform(-1, 1, 20):
            x, y, z = directions(z, rng.uniform(0, 6.28)).tolist()
            there = lobe.value(incoming, (x, y, z), n1, n2)
            back = (-incoming[0], -incoming[1])
            if z > 0:
                again = lobe.value((-x, -y, -z), (*back, -incoming[2]), n1, n2)
                assert again == pytest.approx(there, rel=1e-12)
            elif n1 == n2:
                again = lobe.value((-x, -y, z), (*back, incoming[2]), n2, n1)
                assert again == pytest.approx(there, rel=1e-12)


@pytest.mark.parametrize("lobe", SINGLE, ids=lambda lobe: lobe.name)
def test_single_directions_obey_the_laws(lobe):
    """Reflection mirrors z; what passes keeps n sin and its azimuth, toward -z."""
    for incoming, n1, n2 in situations():
        for u in ((np.arange(50) + 0.5) / 50).tolist():
            out, _, event = lobe.sample(incoming, n1, n2, (u, 0.5, 0.5, 0.5))
            if event in FAR_SIDE:
                assert n2 * out[0] == pytest.approx(n1 * incoming[0], abs=1e-12)
                assert n2 * out[1] == pytest.approx(n1 * incoming[1], abs=1e-12)
                assert out[2] < 0
            else:
                assert out == pytest.approx((incoming[0], incoming[1], -incoming[2]), abs=1e-15)
            assert lobe.value(incoming, out, n1, n2) == 0.0


def test_fresnel_divides_by_reflectance():
    """Of equal steps of the uniform the share R reflects; beyond the critical angle all, total."""
    fresnel = next(lobe for lobe in LOBES if lobe.name == "fresnel")
    n = 4000
    for incoming, n1, n2 in situations():
        cosine = -incoming[2]
        found = [fresnel.sample(incoming, n1, n2, ((k + 0.5) / n, 0, 0, 0))[2] for k in range(n)]
        if is_total(n1, n2, cosine):
            assert set(found) == {events.TOTAL}
            assert n1 / n2 * sqrt(1 - cosine**2) >= 1
        else:
            reflectance = unpolarised_reflectance(n1, n2, cosine)
            assert set(found) <= {events.REFLECT, events.THROUGH}
            assert found.count(events.REFLECT) / n == pytest.approx(reflectance, abs=1 / n)
    assert any(n1 * sin(radians(a)) > n2 for a in ANGLES for n1, n2 in INDICES)


def test_events_of_the_lobes():
    """What each lobe can be named in a path."""
    rng = np.random.default_rng(6)
    found = {
        lobe.name: {
            events.EVENTS[lobe.sample(d, n1, n2, tuple(u.tolist()))[2]]
            for d, n1, n2 in situations()
            for u in rng.random((60, 4))
        }
        for lobe in LOBES
    }
    assert found["fresnel"] == {"through", "reflect", "total"}
    assert found["mirror"] == {"mirror"}
    assert found["lambertian"] == {"scatter"}
    assert found["lambertian_through"] == {"scatter_through"}
