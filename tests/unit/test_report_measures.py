"""Measures and limits in text and JSON."""

import pytest

from lumentrace.analysis.measures import CELL_NOT_HIT, FEW_NOTE, NOT_HIT, Measure
from lumentrace.report.measures import distance, limits_json, measure_lines, measures_json


def _measure(name, value, error, unit="lx", upper=None, unseen=0.0, effective=5e3, note=""):
    return Measure(name, value, error, unit, upper, unseen, effective, note)


def _limit(measure, at_least=None, at_most=None):
    return {"measure": measure, "at_least": at_least, "at_most": at_most, "note": ""}


def _by_name(*measures):
    return {m.name: m for m in measures}


MEAN = _measure("desk.mean", 612.234, 0.05)


def test_distance_is_in_errors_and_negative_beyond_the_limit():
    assert distance(MEAN, _limit("desk.mean", at_least=612.134)) == pytest.approx(2.0)
    assert distance(MEAN, _limit("desk.mean", at_most=612.134)) == pytest.approx(-2.0)
    both = _limit("desk.mean", at_least=612.134, at_most=612.284)
    assert distance(MEAN, both) == pytest.approx(1.0)  # the nearer bound


def test_no_distance_without_an_error():
    assert distance(_measure("rx.flux", 0.0, None), _limit("rx.flux", at_most=1.0)) is None
    assert distance(_measure("rx.flux", 2.0, 0.0), _limit("rx.flux", at_most=1.0)) is None
    assert distance(_measure("rx.uniformity", None, None), _limit("x", at_least=0.5)) is None


def test_table_rounds_by_the_error_and_shows_limits():
    lines = measure_lines(_by_name(MEAN), [_limit("desk.mean", at_least=500)], set())
    assert lines == [
        "measure      value  error  unit  errors away",
        "desk.mean   612.23   0.05  lx",
        "  at least     500               2240 inside",
    ]


def test_twin_by_halves_follows_its_measure():
    measures = _by_name(
        _measure("desk.min", 423.0, 2.0),
        _measure("desk.max", 700.0, 3.0),
        _measure("desk.min_split", 424.0, 2.0),
        _measure("desk.max_split", 699.0, 3.0),
    )
    lines = measure_lines(measures, [], set())
    assert [" ".join(line.split()) for line in lines[:5]] == [
        "measure value error unit",
        "desk.min 423 2 lx",
        "by halves 424 2 lx",
        "desk.max 700 3 lx",
        "by halves 699 3 lx",
    ]


def test_not_hit_is_never_zero_with_zero_error():
    measures = _by_name(
        _measure("rx.flux", 0.0, None, "W", upper=3.2e-9, effective=0.0, note=NOT_HIT),
        _measure("pd.flux", 0.0, None, "W", effective=0.0, note=NOT_HIT),
    )
    lines = measure_lines(measures, [_limit("rx.flux", at_most=1e-6)], set())
    assert lines[1].split() == ["rx.flux", "not", "hit", "<", "3.2e-09", "W"]
    assert lines[2].split() == ["at", "most", "1e-06", "unknown"]
    assert lines[3].split() == ["pd.flux", "not", "hit", "W"]
    assert "Not hit, and no bound is proven: pd.flux." in lines


def test_few_contributions_and_unseen_light_are_said():
    measures = _by_name(
        _measure("rx.flux", 2.0, 1.0, "W", effective=4.0, note=FEW_NOTE, unseen=0.123)
    )
    lines = measure_lines(measures, [], set())
    assert lines[1].split() == ["rx.flux", "2.0", "1.0", "W", "0.1"]
    assert any(line.startswith("Fewer than 100 effective contributions") for line in lines)
    assert any(line.startswith("unseen: ") for line in lines)


def test_cells_of_a_single_cell_and_losses_are_shown_only_with_a_limit():
    measures = _by_name(
        _measure("rx.mean", 5.0, 1.0),
        _measure("rx.min", 5.0, 1.0),
        _measure("wall.absorbed", 5.0, 1.0, "%"),
        _measure("study.escaped", 5.0, 1.0, "%"),
    )
    shown = "\n".join(measure_lines(measures, [], {"rx"}))
    assert "rx.mean" in shown
    assert not any(name in shown for name in ("rx.min", "wall.absorbed", "study.escaped"))
    limited = measure_lines(measures, [_limit("wall.absorbed", at_most=8.0)], {"rx"})
    at = next(i for i, line in enumerate(limited) if line.startswith("wall.absorbed"))
    assert limited[at + 1].split() == ["at", "most", "8", "3", "inside"]


def test_several_limits_of_a_measure_stand_below_each_other():
    limits = [_limit("desk.mean", at_least=500), _limit("desk.mean", at_most=600)]
    lines = measure_lines(_by_name(MEAN), limits, set())
    assert [line.split() for line in lines[2:]] == [
        ["at", "least", "500", "2240", "inside"], ["at", "most", "600", "245", "beyond"],
    ]  # fmt: skip
    both = [_limit("desk.mean", at_least=500, at_most=600)]
    assert measure_lines(_by_name(MEAN), both, set()) == lines


@pytest.mark.parametrize(
    ("unit", "at_least", "at_most", "shown"),
    [
        ("lx", None, 5.5, "open: unseen"),  # lost light may bring the value there
        ("lx", None, 5.6, "6 inside"),
        ("lx", 5.5, None, "open: unseen"),
        ("lx", 4.5, None, "5 inside"),  # lost light only adds
        ("lx", None, 4.5, "5 beyond"),
        ("1", 4.5, None, "open: unseen"),  # but a uniformity may fall
        ("1", None, 4.5, "open: unseen"),
        ("1", 4.4, None, "6 inside"),
    ],
)
def test_a_limit_that_unseen_light_could_cross_is_open(unit, at_least, at_most, shown):
    measures = _by_name(_measure("desk.x", 5.0, 0.1, unit, unseen=0.5))
    limit = _limit("desk.x", at_least, at_most)
    lines = measure_lines(measures, [limit], set())
    assert lines[2].endswith(f"  {shown}")
    said = any(line.startswith("open: unseen light could move") for line in lines)
    assert said == (shown == "open: unseen")
    assert limits_json(measures, [limit])[0]["unseen"] == 0.5


def test_a_cell_that_was_not_hit_beside_others_that_were_is_told_apart():
    measures = _by_name(
        _measure("rx.mean", 2.0, 0.1),
        _measure("rx.min", 0.0, None, upper=0.3, note=CELL_NOT_HIT),
    )
    lines = measure_lines(measures, [], set())
    assert lines[2].split() == ["rx.min", "cell", "not", "hit", "<", "0.3", "lx"]
    assert any(line.startswith("Cell not hit: light reached the detector") for line in lines)


def test_json_holds_the_six_facts_and_limits_their_distance():
    assert measures_json(_by_name(MEAN)) == {
        "desk.mean": {"value": 612.234, "error": 0.05, "unit": "lx", "upper": None, "unseen": 0.0,
                      "effective": 5e3}
    }  # fmt: skip
    (limit,) = limits_json(_by_name(MEAN), [_limit("desk.mean", at_least=612.184)])
    assert limit["value"] == 612.234
    assert limit["distance"] == pytest.approx(1.0)
