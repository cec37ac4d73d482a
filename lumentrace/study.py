"""The Python interface: load a scene, build its world, trace it, keep and open runs.

Nothing heavy is imported before the first call that needs it.
"""

import os
import shlex
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from operator import index
from pathlib import Path
from typing import TYPE_CHECKING

from lumentrace.errors import UserError
from lumentrace.runs import FoundRun, changed_since, run_name, scene_path

if TYPE_CHECKING:
    from lumentrace.analysis.account import Account
    from lumentrace.analysis.ledger import PathRow
    from lumentrace.analysis.measures import Measure
    from lumentrace.engine.sums import Sums
    from lumentrace.run.run import Run
    from lumentrace.scene.model import Scene
    from lumentrace.world.world import World

RAYS = (1, 10**15)  # least and most, as in scene files
SEED = (0, 2**63 - 1)  # likewise
THREADS = (1, 1024)


def load(path: str | os.PathLike, seed: int | None = None) -> "Scene":
    """Read and check a scene file, with `seed` in place of its own.

    Raises UserError, one line that names file, line and key.
    """
    from lumentrace.scene.read import read_scene

    return _seeded(read_scene(Path(path)), seed)


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
    threads = None if threads is None else _whole("threads", threads, THREADS)
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
        return _whole("rays", rays, RAYS)
    return settings.rays if settings.until is None else settings.rays_max


def is_compiled() -> bool:
    """Whether the tracer need not be compiled first."""
    from lumentrace.jit import is_warm

    return is_warm()


def schema() -> dict:
    """The JSON Schema of scene files."""
    from lumentrace.scene.schema import json_schema

    return json_schema()


def world_of(found: FoundRun) -> "World":
    """The world that a run was traced in, to trace some of its rays again.

    Raises UserError where the scene file is not near the run or has changed since.
    """
    path = scene_path(found)
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
    return build(_seeded(scene, seed) if isinstance(scene, Scene) else load(scene, seed))


def _seeded(scene: "Scene", seed: int | None) -> "Scene":
    if seed is None:
        return scene
    return replace(scene, study=replace(scene.study, seed=_whole("seed", seed, SEED)))


def _whole(name: str, number: int, allowed: tuple[int, int]) -> int:
    """A whole number within its range, of any integer type. Raises UserError for all else."""
    least, most = allowed
    try:
        whole = index(number)
    except TypeError:
        raise UserError(
            f"{name}: {number!r} is not a whole number; allowed: {least} to {most}"
        ) from None
    if not least <= whole <= most:
        raise UserError(f"{name}: {whole} is out of range; allowed: {least} to {most}")
    return whole


def _known(world: "World", sums: "Sums") -> bool:
    """Whether the measure of `until` has reached the error asked for."""
    from lumentrace.run.make import make_run

    until = world.scene.trace.until
    found = measures(make_run(world, sums))[until.measure]
    return found.error is not None and found.error <= until.relative_error * abs(found.value)
