"""Where pictures are seen from: parallel projections, and the planes that cut parts open."""

from dataclasses import dataclass

import numpy as np

_ELEVATION, _AZIMUTH = np.radians(24.0), np.radians(28.0)
_FAR = 3.0  # a first or last leg so many times longer than the rest of a way leaves the picture
_ROOM = 2.2  # a part that would make the picture so many times larger is not shown whole
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
    view = _framed(right, np.cross(toward, right), toward, points, aspect, 0.10)
    return view, Plane(through, front)


def section(ways: list[np.ndarray], boxes: list[np.ndarray], through: np.ndarray, aspect: float):
    """(View, Plane): square on to the plane x, y or z through a point in which the ways are drawn
    largest; the picture shows them, and whole those of the boxes (2, 3) that are not too large."""
    ways = [_near(way) for way in ways]
    views = [_facing(axis, np.concatenate(ways), aspect) for axis in range(3)]
    view = max(views, key=lambda v: _length(v, ways) / v.size[1])
    points = np.concatenate(ways)
    for box in sorted(boxes, key=lambda box: np.prod(np.ptp(box, axis=0))):
        larger = _facing(np.abs(view.toward).argmax(), np.concatenate([points, box]), aspect)
        if larger.size[1] <= _ROOM * view.size[1]:
            points = np.concatenate([points, box])
    return _facing(np.abs(view.toward).argmax(), points, aspect), Plane(through, view.toward)


def _near(way: np.ndarray) -> np.ndarray:
    """A way without first and last points that lie far off, such as a sun or a desk."""
    for end in (slice(1, None), slice(None, -1)):
        rest = way[end]
        leg = np.linalg.norm(way[0] - way[1] if end.start else way[-1] - way[-2])
        if len(rest) > 1 and leg > _FAR * np.linalg.norm(np.ptp(rest, axis=0)):
            way = rest
    return way


def _length(view: View, ways: list[np.ndarray]) -> float:
    return sum(np.linalg.norm(np.diff(view.project(w), axis=0), axis=1).sum() for w in ways)


def _facing(axis: int, points: np.ndarray, aspect: float) -> View:
    """Square on to an axis: x from the front, y from below, z from above."""
    toward = np.eye(3)[axis] * (-1.0 if axis == 1 else 1.0)
    up = np.eye(3)[1] if axis == 2 else _UP
    return _framed(np.cross(up, toward), up, toward, points, aspect, 0.12)


def _framed(right, up, toward, points: np.ndarray, aspect: float, margin: float) -> View:
    """A view that holds the points, with a margin, in a picture of this width to height."""
    flat = points @ np.stack([right, up], axis=-1)
    low, high = flat.min(axis=0), flat.max(axis=0)
    height = max((high - low)[1], (high - low)[0] / aspect) * (1.0 + 2.0 * margin)
    half = np.array([aspect, 1.0]) * height / 2.0
    middle = (low + high) / 2.0
    return View(right, up, toward, middle - half, middle + half)
