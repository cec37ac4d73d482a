"""Where pictures are seen from: parallel projections, and the planes that cut parts open."""

from dataclasses import dataclass, replace

import numpy as np

_ELEVATION, _AZIMUTH = np.radians(24.0), np.radians(28.0)
_FAR = 3.0  # a first or last leg so many times longer than the rest of a way leaves the picture
_ROOM = 2.2  # a part that would make the picture so many times larger is not shown whole
_WORTH = (1.0, 1.0, 0.5)  # of a cut at x, y, z: a side view says more than a plan
_MARGIN = 0.1  # of the height, on each side
_UP = np.array([0.0, 0.0, 1.0])


@dataclass(frozen=True)
class Plane:
    """What lies on the side of the normal, toward the viewer, is cut away."""

    point: np.ndarray  # (3,)
    normal: np.ndarray  # (3,) unit


@dataclass(frozen=True)
class View:
    """A parallel projection; `low` and `high` are corners of the picture along right and up."""

    right: np.ndarray  # (3,) unit vectors, right x up = toward
    up: np.ndarray
    toward: np.ndarray  # the viewer
    low: np.ndarray  # (2,) in the study's unit of length
    high: np.ndarray

    def project(self, points: np.ndarray) -> np.ndarray:
        """(..., 3) in the scene's frame to (..., 2) along right and up."""
        return points @ np.stack([self.right, self.up], axis=-1)

    @property
    def size(self) -> np.ndarray:
        return self.high - self.low


def overview(points: np.ndarray, parts: np.ndarray, through: np.ndarray, aspect: float):
    """(View, Plane): all points seen obliquely from above; the plane cuts along the parts.

    parts: (n, 3) of what is to be opened; through: (3,) a point of the plane.
    """
    flat = np.ptp(parts, axis=0)[:2].argmin()
    front = -np.eye(3)[1] if flat == 1 else np.eye(3)[0]
    side = np.cross(_UP, front)
    level = np.cos(_AZIMUTH) * front + np.sin(_AZIMUTH) * side
    toward = np.cos(_ELEVATION) * level + np.sin(_ELEVATION) * _UP
    right = np.cross(_UP, level)
    up = np.cross(toward, right)
    view = View(right, up, toward, np.zeros(2), np.zeros(2))
    return _framed(view, view.project(points), aspect), Plane(through, front)


def section(ways: list[np.ndarray], boxes: list[np.ndarray], through: np.ndarray, aspect: float):
    """(View, Plane): square on to the plane x, y or z through a point in which the ways are drawn
    largest; the picture shows them, and whole those of the boxes (n, 3) that are not too large."""
    views = [_facing(axis, ways, aspect) for axis in range(3)]
    axis = max(range(3), key=lambda axis: _length(views[axis], ways) * _WORTH[axis])
    view, shown = views[axis], _near(ways, views[axis])
    for box in sorted(boxes, key=lambda box: np.prod(np.ptp(box, axis=0))):
        larger = _framed(view, np.concatenate([*shown, view.project(box)]), aspect)
        if larger.size[1] <= _ROOM * views[axis].size[1]:
            view, shown = larger, [*shown, view.project(box)]
    return view, Plane(through, view.toward)


def _near(ways: list[np.ndarray], view: View) -> list[np.ndarray]:
    """Ways as seen, without first or last legs that mostly lead far off: to a sun or to a desk."""
    flat = [view.project(way) for way in ways]
    for first in (True, False):
        bent = [way for way in flat if len(way) > 2]
        rests = [way[1:] if first else way[:-1] for way in bent]
        legs = [np.linalg.norm(way[1] - way[0] if first else way[-1] - way[-2]) for way in bent]
        sizes = [np.linalg.norm(np.ptp(rest, axis=0)) for rest in rests]
        if bent and np.median(np.array(legs) > _FAR * np.array(sizes)) > 0.5:
            flat = rests
    return flat


def _length(view: View, ways: list[np.ndarray]) -> float:
    """How long a way is drawn, on average, in a picture of height 1."""
    flat = _near(ways, view)
    lengths = [np.linalg.norm(np.diff(way, axis=0), axis=1).sum() for way in flat]
    return np.mean(lengths) / view.size[1]


def _facing(axis: int, ways: list[np.ndarray], aspect: float) -> View:
    """Square on to an axis: x and z from their positive side, y from its negative one."""
    toward = np.eye(3)[axis] * (-1.0 if axis == 1 else 1.0)
    up = np.eye(3)[1] if axis == 2 else _UP
    nowhere = np.zeros(2)
    view = View(np.cross(up, toward), up, toward, nowhere, nowhere)
    return _framed(view, np.concatenate(_near(ways, view)), aspect)


def _framed(view: View, flat: np.ndarray, aspect: float) -> View:
    """The view with a picture of this width to height that holds the projected points (n, 2)."""
    low, high = flat.min(axis=0), flat.max(axis=0)
    height = max(*(high - low) / (aspect, 1.0), 1e-9 * np.abs(flat).max(), 1e-30)
    half = np.array([aspect, 1.0]) * height * (0.5 + _MARGIN)
    middle = (low + high) / 2.0
    return replace(view, low=middle - half, high=middle + half)
