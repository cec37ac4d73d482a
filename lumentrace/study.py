"""The Python interface: load a scene, build its world, trace it, keep and open runs.

Nothing heavy is imported before the first call that needs it.
"""

import hashlib
import os
import re
import shlex
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lumentrace.errors import UserError

if TYPE_CHECKING:
    from lumentrace.analysis.account import Account
    from lumentrace.analysis.ledger import PathRow
    from lumentrace.analysis.measures import Measure
    from lumentrace.engine.sums import Sums
    from lumentrace.run.run import Run
    from lumentrace.scene.model import Scene
    from lumentrace.world.world import World

RUN_SUFFIX = ".nc"
RUNS = "runs"


def load(path: str | os.PathLike, seed: int | None = None) -> "Scene":
    """Read and check a scene file, with `seed` in place of its own.

    Raises UserError, one line that names file, line and key.
    """
    from lumentrace.scene.read import read_scene

    scene = read_scene(Path(path))
    return scene if seed is None else replace(scene, study=replace(scene.study, seed=seed))


def build(scene: "Scene") -> "World":
    """Read the meshes of a scene and lay out what the engine traces. Raises UserError."""
    from lumentrace.world.build import build_world

    return build_world(scene)


def trace(
    scene: "Scene | World | str | os.PathLike",
    rays: int | None = None,
    seed: int | None = None,
    threads: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> "Run":
    """Trace a scene, given as its file, as loaded, or as built.

    rays: how many, rounded up to whole rounds of 65,536; where the scene has `until`, the most.
    seed: in place of the scene's. threads: all processors where None; the result does not depend
    on it. progress: called as progress(rays done, rays planned). Raises UserError.
    """
    from lumentrace.engine.runner import trace_world
    from lumentrace.run.make import make_run

    world = _world_of(scene, seed)
    threads = None if threads is None else _at_least_one("threads", threads)
    enough = None if world.scene.trace.until is None else partial(_known, world)
    sums = trace_world(world, planned_rays(world.scene, rays), threads, progress, enough)
    return make_run(world, sums)


def open_run(path: str | os.PathLike) -> "Run":
    """Open the file of a run. Raises UserError where it is missing, damaged or no run."""
    from lumentrace.run.store import open_run as open_stored

    return open_stored(Path(path))


def save(run: "Run", folder: str | os.PathLike) -> Path:
    """Write a run to a folder, made if need be, under its own name; return where.

    Written whole or not at all. Raises UserError where the folder does not let it.
    """
    from lumentrace.run.store import write_run

    path = Path(folder) / run_name(run)
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise UserError(f"{folder}: cannot be made: {error.strerror}") from error
    write_run(run, path)
    return path


def measures(run: "Run") -> "dict[str, Measure]":
    """All measures of a run by name, each with value, error and unit."""
    from lumentrace.analysis.measures import measures as of

    return of(run)


def account(run: "Run") -> "Account":
    """Where all emitted flux went; it closes."""
    from lumentrace.analysis.account import account as of

    return of(run)


def paths(run: "Run", detector: str | None = None) -> "list[PathRow]":
    """The paths to one detector or to all, strongest first. UserError for an unknown one."""
    from lumentrace.analysis.ledger import paths as of

    return of(run, detector)


def planned_rays(scene: "Scene", rays: int | None) -> int:
    """Rays asked for, or the most of them where the scene has `until`."""
    settings = scene.trace
    if rays is not None:
        return _at_least_one("rays", rays)
    return settings.rays if settings.until is None else settings.rays_max


def is_compiled() -> bool:
    """Whether the tracer need not be compiled first."""
    from lumentrace.jit import is_warm

    return is_warm()


def schema() -> dict:
    """The JSON Schema of scene files."""
    from lumentrace.scene.schema import json_schema

    return json_schema()


def run_folder(scene: "Scene", out: str | os.PathLike | None) -> Path:
    """Where runs of a scene go: `out`, or runs/ beside the scene file.

    Raises UserError, before anything is traced, where no file can be written there.
    """
    folder = scene.path.parent / RUNS if out is None else Path(out)
    there = next(p for p in (folder, *folder.absolute().parents) if p.exists())
    if not there.is_dir():
        raise UserError(f"{folder}: is not a folder; {there} is a file")
    if not os.access(there, os.W_OK | os.X_OK):
        raise UserError(f"{folder}: cannot be written; choose another folder with --out")
    return folder


def run_name(run: "Run") -> str:
    """STEM-XXXX.nc: the scene file's stem, and a digest of all that made the run."""
    facts = run.data.attrs
    made_by = [facts[k] for k in ("lumentrace", "scene_digest", "mesh_digests", "seed", "rays")]
    digest = hashlib.sha256("\n".join(map(str, made_by)).encode()).hexdigest()
    return f"{Path(facts['scene']).stem}-{digest[:4]}{RUN_SUFFIX}"


def newest_run(scene_path: Path) -> Path:
    """The newest run of a scene in runs/ beside it.

    Raises UserError with the command to type where there is none.
    """
    named = re.compile(re.escape(scene_path.stem) + r"-[0-9a-f]{4}" + re.escape(RUN_SUFFIX))
    folder = scene_path.parent / RUNS
    runs = [p for p in folder.glob(f"*{RUN_SUFFIX}") if named.fullmatch(p.name)]
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
    """The run of a file STEM-XXXX.nc, or else the newest run of a scene file.

    Raises UserError where there is none.
    """
    path = Path(path)
    if path.suffix == RUN_SUFFIX:
        return FoundRun(open_run(path), path, None)
    scene = load(path)
    newest = newest_run(path)
    return FoundRun(open_run(newest), newest, scene)


def changed_since(run: "Run", scene: "Scene") -> list[str]:
    """The files of a scene that are no longer what a run was made from; [] if all are."""
    changed = [] if run.data.attrs["scene_digest"] == scene.digest else [scene.path.name]
    for part in scene.parts:
        if part.use and run.mesh_digests.get(part.name) != _file_digest(part.mesh):
            changed.append(part.mesh.name)
    return list(dict.fromkeys(changed))


def world_of(found: FoundRun) -> "World":
    """The world that a run was traced in, to trace some of its rays again.

    Raises UserError where the scene file is not near the run or has changed since.
    """
    name = found.run.data.attrs["scene"]
    near = [found.path.parent.parent / name, found.path.parent / name, Path(name)]
    path = found.scene.path if found.scene else next((p for p in near if p.is_file()), None)
    if path is None:
        raise UserError(f"{found.path}: its scene {name} is not in the folder above; move it there")
    scene = load(path, seed=found.run.seed)
    changed = changed_since(found.run, scene)
    if changed:
        raise UserError(
            f"{found.path}: {', '.join(changed)} changed since this run; "
            f"type: lumentrace trace {shlex.quote(str(path))}"
        )
    return build(scene)


def _world_of(scene, seed: int | None) -> "World":
    from lumentrace.scene.model import Scene
    from lumentrace.world.world import World

    if isinstance(scene, World):
        if seed is None or seed == scene.scene.study.seed:
            return scene
        scene = scene.scene
    if not isinstance(scene, Scene):
        return build(load(scene, seed))
    return build(scene if seed is None else replace(scene, study=replace(scene.study, seed=seed)))


def _at_least_one(name: str, number: int) -> int:
    if number < 1:
        raise UserError(f"{name}: must be at least 1; got {number}")
    return number


def _file_digest(path: Path) -> str | None:
    try:
        return hashlib.sha256(path.read_bytes()).hexdigest()
    except OSError:
        return None


def _known(world: "World", sums: "Sums") -> bool:
    """Whether the measure of `until` has reached the error asked for."""
    from lumentrace.run.make import make_run

    until = world.scene.trace.until
    found = measures(make_run(world, sums))[until.measure]
    return found.error is not None and found.error <= until.relative_error * abs(found.value)
