"""`draw`: pictures of a run, written beside it."""

import subprocess
import sys

import pytest

from tests.journeys.command import SCENE, answer, lumentrace, ok, runs_of, small_scene

PNG = b"\x89PNG\r\n\x1a\n"  # PNG specification, section 5.2


@pytest.fixture
def traced(tmp_path):
    scene = small_scene(tmp_path)
    ok("trace", scene.name, cwd=tmp_path)
    return scene


def test_draw_writes_pictures_beside_the_run(traced):
    (run,) = runs_of(traced)
    found = answer("draw", traced.name, "--detector", "desk", "--top", "2", cwd=traced.parent)
    assert found["file"] == f"runs/{run.name}"
    pictures = [traced.parent / name for name in found["pictures"]]
    assert pictures
    for picture in pictures:
        assert picture.parent == run.parent
        assert picture.name.startswith(run.stem)
        assert picture.read_bytes().startswith(PNG)


def test_draw_refuses_a_scene_that_changed_since_its_run(traced):
    traced.write_text(SCENE.replace("diffuse = 0.5", "diffuse = 0.6"), encoding="utf-8")
    done = lumentrace("draw", traced.name, cwd=traced.parent)
    assert (done.returncode, done.stdout) == (2, "")
    (run,) = runs_of(traced)
    assert done.stderr.startswith(f"runs/{run.name}: plate.toml changed since this run; type: ")
    assert done.stderr.count("\n") == 1
    assert runs_of(traced) == [run]


def test_a_run_whose_scene_is_not_near_is_refused(traced, tmp_path_factory):
    away = tmp_path_factory.mktemp("away")
    (run,) = runs_of(traced)
    run.rename(away / run.name)
    done = lumentrace("draw", run.name, cwd=away)
    assert (done.returncode, done.stdout) == (2, "")
    assert "its scene plate.toml is not" in done.stderr


def test_a_missing_extra_is_named_with_what_to_type(traced):
    code = (
        "import sys; from importlib import util; find = util.find_spec\n"
        "util.find_spec = lambda name, *rest: None if name == 'pyvista' else find(name, *rest)\n"
        f"from lumentrace.cli.main import run; sys.exit(run(['draw', {traced.name!r}]))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=traced.parent, capture_output=True, text=True
    )
    assert (done.returncode, done.stdout) == (2, "")
    assert "pyvista" in done.stderr and "[pictures]" in done.stderr
    assert done.stderr.count("\n") == 1
