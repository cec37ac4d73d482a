"""What the README tells a reader to type works."""

import re
import subprocess
import sys

import pytest

from tests.journeys.command import ROOT, answer

README = (ROOT / "README.md").read_text(encoding="utf-8")


def _blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```$", README, re.M | re.S)


def test_the_two_lines_stand_alone_and_ci_runs_the_second():
    trace, suite = (block.strip() for block in _blocks("sh"))
    for line in (trace, suite):
        assert "\n" not in line
        assert line.startswith("python3 -m venv .venv && .venv/bin/pip install ")
    scene = "scenes/bench_lamp/bench_lamp.toml"
    assert f".venv/bin/lumentrace trace {scene} && " in trace
    assert f".venv/bin/lumentrace draw {scene}" in trace
    assert (ROOT / scene).is_file()
    assert suite in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()


@pytest.mark.skipif(sys.platform == "win32", reason="needs a shell")
def test_the_scene_of_the_readme_is_complete(tmp_path):
    (mesh,), (scene,) = _blocks("shell"), _blocks("toml")
    subprocess.run(["sh", "-c", mesh], cwd=tmp_path, check=True)
    (tmp_path / "window.toml").write_text(scene, encoding="utf-8")
    found = answer("check", "window.toml", cwd=tmp_path)
    assert found["limits"][0]["measure"] == "task.mean"
    assert found["notices"] == []
    assert found["parts"]["desk"]["size"] == [500.0, 400.0, 4.0]
    assert all(part["closed"] and part["volume"] > 0.0 for part in found["parts"].values())


def test_the_python_of_the_readme_runs():
    (example,) = _blocks("python")
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", example], cwd=ROOT, capture_output=True, text=True
    )
    assert done.returncode == 0, done.stderr
    brightness, mean, *paths = done.stdout.splitlines()
    assert re.fullmatch(r"\d[\d.]* lx", brightness)
    assert re.fullmatch(r"[\d.]+ \+- [\d.]+ lx", mean)
    assert len(paths) == 3 and all(path.endswith(", desk") for path in paths)
