"""The bounding volume hierarchy: complete, tight enough, shallow enough; the test of one box."""

from math import inf

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lumentrace.kernels.hierarchy import STACK_DEPTH, build_tree, enters_box

MANY = settings(max_examples=200, deadline=None, derandomize=True)


def visited(lower, upper):
    """(tree, depth of its deepest leaf), once everything that a tree must be has been checked."""
    tree = build_tree(lower, upper)
    node_lower, node_upper, child, count, order = tree
    assert sorted(order.tolist()) == list(range(len(lower)))
    assert len(node_lower) == len(node_upper) == len(child) == len(count)
    held, deepest, seen = [], 0, 0
    todo = [(0, 0)]
    while todo:
        node, depth = todo.pop()
        seen += 1
        deepest = max(deepest, depth)
        if count[node] == 0 and len(lower):
            for k in (child[node], child[node] + 1):
                assert (node_lower[k] >= node_lower[node]).all()
                assert (node_upper[k] <= node_upper[node]).all()
                todo.append((k, depth + 1))
            continue
        inside = order[child[node] : child[node] + count[node]]
        assert (lower[inside] >= node_lower[node]).all()
        assert (upper[inside] <= node_upper[node]).all()
        held += inside.tolist()
    assert sorted(held) == list(range(len(lower)))  # each in exactly one leaf
    assert seen == len(child)
    assert deepest < STACK_DEPTH
    return tree, deepest


def boxes(n, rng, size=0.01):
    lower = rng.uniform(-1, 1, (n, 3))
    return lower, lower + rng.uniform(0, size, (n, 3))


@pytest.mark.parametrize("n", [1, 2, 3, 4, 5, 17, 1000, 20_000])
def test_random_boxes(n):
    lower, upper = boxes(n, np.random.default_rng(n))
    (node_lower, node_upper, *_), deepest = visited(lower, upper)
    assert (node_lower[0] == lower.min(axis=0)).all()
    assert (node_upper[0] == upper.max(axis=0)).all()
    assert deepest <= 4 + 2 * np.log2(n)


def test_no_boxes():
    """One empty node: its box holds nothing."""
    (lower, upper, _, count, order), _ = visited(np.empty((0, 3)), np.empty((0, 3)))
    assert (lower > upper).all() and len(order) == 0
    assert count.tolist() == [0]


@pytest.mark.parametrize("n", [2, 5, 3000])
def test_equal_boxes(n):
    """No plane parts them: all stay in one leaf."""
    visited(np.zeros((n, 3)), np.ones((n, 3)))


def test_boxes_without_extent():
    points = np.random.default_rng(3).integers(0, 4, (500, 3)).astype(float)
    visited(points, points)


def test_boxes_that_shrink_toward_a_point_do_not_make_the_tree_too_deep():
    """Each halving has its own box, 1000 in a row: the depth is cut before the stack is full."""
    far = 0.5 ** np.arange(1000.0)
    lower = np.stack([far, np.zeros(1000), np.zeros(1000)], axis=1)
    _, deepest = visited(lower, lower * 1.0001)
    assert deepest == 90


def test_centres_that_rounding_puts_on_one_side():
    """Two clusters one rounding apart, far from the origin."""
    lower = np.full((64, 3), 1e16)
    lower[::2] += 2.0
    visited(lower, lower)


def test_leaves_are_small():
    lower, upper = boxes(5000, np.random.default_rng(1))
    (_, _, _, count, _), _ = visited(lower, upper)
    assert count.max() <= 4


axis = st.floats(-1, 1, allow_subnormal=False)
vector = st.tuples(axis, axis, axis)


@MANY
@given(vector, vector, vector, vector)
def test_a_box_is_entered_where_its_points_are(one, other, origin, share):
    """Aimed at a point of the box, the ray enters it no later; t_far cuts what lies beyond."""
    lower = np.minimum(one, other)[None]
    upper = np.maximum(one, other)[None]
    lower, upper = lower - 1e-9, upper + 1e-9
    target = lower[0] + (np.array(share) + 1) / 2 * (upper - lower)[0]
    direction = target - origin
    with np.errstate(divide="ignore"):
        inverse = tuple((1.0 / direction).tolist())
    t = enters_box(lower, upper, 0, origin, inverse, inf)
    if ((lower[0] < origin) & (origin < upper[0])).all():
        assert t == 0.0
    else:
        assert 0.0 <= t <= 1.0 + 1e-6
        assert enters_box(lower, upper, 0, origin, inverse, t * 0.999) == (inf if t > 0 else 0.0)


@pytest.mark.parametrize(
    ("origin", "direction", "expected"),
    [
        ((-1.0, 0.5, 0.5), (1.0, 0.0, 0.0), 1.0),
        ((-1.0, 0.5, 0.5), (-1.0, 0.0, 0.0), inf),
        ((-1.0, 1.5, 0.5), (1.0, 0.0, 0.0), inf),
        ((-1.0, -1.0, -1.0), (1.0, 1.0, 1.0), 1.0),
        ((0.5, 0.5, 0.5), (0.0, 0.0, -1.0), 0.0),
        ((0.5, 0.5, 3.0), (0.0, 0.0, -2.0), 1.0),
        ((3.0, 3.0, 0.5), (-1.0, -0.2, 0.0), inf),
    ],
)
def test_unit_box(origin, direction, expected):
    with np.errstate(divide="ignore"):
        inverse = tuple((1.0 / np.array(direction)).tolist())
    found = enters_box(np.zeros((1, 3)), np.ones((1, 3)), 0, origin, inverse, inf)
    assert found == pytest.approx(expected)
