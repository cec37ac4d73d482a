"""The paths of a toy run."""

import numpy as np
import pytest

from lumentrace.analysis.ledger import event_text, paths
from lumentrace.errors import UserError
from lumentrace.photometry import luminosity
from lumentrace.run.make import make_run
from tests.unit.synthetic_run import (
    AWAY,
    BLUE,
    CHANCE,
    COVER,
    DIRECT,
    FLUX,
    GREEN,
    OFTEN,
    ONCE,
    only,
    run,
    sums,
    world,
)

GREEN_LM, BLUE_LM = 683 * FLUX * np.array([luminosity(GREEN), luminosity(BLUE)])


@pytest.fixture(scope="module")
def made():
    return run(rounds=2, seed=3)


def by_text(rows):
    return {row.text: row for row in rows}


def test_paths_are_text_that_can_be_read_and_pasted(made):
    assert set(by_text(paths(made, "rx"))) == {
        "lamp, cover:inner through, cover:outer through, rx",
        "spot, cover:inner through, cover:outer through, rx",
    }
    assert "lamp, desk" in by_text(paths(made, "desk"))


def test_a_run_of_events_is_one_step(made):
    found = by_text(paths(made, "desk"))
    twice, often = (
        found["lamp, wall:default scatter x2, desk"],
        found["lamp, wall:default scatter x3+, desk"],
    )
    assert twice.steps == (("wall:default", "scatter x2"),) and twice.run_means == (2.0,)
    # runs of three and of four are equally frequent, and weighted by what is left of them
    assert often.run_means[0] == pytest.approx((3 * 0.125 + 4 * 0.0625) / 0.1875, abs=0.02)
    assert often.scatters == pytest.approx(often.run_means[0])
    assert [event_text("mirror", n) for n in (1, 2, 3)] == ["mirror", "mirror x2", "mirror x3+"]


def test_strongest_first_by_detector_and_the_rest_last(made):
    rows = paths(made)
    assert [r.detector for r in rows] == ["desk"] * 9 + ["rx"] * 2
    for name in ("desk", "rx"):
        flux = [r.flux for r in rows if r.detector == name and r.source]
        assert flux == sorted(flux, reverse=True)
    assert rows[8].text == "other" and rows[8].source is None


def test_fluxes_and_shares_meet_the_truth_within_their_errors(made):
    found = by_text(paths(made))
    truth = {
        "lamp, desk": GREEN_LM * CHANCE[DIRECT],
        "lamp, wall:default scatter, desk": 0.5 * GREEN_LM * CHANCE[ONCE],
        "spot, wall:default scatter x2, desk": 0.25 * BLUE_LM * CHANCE[OFTEN] / 3,
        "lamp, cover:inner through, cover:outer through, rx": 0.9 * FLUX[0] * CHANCE[COVER],
    }
    z = {text: (found[text].flux - flux) / found[text].error for text, flux in truth.items()}
    assert max(map(abs, z.values())) < 4, z
    lamp = found["lamp, cover:inner through, cover:outer through, rx"]
    assert abs(lamp.share - 2 / 3) < 4 * lamp.share_error
    assert (lamp.unit, found["lamp, desk"].unit) == ("W", "lm")
    assert lamp.upper is None


def test_shares_of_a_detector_add_up_to_one(made):
    for name in ("desk", "rx"):
        rows = paths(made, name)
        assert sum(r.share for r in rows) == pytest.approx(1.0, rel=1e-12)
        whole = made.detector(name)["flux"].values.sum(axis=0).mean()
        assert sum(r.flux for r in rows) == pytest.approx(whole, rel=1e-12)


def test_a_share_varies_less_than_its_flux_where_both_vary_together(made):
    """The two paths to the rx share all its light: the error of one share is that of the other."""
    a, b = paths(made, "rx")
    assert a.share_error == pytest.approx(b.share_error, rel=1e-9)
    assert a.share_error < a.error / made.detector("rx")["flux"].values.sum(axis=0).mean()


def test_share_errors_are_those_of_the_spread_over_seeds():
    rows = [paths(run(seed=s), "rx")[0] for s in range(40)]
    spread = np.std([r.share for r in rows], ddof=1)
    assert abs(spread / np.mean([r.share_error for r in rows]) - 1) < 4 / np.sqrt(2 * 39)


def test_counts_rays_and_effective_numbers(made):
    row = by_text(paths(made))["lamp, cover:inner through, cover:outer through, rx"]
    assert row.effective == pytest.approx(row.count, rel=1e-9)  # equal weights
    assert len(row.rays) == 8 and list(row.rays) == sorted(row.rays)
    other = by_text(paths(made, "desk"))["other"]
    assert other.count == int(made.ledger["other_count"].sel(detector="desk").sum())
    assert (other.effective, other.rays, other.steps, other.arrival) == (None, (), (), None)


def test_arrival_is_the_group_length_over_the_speed_of_light_in_air(made):
    """900 mm of air: 0.9 m x 1.00027 / c."""
    for row in paths(made, "rx"):
        assert row.arrival == pytest.approx(0.9 * 1.00027 / 299_792_458 * 1e9, rel=1e-12)
        assert row.length == pytest.approx(800.0, rel=1e-12)
    in_feet = paths(run(lengths=("ft", 0.3048)), "rx")[0]
    assert in_feet.arrival == pytest.approx(900 * 0.3048 * 1.00027 / 0.299_792_458, rel=1e-12)


def test_light_that_a_detector_does_not_see_is_no_flux_for_certain():
    """Arrivals of invisible light at an illuminance plane."""
    of = world()
    sources = of.tables.sources._replace(wavelength=np.array([940.0, 940.0]))
    of = type(of)(**{**vars(of), "tables": of.tables._replace(sources=sources)})
    row = paths(make_run(of, sums(of, chance=only(DIRECT))), "desk")[0]
    assert (row.flux, row.error, row.upper) == (0.0, None, 0.0)
    assert (row.share, row.share_error, row.length) == (None, None, None)
    assert row.count > 0


def test_a_detector_without_light_has_no_paths_and_an_unknown_one_is_named():
    dark = run(chance=only(AWAY))
    assert paths(dark) == []
    with pytest.raises(UserError, match='no detector is named "dusk"; did you mean "desk"'):
        paths(dark, "dusk")
