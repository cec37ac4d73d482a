"""The command line as a person uses it: a subprocess, its exit status and what it printed."""

import json
import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[2]
SCENES = ROOT / "scenes"
ONE_ROUND = ["--rays", "65536"]

PLATE = """\
v -5 -5 0
v 5 -5 0
v 5 5 0
v -5 5 0
v -5 -5 1
v 5 -5 1
v 5 5 1
v -5 5 1
g below
f 1 4 3 2
g above
f 5 6 7 8
g rim
f 1 2 6 5
f 2 3 7 6
f 3 4 8 7
f 4 1 5 8
"""

SCENE = """\
[study]
title  = "A plate of glass over a floor"
length = "mm"
seed   = 3

[medium.glass]
index      = 1.5
absorption = 0.01

[finish.grey]
diffuse = 0.5

[[part]]
name   = "window"
mesh   = "plate.obj"
medium = "glass"
at     = [0, 0, 10]

[[part]]
name   = "floor"
mesh   = "plate.obj"
medium = "opaque"
finish = "grey"
at     = [0, 0, -1]

[[source]]
name     = "lamp"
point    = [0, 0, 20]
flux     = { lumens = 100 }
pattern  = "isotropic"
spectrum = { line = 555 }

[[detector]]
name   = "desk"
plane  = { center = [0, 0, 1], normal = [0, 0, 1], across = [1, 0, 0], size = [8,8], cells = [2,2] }
counts = "illuminance"

[trace]
rays = 65_536

[[limit]]
measure  = "desk.mean"
at_least = 100
"""


def lumentrace(*words, cwd=None, env=None) -> subprocess.CompletedProcess:
    """Run `python -m lumentrace` with these words, 80 columns wide."""
    return subprocess.run(
        [sys.executable, "-m", "lumentrace", *map(str, words)],
        cwd=cwd,
        env={**os.environ, "COLUMNS": "80", **(env or {})},
        capture_output=True,
        text=True,
        timeout=300,
    )


def ok(*words, cwd=None) -> str:
    """Standard output of a command that must succeed."""
    done = lumentrace(*words, cwd=cwd)
    assert done.returncode == 0, done.stderr
    return done.stdout


def answer(*words, cwd=None) -> dict:
    """The one JSON object of a command that must succeed."""
    return json.loads(ok(*words, "--json", cwd=cwd))


def small_scene(folder: Path) -> Path:
    """A scene that traces in a moment, with its mesh, in a folder."""
    (folder / "plate.obj").write_text(PLATE, encoding="ascii")
    scene = folder / "plate.toml"
    scene.write_text(SCENE, encoding="utf-8")
    return scene


def runs_of(scene: Path) -> list[Path]:
    return sorted((scene.parent / "runs").glob("*.nc"))


def assert_narrow(text: str) -> None:
    wide = [line for line in text.splitlines() if len(line) > 80]
    assert not wide, wide
