"""Small worlds for traced tests: meshes from numbers, scene text from Python, results with z.

A mesh here is `Mesh(vertex (n, 3), corner (m, 3), tags)`; tags has one name a face or is None.
Enclosures are opaque bodies with a hollow inside, so that their inner faces point inward.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import NamedTuple

import numpy as np
from scipy.stats import norm

ROUND = 65_536  # rays come in whole rounds


class Mesh(NamedTuple):
    vertex: np.ndarray
    corner: np.ndarray
    tags: list[str] | None = None

    def tagged(self, name: str) -> "Mesh":
        """All faces under one name."""
        return self._replace(tags=[name] * len(self.corner))

    def moved(self, offset: Sequence[float]) -> "Mesh":
        return self._replace(vertex=self.vertex + np.asarray(offset, float))

    def inward(self) -> "Mesh":
        """The same surface with its normals turned."""
        return self._replace(corner=self.corner[:, ::-1])

    @property
    def cross(self) -> np.ndarray:
        """(m, 3) normals whose lengths are twice the areas."""
        a, b, c = (self.vertex[self.corner[:, i]] for i in range(3))
        return np.cross(b - a, c - a)

    @property
    def areas(self) -> np.ndarray:
        return np.linalg.norm(self.cross, axis=1) / 2

    @property
    def area(self) -> float:
        return float(self.areas.sum())

    @property
    def volume(self) -> float:
        return float(np.einsum("ij,ij->", self.vertex[self.corner[:, 0]], self.cross) / 6)


def joined(*meshes: Mesh) -> Mesh:
    """One body of several surfaces; all are tagged or none is."""
    start = np.cumsum([0] + [len(m.vertex) for m in meshes])
    tags = [t for m in meshes for t in m.tags] if meshes[0].tags is not None else None
    return Mesh(
        np.concatenate([m.vertex for m in meshes]),
        np.concatenate([m.corner + s for m, s in zip(meshes, start, strict=False)]),
        tags,
    )


def rectangle(size: Sequence[float], center: Sequence[float] = (0, 0, 0)) -> Mesh:
    """A flat rectangle in x and y, seen from +z."""
    x, y = size[0] / 2, size[1] / 2
    vertex = np.array([[-x, -y, 0], [x, -y, 0], [x, y, 0], [-x, y, 0]]) + np.asarray(center, float)
    return Mesh(vertex, np.array([[0, 1, 2], [0, 2, 3]]))


def ring(sides: int, radius: float, z: float) -> np.ndarray:
    """Corners (sides, 3) of a regular polygon about the z axis."""
    angle = 2 * np.pi * np.arange(sides) / sides
    return np.stack([radius * np.cos(angle), radius * np.sin(angle), np.full(sides, z)], axis=1)


def equal_area_radius(radius: float, sides: int) -> float:
    """Radius of the corners of a regular polygon that has the area of a disc."""
    return radius * np.sqrt(2 * np.pi / sides / np.sin(2 * np.pi / sides))


def polygon(sides: int, radius: float, z: float = 0.0) -> Mesh:
    """A disc as a regular polygon of the same area, seen from +z."""
    vertex = np.vstack([ring(sides, equal_area_radius(radius, sides), z), [[0, 0, z]]])
    i = np.arange(sides)
    return Mesh(vertex, np.stack([np.full(sides, sides), i, (i + 1) % sides], axis=1))


def loft(rings: Sequence[np.ndarray], names: Sequence[str] | None = None) -> Mesh:
    """A body between stacked convex rings of equal number, capped at both ends.

    Rings go up, counter-clockwise from +z, for a body with its outside outside. names: first cap,
    each band, last cap.
    """
    n = len(rings[0])
    i = np.arange(n)
    j = (i + 1) % n
    first, last = len(rings) * n, len(rings) * n + 1
    corner = [np.stack([np.full(n, first), j, i], axis=1)]
    for row in range(len(rings) - 1):
        low, high = row * n, (row + 1) * n
        band = [[low + i, low + j, high + j], [low + i, high + j, high + i]]
        corner.append(np.concatenate([np.stack(t, axis=1) for t in band]))
    top = (len(rings) - 1) * n
    corner.append(np.stack([np.full(n, last), top + i, top + j], axis=1))
    tags = None
    if names:
        tags = [name for name, faces in zip(names, corner, strict=True) for _ in faces]
    middle = [rings[0].mean(axis=0), rings[-1].mean(axis=0)]
    return Mesh(np.vstack([*rings, *middle]), np.concatenate(corner), tags)


def cylinder(sides: int, radius: float, low: float, high: float, names=None) -> Mesh:
    """A closed cylinder as a prism of the same base area; names: base, side, top."""
    r = equal_area_radius(radius, sides)
    return loft([ring(sides, r, low), ring(sides, r, high)], names)


BOX_SIDES = ("x0", "x1", "y0", "y1", "floor", "ceiling")


def box(low: Sequence[float], high: Sequence[float], names: Sequence[str] | None = None) -> Mesh:
    """A closed box; names in the order of BOX_SIDES."""
    corners = np.array([[x, y, z] for z in (0, 1) for y in (0, 1) for x in (0, 1)], float)
    vertex = np.asarray(low, float) + corners * (np.asarray(high, float) - np.asarray(low, float))
    quads = [[0, 4, 6, 2], [1, 3, 7, 5], [0, 1, 5, 4], [2, 6, 7, 3], [0, 2, 3, 1], [4, 5, 7, 6]]
    corner = np.array([t for a, b, c, d in quads for t in ((a, b, c), (a, c, d))])
    return Mesh(vertex, corner, [n for n in names for _ in (0, 1)] if names else None)


def sphere(subdivisions: int, radius: float) -> Mesh:
    """A sphere of 20 x 4^subdivisions triangles with all corners on it."""
    import trimesh

    made = trimesh.creation.icosphere(subdivisions, radius)
    return Mesh(np.array(made.vertices), np.array(made.faces))


def hollow(inner: Mesh, margin: float = 0.1) -> Mesh:
    """A block with a hollow of that shape; the block's outside is tagged "hull"."""
    low, high = inner.vertex.min(axis=0), inner.vertex.max(axis=0)
    gap = margin * (high - low).max()
    return joined(inner.inward(), box(low - gap, high + gap).tagged("hull"))


def write_obj(path: Path, mesh: Mesh) -> None:
    """Wavefront OBJ, coordinates to the last digit, tags as materials."""
    lines = ["v " + " ".join(repr(float(x)) for x in v) for v in mesh.vertex]
    tags = mesh.tags or [None] * len(mesh.corner)
    current = None
    for tag, face in zip(tags, mesh.corner + 1, strict=True):
        if tag != current:
            lines.append(f"usemtl {tag}")
            current = tag
        lines.append("f {} {} {}".format(*face))
    path.write_text("\n".join(lines) + "\n", encoding="ascii")


def toml(value) -> str:
    """A value as TOML on one line."""
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{k} = {toml(v)}" for k, v in value.items()) + " }"
    if isinstance(value, list | tuple | np.ndarray):
        return "[" + ", ".join(toml(v) for v in value) + "]"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    return repr(int(value) if isinstance(value, int | np.integer) else float(value))


class Estimate(NamedTuple):
    value: float
    error: float

    def z(self, expected: float) -> float:
        return (self.value - expected) / self.error


def of_batches(batch) -> Estimate:
    """Mean and standard error of 64 independent batches."""
    batch = np.asarray(batch, float)
    return Estimate(float(batch.mean()), float(batch.std(ddof=1) / np.sqrt(len(batch))))


def z_limit(count: int) -> float:
    """4, or where there are many values what all of them pass in 999 of 1000 runs (Sidak)."""
    return max(4.0, float(norm.isf((1 - 0.999 ** (1 / count)) / 2)))


def agree(estimates: Sequence[Estimate], expected: Sequence[float]) -> None:
    """Fails where an estimate lies further than the limit from what is expected."""
    limit = z_limit(len(expected))
    z = np.array([e.z(x) for e, x in zip(estimates, expected, strict=True)])
    worst = int(np.argmax(np.abs(z)))
    assert np.abs(z).max() <= limit, (
        f"value {worst}: {estimates[worst]}, expected {expected[worst]}, z = {z[worst]:.2f}"
    )


def precise(estimate: Estimate, expected: float, relative: float = 0.0015) -> None:
    """As `agree` for one value, and the standard error is small enough to show a fault of 1 %."""
    assert estimate.error <= relative * abs(expected), f"{estimate} is not known well enough"
    agree([estimate], [expected])


class Result:
    """A finished run, asked by name."""

    def __init__(self, run):
        self.run = run

    def emitted(self) -> float:
        return float(self.run.account["emitted"].sum())

    def absorbed(self, tag: str, group: str | None = None) -> Estimate:
        """W absorbed at part:tag."""
        found = self.run.account["absorbed"].sel(tag=tag)
        return of_batches(found.sel(group=group) if group else found.sum("group"))

    def bulk(self, part: str) -> Estimate:
        """W absorbed in the medium of a part."""
        return of_batches(self.run.account["bulk"].sel(volume=part).sum("group"))

    def fate(self, name: str) -> Estimate:
        """W that "escaped", "cut_off", ..."""
        return of_batches(self.run.account["ended"].sel(fate=name).sum("group"))

    def flux(self, detector: str) -> Estimate:
        return of_batches(self.run.detector(detector)["flux"].sum("group"))

    def cells(self, detector: str) -> list[Estimate]:
        """Flux per area of each cell, rows along `up`."""
        found = self.run.map(detector)
        pairs = zip(found["value"].values.ravel(), found["error"].values.ravel(), strict=True)
        return [Estimate(float(v), float(e)) for v, e in pairs]

    def cell_flux(self, detector: str) -> np.ndarray:
        """(up, across, batch) flux."""
        return self.run.detector(detector)["cell_batch"].sum("group").values

    def path_rows(self, detector: str) -> list[tuple[str, int]]:
        """Each path's steps as text, "glass:top through, glass:top total x2", and its row."""
        ledger = self.run.ledger
        tags, events = ledger["tag"].values, ledger["event"].values
        wanted = list(ledger["detector"].values).index(detector)
        rows = []
        for row in np.flatnonzero(ledger["detector_id"].values == wanted):
            steps = []
            for s in range(int(ledger["n_steps"].values[row])):
                tag = tags[ledger["step_tag_id"].values[row, s]]
                event = events[ledger["step_event_id"].values[row, s]]
                times = int(ledger["step_run"].values[row, s])
                steps.append(f"{tag} {event}" + (f" x{times}" if times > 1 else ""))
            rows.append((", ".join(steps), int(row)))
        return rows

    def paths(self, detector: str, wanted) -> Estimate:
        """Flux by all paths for which wanted(text, ledger row) holds."""
        flux = self.run.ledger["flux"].values
        return of_batches(
            sum(flux[row] for text, row in self.path_rows(detector) if wanted(text, row))
        )

    def path(self, detector: str, *steps: str) -> Estimate:
        """Flux by the path of exactly these steps."""
        return self.paths(detector, lambda text, row: text == ", ".join(steps))


@dataclass
class Study:
    """A scene that is written into a folder and traced from there."""

    folder: Path
    length: str = "m"
    tables: dict[str, dict] = field(default_factory=dict)
    lists: dict[str, list[dict]] = field(default_factory=dict)

    def medium(self, name: str, index: float, absorption: float = 0.0) -> None:
        self.tables[f"medium.{name}"] = {"index": float(index), "absorption": float(absorption)}

    def finish(self, name: str, **shares: float) -> None:
        self.tables[f"finish.{name}"] = shares

    def part(self, name: str, mesh: Mesh, **keys) -> None:
        write_obj(self.folder / f"{name}.obj", mesh)
        self.lists.setdefault("part", []).append({"name": name, "mesh": f"{name}.obj", **keys})

    def source(self, name: str, **keys) -> None:
        given = {"name": name, "flux": {"watts": 1.0}, "spectrum": {"line": 555}, **keys}
        self.lists.setdefault("source", []).append(given)

    def detector(self, name, center, normal, size, cells=(1, 1), across=(1, 0, 0), **keys) -> None:
        plane = {"center": center, "normal": normal, "across": across, "size": size, "cells": cells}
        given = {"name": name, "plane": plane, "counts": "irradiance", **keys}
        self.lists.setdefault("detector", []).append(given)

    def text(self) -> str:
        lines = ["[study]", 'title = "test"', f'length = "{self.length}"']
        for head, table in self.tables.items():
            lines += [f"[{head}]"] + [f"{k} = {toml(v)}" for k, v in table.items()]
        for kind, entries in self.lists.items():
            for entry in entries:
                lines += [f"[[{kind}]]"] + [f"{k} = {toml(v)}" for k, v in entry.items()]
        return "\n".join(lines) + "\n"

    def trace(self, rounds: int, seed: int = 1) -> Result:
        """Traces, and holds every world to its account."""
        from lumentrace import study

        path = self.folder / "study.toml"
        path.write_text(self.text(), encoding="utf-8")
        result = Result(study.trace(path, rays=rounds * ROUND, seed=seed))
        account_closes(result)
        return result


def account_closes(result: Result) -> None:
    """To 1e-9 of the emitted flux; `sampling` is zero within its error; no ray is lost."""
    account = result.run.account
    spent = sum(float(account[name].sum()) for name in ("absorbed", "bulk", "ended")) / 64
    emitted = result.emitted()
    assert abs(spent - emitted) <= 1e-9 * emitted, f"{spent} W of {emitted} W accounted for"
    sampling = result.fate("sampling")
    assert abs(sampling.value) <= 4.5 * sampling.error + 1e-12 * emitted, sampling
    assert result.fate("unresolved").value == 0.0
