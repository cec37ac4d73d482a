"""The meshes of the demo scenes are what their scripts make of the named dimensions."""

import runpy
import subprocess
import sys
from pathlib import Path

import pytest
import trimesh

SCENES = Path(__file__).parents[2] / "scenes"
STUDIES = ("bench_lamp", "range_finder")


def meshes(study):
    return sorted(p.name for p in (SCENES / study).iterdir() if p.suffix in (".stl", ".obj"))


@pytest.mark.parametrize("study", STUDIES)
def test_script_makes_the_committed_bytes(study, tmp_path):
    script = SCENES / study / "make_meshes.py"
    subprocess.run([sys.executable, "-B", script, tmp_path], check=True)
    assert meshes(study) == sorted(p.name for p in tmp_path.iterdir())
    for name in meshes(study):
        assert (tmp_path / name).read_bytes() == (SCENES / study / name).read_bytes(), name


@pytest.mark.parametrize("path", [s + "/" + m for s in STUDIES for m in meshes(s)])
def test_bodies_are_closed_and_outside_out(path):
    body = trimesh.load_mesh(SCENES / path)
    body.merge_vertices(merge_tex=True, merge_norm=True)
    assert body.is_watertight
    assert body.is_winding_consistent
    assert body.volume > 0


def test_sizes_follow_the_named_dimensions():
    lamp = runpy.run_path(str(SCENES / "bench_lamp" / "make_meshes.py"))
    tray = trimesh.load_mesh(SCENES / "bench_lamp" / "tray.stl")
    size = (lamp["TRAY_LENGTH"], lamp["TRAY_WIDTH"], lamp["TRAY_HEIGHT"])
    assert tray.extents == pytest.approx(size)
    outer = size[0] * size[1] * size[2]
    inner = (
        (size[0] - 2 * lamp["TRAY_WALL"])
        * (size[1] - 2 * lamp["TRAY_WALL"])
        * (size[2] - lamp["TRAY_FLOOR"])
    )
    assert tray.volume == pytest.approx(outer - inner, rel=1e-6)
    finder = runpy.run_path(str(SCENES / "range_finder" / "make_meshes.py"))
    housing = trimesh.load_mesh(SCENES / "range_finder" / "housing.obj")
    assert housing.extents == pytest.approx(
        (finder["HOUSING_LENGTH"], finder["HOUSING_WIDTH"], finder["HOUSING_HEIGHT"])
    )
