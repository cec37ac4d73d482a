"""Polygons made into triangles."""

import numpy as np

from lumentrace.world.raw import MeshFault
from lumentrace.world.words import counted

_TIE = 1e-9  # fans whose worst triangles differ by less count as equally good
_FOLDED = -1e-6  # share of the polygon's area by which a triangle may lie the wrong way round


def fanned(vertex, corners, lines):
    """Fan each polygon from the corner that makes its smallest triangle largest.

    For a convex polygon without corners in a row that is as good as any, and the first is taken;
    a dented one needs the right corner. vertex: (V, 3). corners: rows of vertex, a list for each
    polygon. lines: where they stand, for the message. Returns (corner, polygon): (F, 3) int64 and
    (F,) int64, in the order of the polygons. Raises MeshFault where no corner will do.
    """
    sizes = np.array([len(polygon) for polygon in corners], np.int64)
    first = np.concatenate([[0], np.cumsum(np.maximum(sizes - 2, 0))]).astype(np.int64)
    corner = np.empty((first[-1], 3), np.int64)
    for size in np.unique(sizes):
        rows = np.flatnonzero(sizes == size)
        ring = np.array([corners[row] for row in rows], np.int64)
        start, worst = _best_start(vertex, ring) if size > 3 else (np.zeros(len(rows), int), None)
        if worst is not None and (worst < _FOLDED).any():
            bad = np.flatnonzero(worst < _FOLDED)
            raise MeshFault(
                f"has {counted(len(bad), 'polygon')} dented so that no fan of triangles fills "
                f"them, the first at line {lines[rows[bad[0]]]}; export triangles"
            )
        turned = np.take_along_axis(ring, (start[:, None] + np.arange(size)) % size, axis=1)
        for k in range(size - 2):
            corner[first[rows] + k] = turned[:, [0, k + 1, k + 2]]
    return corner, np.repeat(np.arange(len(corners)), np.maximum(sizes - 2, 0))


def _best_start(vertex, ring):
    """(start, worst): for each polygon the best first corner, and the area of the smallest
    triangle of that fan along the polygon's normal, as a share of the polygon's area."""
    point = vertex[ring] - vertex[ring[:, :1]]
    size = ring.shape[1]
    whole = np.cross(point, np.roll(point, -1, axis=1)).sum(axis=1)
    square = (whole * whole).sum(axis=1)
    square = np.where(square > 0, square, 1.0)
    worst = np.empty((len(ring), size))
    for start in range(size):
        fan = np.roll(point, -start, axis=1) - point[:, start : start + 1]
        part = np.cross(fan[:, 1:-1], fan[:, 2:])
        worst[:, start] = ((part * whole[:, None]).sum(axis=2) / square[:, None]).min(axis=1)
    best = worst.max(axis=1)
    start = np.argmax(worst >= (best - _TIE)[:, None], axis=1)
    return start, best
