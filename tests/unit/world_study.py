"""Studies for the tests of the world: written into a folder, read and built from there."""

import numpy as np
import pytest

from lumentrace.errors import UserError
from lumentrace.scene.read import read_scene
from lumentrace.world.build import build_world
from tests.worlds import Mesh, Study


def new_study(folder, **keys) -> Study:
    """A study in mm with a white finish, a clear medium and a lamp far from everything."""
    study = Study(folder, length="mm")
    study.finish("white", diffuse=0.9)
    study.medium("clear", 1.5, keys.get("absorption", 0.001))
    study.source("lamp", point=[0, 0, 500])
    return study


def scene_of(study: Study):
    path = study.folder / "study.toml"
    path.write_text(study.text(), encoding="utf-8")
    return read_scene(path)


def built(study: Study):
    """The world of a study."""
    return build_world(scene_of(study))


def refused(study: Study) -> str:
    """The one line with which a study is refused."""
    with pytest.raises(UserError) as caught:
        built(study)
    text = str(caught.value)
    assert "\n" not in text
    return text


def told(world, kind: str = "told") -> list[str]:
    """The remarks of one kind."""
    return [notice.text for notice in world.notices if notice.kind == kind]


def binary_stl(mesh: Mesh, count: int | None = None) -> bytes:
    """A binary STL file; count: what its head announces, by default the truth."""
    record = np.dtype([("normal", "<f4", 3), ("corner", "<f4", (3, 3)), ("attribute", "<u2")])
    faces = np.zeros(len(mesh.corner), record)
    faces["corner"] = mesh.vertex[mesh.corner]
    head = b"test".ljust(80) + (len(faces) if count is None else count).to_bytes(4, "little")
    return head + faces.tobytes()


def ascii_stl(solids: dict[str, Mesh]) -> str:
    """An ASCII STL file of several solids."""
    lines = []
    for name, mesh in solids.items():
        lines.append(f"solid {name}")
        for triangle in mesh.vertex[mesh.corner]:
            lines += ["facet normal 0 0 0", "outer loop"]
            lines += ["vertex " + " ".join(repr(float(x)) for x in point) for point in triangle]
            lines += ["endloop", "endfacet"]
        lines.append(f"endsolid {name}")
    return "\n".join(lines) + "\n"


def add_file(study: Study, name: str, content: bytes | str, file: str, **keys) -> None:
    """A part with the bytes of its mesh file."""
    data = content.encode() if isinstance(content, str) else content
    (study.folder / file).write_bytes(data)
    given = {"name": name, "mesh": file, "medium": "opaque", "finish": "white", **keys}
    if given["medium"] not in ("opaque", "sheet"):
        given = {k: v for k, v in given.items() if k != "finish" or "finish" in keys}
    study.lists.setdefault("part", []).append(given)
