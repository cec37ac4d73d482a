"""Runs on disk: where those of a scene go, what they are called, how one is found again.

Nothing heavy is imported before the first call that needs it.
"""

import hashlib
import os
import re
import shlex
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from lumentrace.errors import UserError

if TYPE_CHECKING:
    from lumentrace.run.run import Run
    from lumentrace.scene.model import Scene

SUFFIX = ".nc"
FOLDER = "runs"
DIGITS = 8  # of a name's digest: that any two of 1000 runs share theirs has a chance of 0.01 %


def run_folder(scene: "Scene", out: str | os.PathLike | None) -> Path:
    """Where runs of a scene go: `out`, or runs/ beside the scene file.

    Raises UserError, before anything is traced, where no file can be written there.
    """
    folder = scene.path.parent / FOLDER if out is None else Path(out)
    there = next(p for p in (folder, *folder.absolute().parents) if p.exists())
    if not there.is_dir():
        raise UserError(f"{folder}: is not a folder; {there} is a file")
    if not os.access(there, os.W_OK | os.X_OK):
        raise UserError(f"{folder}: cannot be written; choose another folder with --out")
    return folder


def run_name(run: "Run") -> str:
    """STEM-XXXXXXXX.nc: the scene file's stem, and a digest of all that made the run."""
    facts = run.data.attrs
    made_by = [facts[k] for k in ("lumentrace", "scene_digest", "mesh_digests", "seed", "rays")]
    digest = hashlib.sha256("\n".join(map(str, made_by)).encode()).hexdigest()
    return f"{Path(facts['scene']).stem}-{digest[:DIGITS]}{SUFFIX}"


def newest_run(scene_path: Path) -> Path:
    """The newest run of a scene in runs/ beside it.

    Raises UserError with the command to type where there is none.
    """
    digest = f"[0-9a-f]{{{DIGITS}}}"
    named = re.compile(f"{re.escape(scene_path.stem)}-{digest}{re.escape(SUFFIX)}")
    folder = scene_path.parent / FOLDER
    runs = [p for p in folder.glob(f"*{SUFFIX}") if named.fullmatch(p.name)]
    if not runs:
        raise UserError(
            f"{scene_path}: has no run yet; type: lumentrace trace {shlex.quote(str(scene_path))}"
        )
    return max(runs, key=lambda p: (p.stat().st_mtime_ns, p.name))


@dataclass(frozen=True)
class FoundRun:
    """A run that a user asked for, by its scene or by its own file."""

    run: "Run"
    path: Path
    scene: "Scene | None"  # as it is now; None where the run's own file was asked for


def find_run(path: str | os.PathLike) -> FoundRun:
    """The run of a file STEM-XXXXXXXX.nc, or else the newest run of a scene file.

    Raises UserError where there is none.
    """
    from lumentrace.run.store import open_run
    from lumentrace.scene.read import read_scene

    path = Path(path)
    if path.suffix == SUFFIX:
        return FoundRun(open_run(path), path, None)
    scene = read_scene(path)
    newest = newest_run(path)
    return FoundRun(open_run(newest), newest, scene)


def scene_path(found: FoundRun) -> Path:
    """The scene file that a run was made from. Raises UserError where it is not near the run."""
    if found.scene:
        return found.scene.path
    name = found.run.data.attrs["scene"]
    near = (found.path.parent.parent / name, found.path.parent / name, Path(name))
    for path in near:
        if path.is_file():
            return path
    raise UserError(f"{found.path}: its scene {name} is not in the folder above; move it there")


def changed_since(run: "Run", scene: "Scene") -> list[str]:
    """The files of a scene that are no longer what a run was made from; [] if all are."""
    changed = [] if run.data.attrs["scene_digest"] == scene.digest else [scene.path.name]
    for part in scene.parts:
        if part.use and run.mesh_digests.get(part.name) != _file_digest(part.mesh):
            changed.append(part.mesh.name)
    return list(dict.fromkeys(changed))


def _file_digest(path: Path) -> str | None:
    try:
        return hashlib.sha256(path.read_bytes()).hexdigest()
    except OSError:
        return None
