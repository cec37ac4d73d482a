"""`ledger`: the paths of a run, strongest first."""

import re
import subprocess
import sys

import pytest

from tests.journeys.command import (
    SCENE,
    answer,
    assert_narrow,
    lumentrace,
    ok,
    runs_of,
    small_scene,
)


@pytest.fixture
def traced(tmp_path):
    scene = small_scene(tmp_path)
    ok("trace", scene.name, cwd=tmp_path)
    return scene


def test_ledger_prints_the_strongest_paths_of_the_newest_run(traced):
    text = ok("ledger", traced.name, "--top", "3", cwd=traced.parent)
    assert_narrow(text)
    (run,) = runs_of(traced)
    assert f"runs/{run.name}: 65 536 rays, seed 3." in text
    assert re.search(
        r"^desk: \d+ paths; the strongest 3 bring [\d.]+ % of its light\.$", text, re.M
    )
    assert re.search(r"^1 +[\d.]+ +[\d.]+ +[\d.]+ +[\d.]+ +[\d ]+$", text, re.M)
    first = text.splitlines()[6].strip()
    assert first == "lamp, window:above through, window:below through, desk"
    assert text.endswith("Simulated: confirm by measurement.\n")


def test_ledger_for_machines_is_sorted_and_its_shares_add_up(traced):
    found = answer("ledger", traced.name, cwd=traced.parent)["paths"]
    assert found[0].keys() == {
        "detector", "source", "path", "flux", "error", "unit", "share", "share_error", "upper",
        "count", "effective", "reflections", "scatters", "length", "arrival_ns",
    }  # fmt: skip
    assert found[0]["path"] == [["window:above", "through"], ["window:below", "through"]]
    kept = [row["flux"] for row in found if row["path"] is not None]
    assert kept == sorted(kept, reverse=True)
    assert sum(row["share"] for row in found) == pytest.approx(1, rel=1e-9)
    assert len(answer("ledger", traced.name, "--top", "2", cwd=traced.parent)["paths"]) == 2


def test_a_path_has_the_flux_of_its_closed_form(traced):
    """Straight through the plate: transmittance of both faces and of the glass, within 4 errors.

    Fresnel at normal incidence 0.96^2 for n = 1.5 (Born and Wolf, 1.5.2; from memory), and
    exp(-0.01 x 1 mm). Slant adds path and reflection: at 12 degrees at most 0.1 %.
    """
    from math import asin, exp, pi

    row = answer("ledger", traced.name, "--top", "1", cwd=traced.parent)["paths"][0]
    height = 19 - 1 + 1 / 1.5  # the plate lifts the lamp by t (1 - 1/n)
    seen = 100 / (4 * pi) * 4 * asin(4**2 / (4**2 + height**2))
    expected = seen * 0.96**2 * exp(-0.01)
    assert abs(row["flux"] - expected) <= 4 * row["error"] + 0.003 * expected


def test_one_detector_only_and_an_unknown_one(traced):
    assert "desk: " in ok("ledger", traced.name, "--detector", "desk", cwd=traced.parent)
    done = lumentrace("ledger", traced.name, "--detector", "dsk", cwd=traced.parent)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr == 'no detector is named "dsk"; did you mean "desk"?\n'


def test_a_scene_that_changed_since_its_run_is_told(traced):
    before = ok("ledger", traced.name, cwd=traced.parent)
    traced.write_text(SCENE.replace("diffuse = 0.5", "diffuse = 0.6"), encoding="utf-8")
    done = lumentrace("ledger", traced.name, cwd=traced.parent)
    assert (done.returncode, done.stdout) == (0, before)
    assert "plate.toml changed since this run" in done.stderr


def test_a_mesh_that_changed_since_its_run_is_told(traced):
    mesh = traced.parent / "plate.obj"
    mesh.write_text(mesh.read_text(encoding="ascii") + "# moved\n", encoding="ascii")
    done = lumentrace("ledger", traced.name, cwd=traced.parent)
    assert done.returncode == 0
    assert "plate.obj changed since this run" in done.stderr


def test_the_newest_run_is_taken_or_the_one_that_is_named(traced):
    (old,) = runs_of(traced)
    ok("trace", traced.name, "--seed", "9", cwd=traced.parent)
    assert "seed 9." in ok("ledger", traced.name, cwd=traced.parent)
    assert "seed 3." in ok("ledger", old, cwd=traced.parent)
    drawn = ok("draw", traced.name, "--top", "1", cwd=traced.parent)
    assert "seed 9." in drawn.splitlines()[0]


def test_a_reader_that_has_enough_is_no_fault(traced):
    command = [sys.executable, "-m", "lumentrace", "ledger", traced.name, "--json"]
    with subprocess.Popen(
        command, cwd=traced.parent, stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as reading:
        reading.stdout.close()
        said = reading.stderr.read()
    assert reading.returncode == 0
    assert said == b""
