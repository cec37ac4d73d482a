"""What a person sees who draws a run."""

import shutil
import struct
from pathlib import Path

import pytest
from matplotlib import image

from tests.journeys.command import ONE_ROUND, SCENES, answer, lumentrace, ok, small_scene

BLANK = 0.01  # variance of grey below which nothing can be seen; 0.25 is half black, half white
PICTURES = {
    "bench_lamp": {"scene", "paths-task", "map-task", "paths-desk", "map-desk"},
    "range_finder": {"scene", "paths-rx", "map-rx"},
}
SPARE = """
[[detector]]
name   = "spare"
plane  = { center = [0, 0, 2], normal = [0, 0, 1], across = [1, 0, 0], size = [2,2], cells = [1,1] }
counts = "irradiance"
"""


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
    assert len(said.splitlines()) == len(files), "each is told"
    left = {file.name for file in (folder / "runs").iterdir()} - {file.name for file in files}
    assert left == {run.name}, "nothing half-written"


def test_pictures_have_their_size_and_are_not_blank(drawn):
    for file in pictures_in(drawn[1]):
        width, height = pixels_of(file)
        assert width == 1600 and 1000 <= height < 1500, file.name
        grey = image.imread(file)[100:-100, 100:-100, :3].mean(axis=2)
        assert grey.var() > BLANK, file.name


def test_only_the_detector_asked_for_is_drawn(tmp_path):
    scene = small_scene(tmp_path)
    scene.write_text(scene.read_text(encoding="utf-8") + SPARE, encoding="utf-8")
    ok("trace", scene, *ONE_ROUND)
    refused = lumentrace("draw", scene, "--detector", "dusk")
    assert refused.returncode == 2 and refused.stderr.count("\n") == 1
    assert 'did you mean "desk"?' in refused.stderr
    refused = lumentrace("draw", scene, "--top", "11")
    assert refused.returncode == 2 and refused.stderr.count("\n") == 1
    assert "allowed: 1 to 10" in refused.stderr
    assert pictures_in(tmp_path) == []
    files = answer("draw", scene, "--detector", "desk", "--top", "1")["pictures"]
    wanted = ["scene.png", "paths-desk.png", "map-desk.png"]
    assert [Path(file).name.split("-", 2)[2] for file in files] == wanted


def test_a_machine_without_opengl_is_told_what_to_install(tmp_path):
    scene = small_scene(tmp_path)
    ok("trace", scene, *ONE_ROUND)
    bare = {"DISPLAY": "", "WAYLAND_DISPLAY": "", "__EGL_VENDOR_LIBRARY_DIRS": "/nonexistent"}
    bare["VTK_DEFAULT_OPENGL_WINDOW"] = "vtkEGLRenderWindow"
    done = lumentrace("draw", scene, env=bare)
    assert done.returncode == 2 and done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    assert "libegl1 libgl1-mesa-dri" in done.stderr
    assert pictures_in(tmp_path) == []
