"""Closed worlds: no ray leaves a closed body, none is lost, and the account closes.

A glass ball in a hollow ball, a glass block in a hollow block and in a solid one (light inside an
opaque body meets its faces from behind), and both demonstration scenes in a closed box; each as
made, turned at random, scaled by 1e-3 and by 1e6, and placed 10^4 of its sizes away; rays at
random, aimed at edges and aimed at vertices. Walls scatter half of the light, so that every ray
goes on from where it was aimed. Exact: not one ray may escape. 10^5 rays a variant, 10^7 in the
long set.
"""

import shutil
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from lumentrace import study as api
from tests.hand import follow_rays, unit
from tests.journeys.command import SCENES
from tests.worlds import ROUND, Mesh, Study, box, hollow, sphere, write_obj

RAYS = 100_000
LONG = 100  # times as many in the long set
DEMOS = ("bench_lamp", "range_finder")
PLACES = {
    "as made": (1.0, False, 0.0),
    "turned": (1.0, True, 0.0),
    "1e-3": (1e-3, True, 0.0),
    "1e6": (1e6, True, 0.0),
    "far": (1.0, True, 1e4),
}
AIMS = ("random", "edges", "vertices")


def simple(kind: str, study: Study) -> dict[str, tuple[Mesh, dict]]:
    """{part: (mesh, keys)} of clear bodies in an enclosure of size 4."""
    study.medium("glass", 1.5, 0.1)
    study.finish("grey", diffuse=0.5)
    grey, glass = {"medium": "opaque", "finish": "grey"}, {"medium": "glass"}
    hall = {"hall": (hollow(box([-2] * 3, [2] * 3)), grey)}
    block = box((-1, -0.75, -0.5), (1, 0.75, 0.5))
    if kind == "balls":
        return {"hall": (hollow(sphere(3, 2.0)), grey), "body": (sphere(3, 1.0), glass)}
    if kind == "blocks":
        return {**hall, "body": (block, glass)}
    return {"hall": (box([-2] * 3, [2] * 3), grey), "body": (block, glass)}


@cache
def demo(name: str):
    """The world of a demonstration scene."""
    return api.build(api.load(SCENES / name / f"{name}.toml"))


def taken_apart(name: str, study: Study) -> dict[str, tuple[Mesh, dict]]:
    """{part: (mesh, keys)} of a demonstration scene: each copy a part, in its place, in a box."""
    world = demo(name)
    scene, mesh, bodies = world.scene, world.arrays.mesh, world.arrays.bodies
    for finish in scene.finishes.values():
        shares = {k: getattr(finish, k) for k in ("diffuse", "mirror", "diffuse_through")}
        if finish.place is not None:
            study.finish(finish.name, **shares)
    for medium in scene.media.values():
        if medium.place is not None:
            study.medium(medium.name, medium.index, medium.absorption)
    parts = {}
    by_name = {part.name: part for part in scene.parts}
    for body in range(len(bodies.part)):
        part = by_name[world.part_names[bodies.part[body]]]
        faces = np.flatnonzero(mesh.body == body)
        used, corner = np.unique(mesh.corner[faces], return_inverse=True)
        tags = [world.tag_names[t].split(":")[1] for t in mesh.tag[faces]]
        finish = {
            tag: side.front if side.front == side.back else {"front": side.front, "back": side.back}
            for tag, side in part.finish.items()
        }
        made = Mesh(mesh.vertex[used], corner.reshape(-1, 3), tags)
        keys = {"medium": part.medium, "finish": finish, "priority": part.priority}
        parts[f"{part.name}_{body}"] = (made, keys)
    study.finish("enclosure", diffuse=0.5)
    low, high = extent(mesh.vertex)
    gap = 0.2 * (high - low).max()
    keys = {"medium": "opaque", "finish": "enclosure"}
    parts["enclosure"] = (hollow(box(low - gap, high + gap)), keys)
    return parts


def extent(*points):
    """Smallest and largest corner of the box that holds all points, (..., 3)."""
    together = np.concatenate([np.reshape(p, (-1, 3)) for p in points])
    return together.min(axis=0), together.max(axis=0)


class Closed:
    """A world in its place, with a way to start rays in it and to aim them."""

    def __init__(self, kind: str, place: str, folder: Path):
        self.rng = np.random.default_rng([ord(c) for c in kind + place])
        study = Study(folder, length="mm")
        parts = taken_apart(kind, study) if kind in DEMOS else simple(kind, study)
        scale, turn, far = PLACES[place]
        matrix = Rotation.random(rng=self.rng).as_matrix() if turn else np.eye(3)
        self.low, self.high = extent(*(mesh.vertex for mesh, _ in parts.values()))
        shift = far * (self.high - self.low).max() * np.array([1.0, -0.7, 0.9])
        self.placed = lambda points: (points @ matrix.T + shift) * scale
        for name, (mesh, keys) in parts.items():
            study.part(name, mesh._replace(vertex=self.placed(mesh.vertex)), **keys)
        for table in study.tables.values():
            if "absorption" in table:
                table["absorption"] /= scale
        study.source("lamp", point=self.placed(np.zeros(3)))
        path = folder / "closed.toml"
        path.write_text(study.text(), encoding="utf-8")
        self.world = api.build(api.load(path))
        assert all(part.closed or part.medium == "sheet" for part in self.world.parts)
        self.ball = kind == "balls"
        # an enclosure whose wall is a tenth of its inside, on both sides
        self.inner = 1.0 if kind == "solid" else 1 / 1.2

    def origins(self, n: int):
        """(n, 3) places within the enclosure."""
        if self.ball:
            direction = unit(self.rng.normal(size=(n, 3)))
            return self.placed(direction * 1.95 * self.rng.random((n, 1)) ** (1 / 3))
        middle, half = (self.low + self.high) / 2, (self.high - self.low) / 2
        reach = half - (1 - self.inner) * half.max() if self.inner < 1 else half
        return self.placed(middle + self.rng.uniform(-0.99, 0.99, (n, 3)) * reach)

    def directions(self, aim: str, origin):
        """(n, 3) unit vectors: to points of edges, or to vertices, of all bodies alike."""
        n = len(origin)
        if aim == "random":
            return unit(self.rng.normal(size=(n, 3)))
        mesh = self.world.arrays.mesh
        faces = np.flatnonzero((mesh.normal != 0).any(axis=1))
        corner = mesh.corner[self.rng.choice(faces, n)]
        share = self.rng.random((n, 1)) if aim == "edges" else np.zeros((n, 1))
        target = mesh.vertex[corner[:, 0]] * (1 - share) + mesh.vertex[corner[:, 1]] * share
        return unit(target - origin)

    def check(self, aim: str, rays: int) -> None:
        """All of the rays stay in, none is lost."""
        origin = self.origins(rays)
        fate = follow_rays(self.world, origin, self.directions(aim, origin), threads=2)
        assert fate.lost == ()
        assert (fate.escaped, fate.unresolved, fate.cut_off) == (0.0, 0.0, 0.0)
        assert fate.open < 1e-12
        assert fate.absorbed > 0.9 * rays


KINDS = ("balls", "blocks", "solid", *DEMOS)
EACH = pytest.mark.parametrize(
    ("kind", "place"), [(kind, place) for kind in KINDS for place in PLACES]
)


@EACH
def test_no_ray_escapes(kind, place, tmp_path):
    closed = Closed(kind, place, tmp_path)
    for aim in AIMS:
        closed.check(aim, RAYS)


@pytest.mark.long
@EACH
def test_no_ray_of_many_escapes(kind, place, tmp_path):
    closed = Closed(kind, place, tmp_path)
    for aim in AIMS:
        for _ in range(LONG):
            closed.check(aim, RAYS)


@pytest.mark.parametrize("name", DEMOS)
def test_demonstration_scene_in_a_box(name, tmp_path):
    """As a person would do it: the scene's own sources, a box added to its text."""
    shutil.copytree(SCENES / name, tmp_path, dirs_exist_ok=True)
    arrays = demo(name).arrays
    detectors = arrays.detectors
    rim = [
        place[0] + i * size[0] * place[2] + j * size[1] * place[3]
        for place, size in zip(detectors.place, detectors.size, strict=True)
        for i in (-1, 1)
        for j in (-1, 1)
    ]
    low, high = extent(arrays.mesh.vertex, rim)
    gap = 0.1 * (high - low).max()
    write_obj(tmp_path / "enclosure.obj", hollow(box(low - gap, high + gap)))
    path = tmp_path / f"{name}.toml"
    path.write_text(path.read_text() + ENCLOSURE)
    run = api.trace(path, rays=2 * ROUND)
    ended = run.account["ended"].sum(("group", "batch"))
    for fate in ("escaped", "unresolved", "cut_off"):
        assert float(ended.sel(fate=fate)) == 0.0
    assert run.data.attrs["lost_count"] == 0
    absorbed = run.account["absorbed"].sum(("group", "batch"))
    assert float(absorbed.sel(tag="enclosure:default")) > 0


ENCLOSURE = """
[finish.enclosure]
diffuse = 0.5
[[part]]
name = "enclosure"
mesh = "enclosure.obj"
medium = "opaque"
finish = "enclosure"
"""
