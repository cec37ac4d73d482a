"""Bounds on what rounding does to a hit."""

import numpy as np

from lumentrace.world.geometry import EPSILON

_ROUNDINGS = 32.0  # of the largest coordinate, that the intersection may add up
_MOST = 1e-6  # share of the largest coordinate that a bound never exceeds
_DRAWN_BACK = 64.0  # plane errors by which a hit is drawn back from an edge


def plane_error(size: float, edge, altitude):
    """Bound on the distance of a computed hit from the true plane of its face, (n,).

    size: largest absolute coordinate of the scene; edge, altitude: (n,) longest edge and smallest
    altitude. The intersection weighs the corners with an error of some roundings of `size` over
    the altitude, and a corner is at most an edge away.
    """
    aspect = np.where(altitude > 0, edge / np.where(altitude > 0, altitude, 1.0), np.inf)
    return np.minimum(_ROUNDINGS * EPSILON * np.maximum(aspect, 1.0), _MOST) * size


def edge_margin(size: float, altitude):
    """Weight of a corner below which a hit is drawn back into its triangle, (n,)."""
    moved = _DRAWN_BACK * _ROUNDINGS * EPSILON * size
    return np.minimum(moved / np.where(altitude > 0, altitude, moved), 0.25)
