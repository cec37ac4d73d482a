"""The account of a toy run."""

import numpy as np
import pytest

from lumentrace.analysis.account import account
from lumentrace.photometry import luminosity
from lumentrace.run.make import make_run
from tests.unit.synthetic_run import (
    AWAY,
    BLUE,
    CHANCE,
    COVER,
    FLUX,
    GREEN,
    LOST_WAY,
    ROULETTE,
    only,
    run,
    sums,
    world,
)


def test_it_closes():
    found = account(run(rounds=3))
    assert abs(found.closure) < 1e-13
    rest = (
        found.detected, *found.absorbed.values(), found.escaped, found.cut_off,
        found.unresolved, found.sampling,
    )  # fmt: skip
    assert sum(f.value for f in rest) == pytest.approx(found.emitted.value, rel=1e-13)
    assert sum(f.share for f in rest) == pytest.approx(1.0, rel=1e-13)


def test_an_account_that_does_not_close_says_by_how_much():
    broken = sums(world())
    broken.account[0, 0] *= 1.01  # what the wall absorbed
    found = account(make_run(world(), broken))
    missing = 0.01 / 1.01 * account(make_run(world(), broken)).absorbed["wall:default"].value
    assert 0.0 < found.closure < missing / FLUX.sum()


def test_rows_meet_the_truth_within_their_errors():
    found = account(run(rounds=2, seed=3))
    truth = {
        "detected": 0.9 * CHANCE[COVER],
        "cut_off": CHANCE[LOST_WAY],
        "sampling": 0.0,
    }
    for name, share in truth.items():
        flow = getattr(found, name)
        assert abs(flow.value - share * FLUX.sum()) < 4 * flow.error, name
        assert flow.share == pytest.approx(flow.value / FLUX.sum())


def test_rows_are_tags_and_filled_parts():
    assert list(account(run()).absorbed) == [
        "wall:default", "cover:inner", "cover:outer", "cover:bulk",
    ]  # fmt: skip


def test_what_was_not_met_has_no_error_and_what_is_not_sampled_has_none_to_speak_of():
    found = account(run(chance=only(AWAY)))
    assert (found.detected.value, found.detected.error) == (0.0, None)
    assert (found.emitted.value, found.emitted.error) == (3.0, 0.0)


def test_flows_count_their_contributions():
    """Two sources of equally many rays, weights 2 : 1, of which a share p arrives: of n rays
    (sum w)^2 / sum w^2 = p n (1.5^2 / 2.5); within 4 standard errors of a count of p n rays."""
    found = account(run(rounds=2))
    n, p = 2 * 65_536, CHANCE[LOST_WAY]
    counted = p * n * 1.5**2 / 2.5
    assert found.cut_off.effective == pytest.approx(counted, abs=4 * (p * n) ** 0.5)
    assert found.unresolved.effective == 0.0
    assert found.emitted.effective is None and found.sampling.effective is None


def test_sampling_is_signed():
    found = account(run(chance=only(ROULETTE)))
    assert found.sampling.error > 0.0
    assert found.escaped.value + found.sampling.value == pytest.approx(1.5, rel=1e-12)


def test_lumens_weigh_each_group_by_its_own_wavelength():
    found = account(run(chance=only(AWAY)))
    efficacy = 683.0 * np.array([luminosity(GREEN), luminosity(BLUE)])
    assert found.emitted.lumens == pytest.approx(FLUX @ efficacy, rel=1e-12)
    assert found.escaped.lumens == pytest.approx(found.emitted.lumens, rel=1e-12)
    assert found.detected.lumens == 0.0 and found.detected.lumens_error is None


def altered(**changes):
    of = world()
    sources = of.tables.sources._replace(**changes)
    of = type(of)(**{**vars(of), "tables": of.tables._replace(sources=sources)})
    return account(make_run(of, sums(of)))


def test_invisible_light_has_no_lumens():
    assert altered(wavelength=np.array([940.0, 1550.0])).emitted.lumens is None
    half = altered(wavelength=np.array([940.0, GREEN]))  # the invisible group has none
    assert half.emitted.lumens == pytest.approx(FLUX[1] * 683.0 * luminosity(GREEN))


def test_a_group_of_two_wavelengths_has_no_lumens():
    of = world()
    sources = of.tables.sources._replace(group=np.array([0, 0], np.int32))
    of = type(of)(
        **{
            **vars(of),
            "tables": of.tables._replace(sources=sources),
            "group_names": ("both", "none"),
        }
    )
    assert account(make_run(of, sums(of))).escaped.lumens is None
