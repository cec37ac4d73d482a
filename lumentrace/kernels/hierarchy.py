"""A binary hierarchy of bounding boxes: its build, and the test of one box.

Built by the surface area heuristic over bins (Wald: "On fast construction of SAH-based bounding
volume hierarchies", IEEE Symposium on Interactive Ray Tracing (2007)).
"""

import numpy as np

from lumentrace.jit import allocating_kernel, kernel

_BINS = 16
_LEAF_MAX = 4
STACK_DEPTH = 96  # of a traversal; the build keeps the tree shallower than that
_DEPTH_MAX = 90


@kernel
def enters_box(lower, upper, node, origin, inverse, t_far):
    """Smallest t >= 0 at which the ray is inside the box, or inf when it misses it up to t_far.

    lower, upper: (N, 3) of all boxes; inverse: the reciprocals of the direction. Boxes are padded
    by more than the rounding of this test when the hierarchy is built.
    """
    near, far = 0.0, t_far
    for k in range(3):
        a = (lower[node, k] - origin[k]) * inverse[k]
        b = (upper[node, k] - origin[k]) * inverse[k]
        near = max(near, min(a, b))
        far = min(far, max(a, b))
    return near if near <= far else np.inf


@kernel
def _half_area(lower, upper):
    x = upper[0] - lower[0]
    y = upper[1] - lower[1]
    z = upper[2] - lower[2]
    return x * y + y * z + z * x


@kernel
def _bounds(lower, upper, order, first, last, out_lower, out_upper):
    """Union of the boxes order[first:last]."""
    out_lower[:] = np.inf
    out_upper[:] = -np.inf
    for i in range(first, last):
        for k in range(3):
            out_lower[k] = min(out_lower[k], lower[order[i], k])
            out_upper[k] = max(out_upper[k], upper[order[i], k])


@allocating_kernel
def _best_split(lower, upper, order, first, last):
    """(axis, position, cost) of the best plane between bins of box centres; axis -1: none."""
    best_axis, best_position, best_cost = -1, 0.0, np.inf
    bin_lower = np.empty((_BINS, 3))
    bin_upper = np.empty((_BINS, 3))
    bin_count = np.empty(_BINS, np.int64)
    right_cost = np.empty(_BINS)
    box_lower = np.empty(3)
    box_upper = np.empty(3)
    for axis in range(3):
        low, high = np.inf, -np.inf
        for i in range(first, last):
            centre = 0.5 * (lower[order[i], axis] + upper[order[i], axis])
            low = min(low, centre)
            high = max(high, centre)
        if not high > low:
            continue
        scale = _BINS / (high - low)
        bin_lower[:] = np.inf
        bin_upper[:] = -np.inf
        bin_count[:] = 0
        for i in range(first, last):
            p = order[i]
            b = min(_BINS - 1, int((0.5 * (lower[p, axis] + upper[p, axis]) - low) * scale))
            bin_count[b] += 1
            for k in range(3):
                bin_lower[b, k] = min(bin_lower[b, k], lower[p, k])
                bin_upper[b, k] = max(bin_upper[b, k], upper[p, k])
        box_lower[:] = np.inf
        box_upper[:] = -np.inf
        count = 0
        for b in range(_BINS - 1, 0, -1):
            count += bin_count[b]
            for k in range(3):
                box_lower[k] = min(box_lower[k], bin_lower[b, k])
                box_upper[k] = max(box_upper[k], bin_upper[b, k])
            right_cost[b] = count * _half_area(box_lower, box_upper) if count else np.inf
        box_lower[:] = np.inf
        box_upper[:] = -np.inf
        count = 0
        for b in range(_BINS - 1):
            count += bin_count[b]
            for k in range(3):
                box_lower[k] = min(box_lower[k], bin_lower[b, k])
                box_upper[k] = max(box_upper[k], bin_upper[b, k])
            if count == 0:
                continue
            cost = count * _half_area(box_lower, box_upper) + right_cost[b + 1]
            if cost < best_cost:
                best_axis, best_position, best_cost = axis, low + (b + 1) / scale, cost
    return best_axis, best_position, best_cost


@kernel
def _partition(lower, upper, order, first, last, axis, position):
    """Reorder order[first:last] so that boxes with centres before the plane stand first."""
    left, right = first, last - 1
    while left <= right:
        p = order[left]
        if 0.5 * (lower[p, axis] + upper[p, axis]) < position:
            left += 1
        else:
            order[left] = order[right]
            order[right] = p
            right -= 1
    return left


@allocating_kernel
def build_tree(lower, upper):
    """Hierarchy over n boxes: arrays (lower, upper, child, count, order) of `world.arrays.Tree`.

    lower, upper: (n, 3) float64, already padded by the error of what they hold; n >= 0.
    """
    n = len(lower)
    order = np.arange(n).astype(np.int32)
    size = max(1, 2 * n)
    node_lower = np.full((size, 3), np.inf)
    node_upper = np.full((size, 3), -np.inf)
    child = np.zeros(size, np.int32)
    count = np.zeros(size, np.int32)
    n_nodes = 1
    todo = [(0, 0, n, 0)]
    while len(todo) > 0:
        node, first, last, depth = todo.pop()
        _bounds(lower, upper, order, first, last, node_lower[node], node_upper[node])
        members = last - first
        axis, position, cost = -1, 0.0, np.inf
        if members > 1 and depth < _DEPTH_MAX:
            axis, position, cost = _best_split(lower, upper, order, first, last)
        whole = members * _half_area(node_lower[node], node_upper[node])
        worth = members > _LEAF_MAX or cost + whole / members < whole
        if axis < 0 or not worth:
            child[node] = first
            count[node] = members
            continue
        middle = _partition(lower, upper, order, first, last, axis, position)
        if middle in (first, last):  # rounding put every centre on one side
            middle = (first + last) // 2
        child[node] = n_nodes
        todo.append((n_nodes, first, middle, depth + 1))
        todo.append((n_nodes + 1, middle, last, depth + 1))
        n_nodes += 2
    return (
        node_lower[:n_nodes].copy(),
        node_upper[:n_nodes].copy(),
        child[:n_nodes].copy(),
        count[:n_nodes].copy(),
        order,
    )
