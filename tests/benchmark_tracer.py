"""How fast rays are traced, beside a bare ray caster on the same mesh in the same run.

    python -m tests.benchmark_tracer

A glass ball in a diffuse housing, one thread. Printed: whole histories in rays and in segments per
second; closest hits of incoherent rays per second in a compiled loop, and those of embreex, whose
one call takes them all. Repeats of all three are interleaved; medians and ratios are shown. Times
move by 10 to 15 % from run to run.
"""

import argparse
import tempfile
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np

from lumentrace import study as api
from lumentrace.engine.block import trace_rays
from lumentrace.engine.query import new_hits
from lumentrace.engine.state import TRAIL, new_rays, new_tally
from lumentrace.engine.sums import account_rows
from lumentrace.world.arrays import BLOCK_RAYS
from tests.hand import closest_hits, unit
from tests.worlds import Study, box, hollow, sphere

BLOCKS = 32  # of each repeat of whole histories
RAYS = 200_000  # of each repeat of closest hits
MARKS = 1_000_000  # places of the rays of one block, to count its segments


def housing(folder: Path, subdivisions: int):
    """The world: a ball of 20 x 4^subdivisions faces in a hollow block."""
    study = Study(folder, length="mm")
    study.finish("white", diffuse=0.8)
    study.medium("glass", 1.5, 0.01)
    study.part("housing", hollow(box([-3] * 3, [3] * 3)), medium="opaque", finish="white")
    study.part("ball", sphere(subdivisions, 2.0), medium="glass")
    study.source("lamp", point=(2.5, 2.5, 2.5))
    path = folder / "housing.toml"
    path.write_text(study.text(), encoding="utf-8")
    return api.build(api.load(path))


class Histories:
    """Blocks of whole histories, without merging."""

    def __init__(self, world):
        tags, parts = len(world.tag_names), len(world.part_names)
        self.world, self.rows = world, account_rows(tags, parts)
        self.rays, self.hits = new_rays(), new_hits()
        self.plain = new_tally(1, tags, parts, 1)
        self.marked = new_tally(1, tags, parts, 1, MARKS)

    def trace(self, blocks: int, tally) -> None:
        trace_rays(
            self.world.arrays, self.rows, 0, blocks * BLOCK_RAYS, self.rays, self.hits, tally
        )

    def segments(self) -> float:
        """Segments of a ray, counted over one block."""
        self.trace(1, self.marked)
        marks = int(self.marked.used[TRAIL])
        assert marks < MARKS
        return marks / BLOCK_RAYS - 1


def embree(world):
    """A function that finds the closest hits of float32 rays in the faces of a world."""
    from embreex import rtcore_scene
    from embreex.mesh_construction import TriangleMesh

    scene = rtcore_scene.EmbreeScene()
    mesh = world.arrays.mesh
    TriangleMesh(scene, mesh.vertex.astype(np.float32), mesh.corner)
    return lambda origin, direction: scene.run(origin, direction, query="INTERSECT")


def seconds(function, *arguments) -> float:
    started = perf_counter()
    function(*arguments)
    return perf_counter() - started


def measured(subdivisions: int, repeats: int) -> dict[str, float]:
    """Medians: rays/s and segments/s of histories, closest hits/s of both."""
    with tempfile.TemporaryDirectory() as folder:
        world = housing(Path(folder), subdivisions)
    rng = np.random.default_rng(1)
    origin, direction = rng.uniform(-2.9, 2.9, (RAYS, 3)), unit(rng.normal(size=(RAYS, 3)))
    single = origin.astype(np.float32), direction.astype(np.float32)
    histories, cast = Histories(world), embree(world)
    per_ray = histories.segments()
    closest_hits(world, origin[:10], direction[:10])  # compiled, and warm
    cast(single[0][:10], single[1][:10])
    times = {"histories": [], "ours": [], "embree": []}
    for _ in range(repeats):
        times["histories"].append(seconds(histories.trace, BLOCKS, histories.plain))
        times["ours"].append(seconds(closest_hits, world, origin, direction))
        times["embree"].append(seconds(cast, *single))
    rays = BLOCKS * BLOCK_RAYS / median(times["histories"])
    return {
        "faces": len(world.arrays.mesh.body),
        "rays": rays,
        "segments": rays * per_ray,
        "ours": RAYS / median(times["ours"]),
        "embree": RAYS / median(times["embree"]),
        "ratio": median(b / a for a, b in zip(times["ours"], times["embree"], strict=True)),
    }


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--subdivisions", type=int, nargs="+", default=[3, 5, 7])
    parser.add_argument("--repeats", type=int, default=7)
    asked = parser.parse_args()
    print("1 thread; thousands per second; medians of interleaved repeats")
    print(
        f"{'faces':>8} {'histories':>10} {'segments':>9} {'closest hits':>13} {'embreex':>8} "
        f"{'hits/embreex':>13} {'segments/embreex':>17}"
    )
    for subdivisions in asked.subdivisions:
        found = measured(subdivisions, asked.repeats)
        print(
            f"{found['faces']:8d} {found['rays'] / 1e3:10.1f} {found['segments'] / 1e3:9.0f} "
            f"{found['ours'] / 1e3:13.0f} {found['embree'] / 1e3:8.0f} {found['ratio']:13.2f} "
            f"{found['segments'] / found['embree']:17.2f}"
        )


if __name__ == "__main__":
    main()
