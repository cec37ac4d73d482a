"""Make the meshes of the bench lamp from its dimensions: python make_meshes.py [folder].

Every body is a stack of rectangles joined by bands and closed by its first and last rectangle.
Nothing is cut by booleans, so that the same dimensions give the same bytes with any library
version. Lengths in mm. The lamp shines toward -z; its lower edge, the rim, lies at z = 0.
"""

import sys
from pathlib import Path

import numpy as np
import trimesh

TRAY_LENGTH, TRAY_WIDTH, TRAY_HEIGHT = 1200.0, 62.0, 40.0
TRAY_WALL = 2.0  # side and end walls, and so the width of the rim
TRAY_FLOOR = 2.0  # what the dies sit on
COVER_THICKNESS = 3.0
DIE_LENGTH, DIE_WIDTH, DIE_HEIGHT = 3.5, 2.8, 0.7


def rectangle(length: float, width: float, z: float) -> np.ndarray:
    """Corners (4, 3) of a rectangle about the z axis, counter-clockwise seen from +z."""
    x, y = length / 2, width / 2
    return np.array([[-x, -y, z], [x, -y, z], [x, y, z], [-x, y, z]])


def stack(rectangles: list[np.ndarray]) -> trimesh.Trimesh:
    """A closed body: its skin runs from the first rectangle, seen from below, to the last.

    Going up, a band faces away from the axis; where the stack turns inward and down again it
    faces the axis, which makes a hollow.
    """
    corner = [[0, 2, 1], [0, 3, 2]]
    for row in range(len(rectangles) - 1):
        low, high = 4 * row, 4 * (row + 1)
        for i in range(4):
            j = (i + 1) % 4
            corner += [[low + i, low + j, high + j], [low + i, high + j, high + i]]
    last = 4 * (len(rectangles) - 1)
    corner += [[last, last + 1, last + 2], [last, last + 2, last + 3]]
    return trimesh.Trimesh(np.concatenate(rectangles), corner, process=False)


def tray() -> trimesh.Trimesh:
    """The housing, open toward -z, one skin inside and outside."""
    inner_length, inner_width = TRAY_LENGTH - 2 * TRAY_WALL, TRAY_WIDTH - 2 * TRAY_WALL
    body = stack(
        [
            rectangle(inner_length, inner_width, TRAY_HEIGHT - TRAY_FLOOR),
            rectangle(inner_length, inner_width, 0.0),
            rectangle(TRAY_LENGTH, TRAY_WIDTH, 0.0),
            rectangle(TRAY_LENGTH, TRAY_WIDTH, TRAY_HEIGHT),
        ]
    )
    return body


def cover() -> trimesh.Trimesh:
    """A clear plate of the tray's outline; its upper face lies on the rim."""
    return stack(
        [
            rectangle(TRAY_LENGTH, TRAY_WIDTH, -COVER_THICKNESS),
            rectangle(TRAY_LENGTH, TRAY_WIDTH, 0.0),
        ]
    )


def die() -> trimesh.Trimesh:
    """One light-emitting die, as in a data sheet: standing on z = 0, its top at +z."""
    return stack(
        [rectangle(DIE_LENGTH, DIE_WIDTH, 0.0), rectangle(DIE_LENGTH, DIE_WIDTH, DIE_HEIGHT)]
    )


def main(folder: Path) -> None:
    for name, body in (("tray", tray()), ("cover", cover()), ("die", die())):
        (folder / f"{name}.stl").write_bytes(trimesh.exchange.stl.export_stl(body))


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
