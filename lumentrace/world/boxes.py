"""Which boxes meet: the one place that asks rtree."""

import numpy as np


def box_pairs(lower_a, upper_a, lower_b, upper_b):
    """All pairs of a box of one set and a box of another that share at least a point.

    lower_a, upper_a: (n, 3) float; lower_b, upper_b: (m, 3) float; finite. Returns (i, j), two
    (k,) int64 arrays with rows of the first and of the second set, sorted by i, then by j.
    """
    if len(lower_a) == 0 or len(lower_b) == 0:
        return np.empty(0, np.int64), np.empty(0, np.int64)
    # A comparison costs far less than a query or a row of the index.
    row_a = _meeting(lower_a, upper_a, lower_b.min(axis=0), upper_b.max(axis=0))
    row_b = _meeting(lower_b, upper_b, lower_a.min(axis=0), upper_a.max(axis=0))
    if len(row_a) == 0 or len(row_b) == 0:
        return np.empty(0, np.int64), np.empty(0, np.int64)
    a, b = (lower_a[row_a], upper_a[row_a]), (lower_b[row_b], upper_b[row_b])
    if len(row_a) > len(row_b):  # a query costs more than a row of the index
        found_b, found_a = _queried(*b, *a)
    else:
        found_a, found_b = _queried(*a, *b)
    order = np.lexsort((found_b, found_a))
    return row_a[found_a[order]], row_b[found_b[order]]


def _meeting(lower, upper, low, high):
    """Rows of boxes, (n, 3), that share at least a point with one box."""
    return np.flatnonzero(((upper >= low) & (lower <= high)).all(axis=1))


def _queried(lower, upper, held_lower, held_upper):
    """(i, j): box i of the first set meets box j of the second, which becomes the index."""
    from rtree.index import Index, Property

    numbers = np.arange(len(held_lower), dtype=np.int64)
    index = Index(
        (numbers, np.array(held_lower, np.float64), np.array(held_upper, np.float64)),
        properties=Property(dimension=3, leaf_capacity=16, index_capacity=16, fill_factor=0.9),
    )
    found, counts = index.intersection_v(np.array(lower, np.float64), np.array(upper, np.float64))
    return np.repeat(np.arange(len(lower), dtype=np.int64), counts.astype(np.int64)), found
