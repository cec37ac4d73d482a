"""Rectangles, discs and points in the scene's frame, as the engine wants them."""

import numpy as np

from lumentrace.scene.model import Detector, Disc, Point, Rectangle, Source
from lumentrace.world.placement import Pose, pose_of


def _frame(pose: Pose, center, normal, across):
    """(4, 3): center, normal, across, up; orthonormal, up = normal x across."""
    normal = pose.directions(np.array(normal, np.float64))
    normal /= np.linalg.norm(normal)
    across = pose.directions(np.array(across, np.float64))
    across -= (across @ normal) * normal
    across /= np.linalg.norm(across)
    center = pose.points(np.array(center, np.float64))
    return np.stack([center, normal, across, np.cross(normal, across)])


def _any_across(normal):
    """A direction that is not parallel to the normal: the axis farthest from it."""
    return np.eye(3)[np.argmin(np.abs(normal))]


def detector_frame(detector: Detector):
    """(place, size) of a detector: (4, 3), and half its size along across and up, (2,)."""
    pose = pose_of(detector.turn, detector.at)
    place = _frame(pose, detector.center, detector.normal, detector.across)
    return place, 0.5 * np.array(detector.size)


def source_frame(source: Source):
    """(place, size) of a source: (4, 3), and (2,) radius, 0 | half its size along across and up.

    Faces stand where their part does; their frame is not used.
    """
    pose = pose_of(source.turn, source.at)
    shape = source.shape
    if isinstance(shape, Rectangle):
        place = _frame(pose, shape.center, shape.normal, shape.across)
        return place, 0.5 * np.array(shape.size)
    if isinstance(shape, Disc):
        place = _frame(pose, shape.center, shape.normal, _any_across(shape.normal))
        return place, np.array([shape.radius, 0.0])
    center = shape.at if isinstance(shape, Point) else (0.0, 0.0, 0.0)
    return _frame(pose, center, (0.0, 0.0, 1.0), (1.0, 0.0, 0.0)), np.zeros(2)


def corners(place, size):
    """(4, 3) corners of a rectangle, counter-clockwise seen from the side of its normal."""
    signs = np.array([[-1, -1], [1, -1], [1, 1], [-1, 1]])
    return place[0] + (signs * size) @ place[2:]


def extent(source: Source, place, size):
    """(n, 3) points whose box holds a point, a disc or a rectangle."""
    if isinstance(source.shape, Disc):
        return corners(place, np.array([size[0], size[0]]))
    return corners(place, size)


def spread(source: Source, place, size):
    """(n, 3) points of a point, a disc or a rectangle: its middle, and eight near its rim."""
    if isinstance(source.shape, Point):
        return place[:1]
    disc = isinstance(source.shape, Disc)
    return spread_plane(place, np.array([size[0], size[0]]) if disc else size)


def spread_plane(place, half):
    """(9, 3) points of the ellipse in a rectangle: its middle, and eight near its rim."""
    around = np.radians(np.arange(0, 360, 45))
    ring = np.stack([np.cos(around), np.sin(around)], axis=1)
    return place[0] + np.concatenate([np.zeros((1, 2)), 0.9 * ring * half]) @ place[2:]
