"""`draw`: pictures of a run, written beside it, as a person sees them."""

import shutil
import struct
import subprocess
import sys
from pathlib import Path

import pytest
from matplotlib import image

from tests.journeys.command import (
    ONE_ROUND,
    SCENE,
    SCENES,
    answer,
    lumentrace,
    ok,
    runs_of,
    small_scene,
)

BLANK = 0.01  # variance of grey below which nothing can be seen; 0.25 is half black, half white
PICTURES = {
    "bench_lamp": {"scene", "paths-task", "map-task", "paths-desk", "map-desk"},
    "range_finder": {"scene", "paths-rx", "map-rx"},
}
UNUSUAL = 'title  = "灯 under glass"'  # letters that the pictures' font lacks


def pixels_of(file: Path) -> tuple[int, int]:
    """Width and height as the header of a PNG tells them (ISO/IEC 15948, 11.2.2)."""
    head = file.read_bytes()[:24]
    assert head[:8] == b"\x89PNG\r\n\x1a\n" and head[12:16] == b"IHDR"
    return struct.unpack(">II", head[16:24])


def pictures_in(folder: Path) -> list[Path]:
    return sorted((folder / "runs").glob("*.png"))


@pytest.fixture(scope="module", params=PICTURES)
def drawn(request, tmp_path_factory):
    """Name of a demo scene, and where a copy of it was traced and drawn."""
    folder = tmp_path_factory.mktemp("drawn") / request.param
    shutil.copytree(SCENES / request.param, folder, ignore=shutil.ignore_patterns("runs"))
    scene = folder / f"{request.param}.toml"
    ok("trace", scene, *ONE_ROUND)
    done = lumentrace("draw", scene)
    assert (done.returncode, done.stderr) == (0, "")
    return request.param, folder, done.stdout


def test_every_picture_is_there_and_named_after_the_run(drawn):
    name, folder, said = drawn
    (run,) = (folder / "runs").glob("*.nc")
    files = pictures_in(folder)
    assert {file.stem.removeprefix(f"{run.stem}-") for file in files} == PICTURES[name]
    told = [line.removeprefix("Written: ") for line in said.splitlines() if "Written: " in line]
    assert sorted(map(Path, told)) == files
    left = {file.name for file in (folder / "runs").iterdir()} - {file.name for file in files}
    assert left == {run.name}, "nothing half-written"


def test_pictures_have_their_size_and_are_not_blank(drawn):
    for file in pictures_in(drawn[1]):
        width, height = pixels_of(file)
        assert width == 1600 and 1000 <= height < 1500, file.name
        grey = image.imread(file)[100:-100, 100:-100, :3].mean(axis=2)
        assert grey.var() > BLANK, file.name


@pytest.fixture(scope="module")
def plate(tmp_path_factory):
    """The folder of a small scene that was traced."""
    folder = tmp_path_factory.mktemp("plate")
    scene = small_scene(folder)
    scene.write_text(SCENE.replace('title  = "A plate of glass over a floor"', UNUSUAL), "utf-8")
    ok("trace", scene)
    return folder


@pytest.fixture
def traced(plate, tmp_path):
    """A copy of its own of the small scene."""
    shutil.copytree(plate, tmp_path, dirs_exist_ok=True)
    return tmp_path / "plate.toml"


def refusal(*words, **where) -> str:
    """The one line that refuses these words."""
    done = lumentrace("draw", *words, **where)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.count("\n") == 1
    return done.stderr


def test_a_detector_asked_for_leaves_the_picture_of_the_scene_as_it_is(traced):
    folder = traced.parent
    (run,) = runs_of(traced)
    done = lumentrace("draw", traced.name, cwd=folder)
    assert (done.returncode, done.stderr) == (0, ""), "a box for a letter is no news"
    whole = run.with_name(f"{run.stem}-scene.png")
    before = whole.read_bytes()
    found = answer("draw", traced.name, "--detector", "desk", "--top", "1", cwd=folder)
    assert found["file"] == f"runs/{run.name}"
    wanted = [f"runs/{run.stem}-{kind}-desk.png" for kind in ("paths", "map")]
    assert found["pictures"] == wanted
    assert whole.read_bytes() == before
    assert pictures_in(folder) == sorted([whole, *(folder / name for name in wanted)])


def test_what_cannot_be_drawn_is_refused_before_a_picture_is_written(traced):
    assert 'did you mean "desk"?' in refusal(traced, "--detector", "dusk")
    assert "allowed: 1 to 10" in refusal(traced, "--top", "11")
    assert pictures_in(traced.parent) == []


def test_a_scene_that_changed_since_its_run_is_refused(traced):
    changed = traced.read_text("utf-8").replace("diffuse = 0.5", "diffuse = 0.6")
    traced.write_text(changed, "utf-8")
    (run,) = runs_of(traced)
    said = refusal(traced.name, cwd=traced.parent)
    assert said.startswith(f"runs/{run.name}: plate.toml changed since this run; type: ")
    assert runs_of(traced) == [run]


def test_a_run_whose_scene_is_not_near_is_refused(traced, tmp_path_factory):
    away = tmp_path_factory.mktemp("away")
    (run,) = runs_of(traced)
    run.rename(away / run.name)
    assert "its scene plate.toml is not" in refusal(run.name, cwd=away)


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


def test_a_machine_without_opengl_is_told_what_to_install(traced):
    bare = {"DISPLAY": "", "WAYLAND_DISPLAY": "", "__EGL_VENDOR_LIBRARY_DIRS": "/nonexistent"}
    bare["VTK_DEFAULT_OPENGL_WINDOW"] = "vtkEGLRenderWindow"
    assert "libegl1 libgl1-mesa-dri" in refusal(traced, env=bare)
    assert pictures_in(traced.parent) == []
