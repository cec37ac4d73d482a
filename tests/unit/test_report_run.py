"""Account, lost rays and ledger of a synthetic run, in text and JSON."""

from dataclasses import replace
from pathlib import Path

import pytest

from lumentrace.analysis.account import account
from lumentrace.analysis.unseen import unseen_of
from lumentrace.errors import UserError
from lumentrace.report.account import account_json, account_lines, lost_json, lost_lines
from lumentrace.report.ledger import ledger_json, ledger_text
from tests.unit import synthetic_run

FILE = Path("runs/toy-01234567.nc")


@pytest.fixture(scope="module")
def run():
    return synthetic_run.run()


def _words(lines):
    return [" ".join(line.split()) for line in lines]


def test_account_json_adds_up_to_what_was_emitted(run):
    found = account_json(account(run))
    rest = [v["value"] for k, v in found.items() if k not in ("emitted", "absorbed")]
    absorbed = [v["value"] for v in found["absorbed"].values()]
    assert found["emitted"] == {"value": 3.0, "error": 0.0, "effective": None}
    assert sum(rest) + sum(absorbed) == pytest.approx(3.0, rel=1e-12)
    assert found["unresolved"] == {"value": 0.0, "error": None, "effective": 0.0}


def test_account_is_sorted_in_lumens_or_watts(run):
    in_lumens = _words(account_lines(account(run), in_lumens=True))
    in_watts = _words(account_lines(account(run), in_lumens=False))
    assert in_lumens[0].endswith("lm (3 W) went to lm error %")
    assert in_watts[0] == "3 W went to W error %"
    assert [line.split()[0] for line in in_watts[1:5]] == [
        "wall:default", "escaped", "detected", "cover:bulk",
    ]  # fmt: skip
    assert any(line.startswith("cut off ") for line in in_watts)
    assert "Nothing absorbed: cover:inner, cover:outer." in in_watts
    without = _words(account_lines(account(run), False, clear={"cover:inner"}))
    assert "Nothing absorbed: cover:outer." in without


def test_account_marks_flows_of_few_contributions(run):
    found = account(run)
    lines = account_lines(found, in_lumens=False)
    assert not any("few" in line for line in lines)  # thousands each
    weak = replace(found, escaped=replace(found.escaped, effective=99.0))
    lines = account_lines(weak, in_lumens=True)
    assert [line.split()[0] for line in lines if line.endswith("  few")] == ["escaped"]
    assert lines[-1].startswith("few: fewer than 100 effective contributions")


def test_lost_rays_are_counted_and_named_with_their_reason(run):
    lost = lost_json(run)
    assert lost["count"] == run.data.attrs["lost_count"] > 5
    assert len(lost["rays"]) == 5
    assert lost["rays"][0]["reason"] == "more events than events_max"
    assert lost["rays"][0]["tag"] is None
    lines = lost_lines(run)
    assert lines[0] == f"{lost['count']} rays could not be followed to the end; of the first 5:"
    assert lines[1].split(maxsplit=1) == ["5", "more events than events_max"]


def test_ledger_says_what_lost_light_could_add(run):
    most = unseen_of(run, "rx").flux
    assert most > 0.0
    told = f"Light cut off or unresolved could add up to {most:.2g} W here."
    assert told in ledger_text(run, FILE, "rx", None).splitlines()
    whole = synthetic_run.run(chance=synthetic_run.only(synthetic_run.AWAY))
    assert "cut off" not in ledger_text(whole, FILE, None, None)


def test_no_lost_rays_no_lines():
    assert lost_lines(synthetic_run.run(chance=synthetic_run.only(synthetic_run.AWAY))) == []


def test_ledger_text_has_numbers_and_path_on_lines_of_their_own(run):
    lines = ledger_text(run, FILE, "rx", 1).splitlines()
    assert lines[0] == "toy.toml: Toy"
    assert lines[1] == "runs/toy-01234567.nc: 65 536 rays, seed 7."
    assert lines[3].startswith("rx: 2 paths; the strongest 1 bring ")
    assert lines[6] == "     lamp, cover:inner through, cover:outer through, rx"


def test_ledger_breaks_long_paths_between_steps(run):
    for line in ledger_text(run, FILE, None, None).splitlines():
        assert len(line) <= 80
        if line.startswith("     ") and not line.endswith(("desk", "rx", "other")):
            assert line.endswith(",")


def test_ledger_json_tells_paths_and_the_rest_apart(run):
    found = ledger_json(run, FILE, "desk", None)["paths"]
    assert found[0]["path"] == []  # straight from the lamp
    assert found[-1]["path"] is None  # paths that were not kept
    assert sum(row["share"] for row in found) == pytest.approx(1.0)
    assert len(ledger_json(run, FILE, None, 1)["paths"]) == 2
    assert found[-1]["arrival_ns"] is None and found[0]["arrival_ns"] > 0.0
    assert (found[0]["reflections"], found[0]["scatters"]) == (0.0, 0.0)


def test_detector_without_light_is_said():
    dark = synthetic_run.run(chance=synthetic_run.only(synthetic_run.AWAY))
    assert "rx: no light arrived." in ledger_text(dark, FILE, None, None).splitlines()


def test_unknown_detector_is_refused(run):
    with pytest.raises(UserError, match='did you mean "desk"'):
        ledger_text(run, FILE, "dsk", None)
