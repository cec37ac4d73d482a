"""Where things stand: turn, move, repeat."""

from typing import NamedTuple

import numpy as np

from lumentrace.scene.model import Grid, Part, Ring, Turn

_QUARTERS = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))  # cosine and sine, exact


def rotation(axis, degrees: float):
    """(3, 3) matrix of a right-handed turn about an axis through the origin.

    Rodrigues' formula: R v = v cos a + (k x v) sin a + k (k.v) (1 - cos a). Whole quarter turns
    have an exact cosine and sine.
    """
    quarters, rest = divmod(degrees, 90.0)
    if rest == 0.0:
        cosine, sine = _QUARTERS[int(quarters % 4)]
    else:
        cosine, sine = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    x, y, z = np.array(axis, np.float64) / np.linalg.norm(axis)
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    along = np.outer((x, y, z), (x, y, z))
    return cosine * np.eye(3) + sine * cross + (1.0 - cosine) * along


def turned(turns: tuple[Turn, ...]):
    """(3, 3) matrix of turns taken in their order."""
    matrix = np.eye(3)
    for turn in turns:
        matrix = rotation(turn.axis, turn.degrees) @ matrix
    return matrix


class Pose(NamedTuple):
    """x -> matrix x + shift."""

    matrix: np.ndarray  # (3, 3) orthonormal
    shift: np.ndarray  # (3,)

    def points(self, point):
        """Points, (..., 3), moved."""
        return point @ self.matrix.T + self.shift

    def directions(self, vector):
        """Directions, (..., 3), turned."""
        return vector @ self.matrix.T


def pose_of(turns: tuple[Turn, ...], at) -> Pose:
    """Turned about the origin, then moved by `at`."""
    return Pose(turned(turns), np.array(at, np.float64))


def n_copies(part: Part) -> int:
    """How many copies of a part there are."""
    if part.repeat is None:
        return 1
    return int(np.prod(part.repeat.count))


def copies(part: Part) -> list[Pose]:
    """Poses of the copies of a part, for its mesh in the study's unit.

    Of a grid x runs fastest, then y, then z.
    """
    first = pose_of(part.turn, part.at)
    if isinstance(part.repeat, Grid):
        nx, ny, nz = part.repeat.count
        numbers = [(i, j, k) for k in range(nz) for j in range(ny) for i in range(nx)]
        step = np.array(part.repeat.step)
        return [Pose(first.matrix, first.shift + np.array(n) * step) for n in numbers]
    if isinstance(part.repeat, Ring):
        return [_on_ring(first, part.repeat, k) for k in range(part.repeat.count)]
    return [first]


def _on_ring(first: Pose, ring: Ring, k: int) -> Pose:
    """The k-th copy: the first, turned about the ring's axis through its center."""
    turn = rotation(ring.axis, k * ring.degrees)
    center = np.array(ring.center)
    return Pose(turn @ first.matrix, turn @ (first.shift - center) + center)
