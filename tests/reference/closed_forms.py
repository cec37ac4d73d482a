"""Closed forms that give a value in every point, so that a whole cell can be compared.

Each is held to the reference cases where it is used.
"""

from collections.abc import Callable

import numpy as np


def disc_to_disc(r1, r2, h):
    """Share of the flux of a Lambertian disc on a coaxial disc; Howell's catalogue, C-41."""
    x = 1 + (1 + (r2 / h) ** 2) / (r1 / h) ** 2
    return (x - np.sqrt(x * x - 4 * (r2 / r1) ** 2)) / 2


def element_to_disc(r, h, offset):
    """Factor of a small plane parallel to a disc at distance h, `offset` off its axis.

    (1/2) [1 - (1 + H^2 - Q^2) / sqrt(Z^2 - 4 Q^2)], H = h/a, Q = r/a, Z = 1 + H^2 + Q^2;
    Howell's catalogue, section B. Multiplied through by a^2, so that offset 0 is allowed.
    """
    a2, h2, r2 = np.square(offset), h * h, r * r
    return (1 - (a2 + h2 - r2) / np.sqrt((a2 + h2 + r2) ** 2 - 4 * r2 * a2)) / 2


def element_to_polygon(points, normal, corners):
    """Factor of small planes at points (..., 3) with one normal to a polygon before them all.

    F = (1 / 2 pi) sum over edges of (angle of the edge) x (unit normal of its wedge) . n;
    J. H. Lambert, Photometria (1760). corners (n, 3), clockwise seen from the points.
    """
    ray = np.asarray(corners, float) - np.asarray(points, float)[..., None, :]
    ray /= np.linalg.norm(ray, axis=-1, keepdims=True)
    following = np.roll(ray, -1, axis=-2)
    wedge = np.cross(ray, following)
    sine = np.linalg.norm(wedge, axis=-1)
    angle = np.arctan2(sine, np.einsum("...i,...i->...", ray, following))
    along = wedge @ np.asarray(normal, float) / sine
    return np.abs((angle * along).sum(axis=-1)) / (2 * np.pi)


def corners(low, high, z):
    """The four corners (4, 3) of an upright rectangle in the plane of that z."""
    (x0, y0), (x1, y1) = low, high
    return np.array([[x0, y0, z], [x1, y0, z], [x1, y1, z], [x0, y1, z]], float)


def cell_means(
    function: Callable[[np.ndarray], np.ndarray], center, across, up, size, cells
) -> np.ndarray:
    """Means of function(points (n, 3)) over each cell of a plane, cell by cell, rows along `up`.

    By Gauss's rule of 6 x 6 points a cell.
    """
    node, weight = np.polynomial.legendre.leggauss(6)
    means = []
    for j in range(cells[1]):
        for i in range(cells[0]):
            u = ((i + (node + 1) / 2) / cells[0] - 0.5) * size[0]
            v = ((j + (node + 1) / 2) / cells[1] - 0.5) * size[1]
            points = (
                np.asarray(center, float)
                + u[:, None, None] * np.asarray(across, float)
                + v[None, :, None] * np.asarray(up, float)
            )
            values = function(points.reshape(-1, 3)).reshape(6, 6)
            means.append(weight @ values @ weight / 4)
    return np.array(means)
