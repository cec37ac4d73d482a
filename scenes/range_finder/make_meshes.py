"""Make the meshes of the range finder from its dimensions: python make_meshes.py [folder].

The faces are written out by rule, without booleans, so that the same dimensions give the same
bytes with any library version. Lengths in mm. The housing's top lies at z = 0, the light leaves
toward +z, the emitter's chimney is at -x and the receiver's at +x.
"""

import sys
from pathlib import Path

import numpy as np
import trimesh

HOUSING_LENGTH, HOUSING_WIDTH, HOUSING_HEIGHT = 5.6, 3.0, 1.2
BASELINE = 2.6  # between the axes of the two chimneys
WELL_DEPTH = 0.8
EMITTER_RADIUS = (0.6, 0.9)  # of the chimney at its floor and at its mouth
RECEIVER_RADIUS = (0.7, 0.9)
WELL_SIDES = 48
BARRIER_WIDTH = 0.6  # the strip of the top between the two mouths
GLASS_LENGTH, GLASS_WIDTH, GLASS_THICKNESS = 8.0, 5.0, 1.0
GLASS_GAP = 0.2  # between the housing's top and the glass
DIE_SIDE, DIE_HEIGHT = 0.3, 0.15


class Skin:
    """Corners and triangles of a body, the triangles by material in the order of their making."""

    def __init__(self):
        self.place: dict[tuple[float, ...], int] = {}
        self.triangles: dict[str, list[tuple[int, int, int]]] = {}

    def corner(self, x: float, y: float, z: float) -> int:
        """Number of the corner there; equal corners are one, which keeps the body closed."""
        key = (round(x, 6) + 0.0, round(y, 6) + 0.0, round(z, 6) + 0.0)
        return self.place.setdefault(key, len(self.place))

    def polygon(self, material: str, corners: list[int]) -> None:
        """A convex polygon, counter-clockwise seen from outside, as a fan from its first corner."""
        for a, b in zip(corners[1:], corners[2:], strict=False):
            self.triangles.setdefault(material, []).append((corners[0], a, b))

    def mesh(self) -> trimesh.Trimesh:
        faces = [t for triangles in self.triangles.values() for t in triangles]
        return trimesh.Trimesh(np.array(list(self.place)), faces, process=False)

    def obj(self, name: str) -> str:
        """Wavefront OBJ with one `usemtl` a material."""
        lines = [f"# {name}, mm; made by make_meshes.py", f"o {name}"]
        lines += [f"v {x:g} {y:g} {z:g}" for x, y, z in self.place]
        for material, triangles in self.triangles.items():
            lines.append(f"usemtl {material}")
            lines += [f"f {a + 1} {b + 1} {c + 1}" for a, b, c in triangles]
        return "\n".join(lines) + "\n"


def circle(skin: Skin, x: float, z: float, radius: float) -> list[int]:
    """A ring of corners about (x, 0), counter-clockwise seen from +z, the first toward +x."""
    angle = 2 * np.pi * np.arange(WELL_SIDES) / WELL_SIDES
    return [skin.corner(x + radius * np.cos(a), radius * np.sin(a), z) for a in angle]


def well(skin: Skin, material: str, x: float, radius: tuple[float, float]) -> list[int]:
    """Wall and floor of one chimney; gives the ring of its mouth."""
    floor = circle(skin, x, -WELL_DEPTH, radius[0])
    mouth = circle(skin, x, 0.0, radius[1])
    for i in range(WELL_SIDES):
        j = (i + 1) % WELL_SIDES
        skin.polygon(material, [floor[j], floor[i], mouth[i], mouth[j]])
    skin.polygon(material, floor)
    return mouth


def plate_with_mouth(skin: Skin, material: str, x: tuple[float, float], mouth: list[int]) -> None:
    """The top from x[0] to x[1] around a mouth: a fan from each corner to a quarter of the ring."""
    y, quarter = HOUSING_WIDTH / 2, WELL_SIDES // 4
    corner = [skin.corner(px, py, 0.0) for px, py in ((x[1], y), (x[0], y), (x[0], -y), (x[1], -y))]
    for k in range(4):
        start, end = k * quarter, (k + 1) * quarter
        for i in range(start, end):
            skin.polygon(material, [corner[k], mouth[(i + 1) % WELL_SIDES], mouth[i]])
        skin.polygon(material, [corner[k], corner[(k + 1) % 4], mouth[end % WELL_SIDES]])


def housing() -> Skin:
    """The opaque block with its two chimneys."""
    skin = Skin()
    x, y, bottom = HOUSING_LENGTH / 2, HOUSING_WIDTH / 2, -HOUSING_HEIGHT
    cuts = (-x, -BARRIER_WIDTH / 2, BARRIER_WIDTH / 2, x)
    front = [[skin.corner(cx, -y, z) for cx in cuts] for z in (bottom, 0.0)]
    back = [[skin.corner(cx, y, z) for cx in cuts] for z in (bottom, 0.0)]
    emitter = well(skin, "emitter_well", -BASELINE / 2, EMITTER_RADIUS)
    receiver = well(skin, "receiver_well", BASELINE / 2, RECEIVER_RADIUS)
    plate_with_mouth(skin, "shell", cuts[:2], emitter)
    plate_with_mouth(skin, "shell", cuts[2:], receiver)
    skin.polygon("barrier_top", [front[1][1], front[1][2], back[1][2], back[1][1]])
    for i in range(3):
        skin.polygon("shell", [front[0][i], front[0][i + 1], front[1][i + 1], front[1][i]])
        skin.polygon("shell", [back[0][i + 1], back[0][i], back[1][i], back[1][i + 1]])
        skin.polygon("shell", [front[0][i], back[0][i], back[0][i + 1], front[0][i + 1]])
    skin.polygon("shell", [back[0][0], front[0][0], front[1][0], back[1][0]])
    skin.polygon("shell", [front[0][3], back[0][3], back[1][3], front[1][3]])
    return skin


def block(material: str, size: tuple[float, float, float], bottom: float) -> Skin:
    """A closed box about the z axis, from `bottom` upward."""
    skin = Skin()
    x, y = size[0] / 2, size[1] / 2
    low, high = (
        [skin.corner(px, py, z) for px, py in ((-x, -y), (x, -y), (x, y), (-x, y))]
        for z in (bottom, bottom + size[2])
    )
    skin.polygon(material, low[::-1])
    skin.polygon(material, high)
    for i in range(4):
        j = (i + 1) % 4
        skin.polygon(material, [low[i], low[j], high[j], high[i]])
    return skin


def main(folder: Path) -> None:
    glass = block("edge", (GLASS_LENGTH, GLASS_WIDTH, GLASS_THICKNESS), GLASS_GAP)
    die = block("side", (DIE_SIDE, DIE_SIDE, DIE_HEIGHT), 0.0)
    for name, skin in (("housing", housing()), ("glass", glass), ("die", die)):
        closed = skin.mesh()
        if not (closed.is_watertight and closed.volume > 0):
            raise SystemExit(f"{name}: these dimensions do not give a closed body")
        (folder / f"{name}.obj").write_text(skin.obj(name), encoding="ascii", newline="\n")


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
