"""How the faces of one mesh hang together: edges, winding, shells."""

from typing import NamedTuple

import numpy as np

from lumentrace.world.boxes import box_pairs
from lumentrace.world.geometry import signed_volume
from lumentrace.world.inside import is_inside


class Edges(NamedTuple):
    """Undirected edges of F faces. Half-edge h = 3 f + k runs from corner k of face f."""

    ends: np.ndarray  # (E, 2) int64 vertices, the lower one first
    of_half: np.ndarray  # (3 F,) int64 edge of each half-edge
    forward: np.ndarray  # (3 F,) bool: it runs from the lower vertex to the higher
    count: np.ndarray  # (E,) int64 faces at the edge


def edges_of(corner) -> Edges:
    """The edges of faces whose corners all differ."""
    start = corner.reshape(-1)
    end = np.roll(corner, -1, axis=1).reshape(-1)
    low, high = np.minimum(start, end), np.maximum(start, end)
    base = int(high.max(initial=0)) + 1
    key, of_half, count = np.unique(low * base + high, return_inverse=True, return_counts=True)
    return Edges(np.stack([key // base, key % base], axis=1), of_half, start < end, count)


def neighbours(edges: Edges):
    """(f, g, alike): pairs of faces at an edge; alike: both run along it in one direction.

    At an edge of more than two faces every two of them are a pair. Three (P,) arrays.
    """
    order = np.argsort(edges.of_half, kind="stable")
    edge = edges.of_half[order]
    found = []
    for step in range(1, int(edges.count.max(initial=1))):
        at = np.flatnonzero(edge[step:] == edge[:-step])
        found.append(np.stack([order[at], order[at + step]]))
    half = np.concatenate(found, axis=1) if found else np.empty((2, 0), np.int64)
    return half[0] // 3, half[1] // 3, edges.forward[half[0]] == edges.forward[half[1]]


def partners(edges: Edges):
    """(3 F,) int64: the other half-edge at an edge of exactly two faces, -1 at all others."""
    half = np.argsort(edges.of_half, kind="stable")
    half = half[edges.count[edges.of_half[half]] == 2].reshape(-1, 2)
    partner = np.full(len(edges.of_half), -1, np.int64)
    partner[half] = half[:, ::-1]
    return partner


def _manifold_neighbours(edges: Edges):
    """As `neighbours`, across the edges of exactly two faces."""
    partner = partners(edges)
    half = np.flatnonzero(partner > np.arange(len(partner)))
    other = partner[half]
    return half // 3, other // 3, edges.forward[half] == edges.forward[other]


def components(n, a, b):
    """(n,) int64 number of the connected component of each of n nodes, given links a - b."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    links = coo_array((np.ones(len(a), np.int8), (a, b)), shape=(n, n))
    return connected_components(links, directed=False)[1].astype(np.int64)


def shell_faces(corner):
    """Faces of each shell, a list of int64 arrays: joined by edges of exactly two faces."""
    f, g, _ = _manifold_neighbours(edges_of(corner))
    shell = components(len(corner), f, g)
    return np.split(np.argsort(shell, kind="stable"), np.cumsum(np.bincount(shell))[:-1])


def shell_boxes(vertex, shells):
    """Lower and upper corners of the boxes of shells, given as a list of (n, 3) corners."""
    lower = np.array([vertex[corner].min(axis=(0, 1)) for corner in shells])
    return lower, np.array([vertex[corner].max(axis=(0, 1)) for corner in shells])


def to_reverse(corner):
    """(reverse, orientable): which faces to reverse so that neighbours agree, (F,) bool.

    In each shell the side of most faces is kept, and of the first face where they are as many.
    Every face stands twice in a graph, as it is and reversed, and is linked to its neighbours as
    they must then lie. A shell is one-sided (like Moebius' band, left as it is, orientable False)
    where the two copies of a face hang together.
    """
    n = len(corner)
    f, g, alike = _manifold_neighbours(edges_of(corner))
    other = np.where(alike, n, 0)
    group = components(
        2 * n, np.concatenate([f, f + n]), np.concatenate([g + other, g + n - other])
    )
    kept, reversed_ = group[:n], group[n:]
    one_sided = kept == reversed_
    members = np.bincount(kept, minlength=2 * n)
    first = np.full(2 * n, n, np.int64)
    np.minimum.at(first, kept, np.arange(n))
    fewer = members[kept] < members[reversed_]
    tie = (members[kept] == members[reversed_]) & (first[kept] > first[reversed_])
    return (fewer | tie) & ~one_sided, not one_sided.any()


def reverse(corner, which):
    """The faces with those of `which`, (F,) bool, wound the other way."""
    return np.where(which[:, None], corner[:, ::-1], corner)


def unbalanced(edges: Edges):
    """(E,) bool: the faces at the edge do not cancel, so that the surface is open there."""
    ends = np.where(edges.forward, 1, -1)
    return np.bincount(edges.of_half, weights=ends, minlength=len(edges.count)) != 0


def inside_out(vertex, corner, distance):
    """Faces to reverse, (F,) bool, so that the normals of closed shells point outward.

    A shell that lies within an odd number of others bounds a hollow, and its normals point into
    the hollow. Open shells are left alone. distance: rounding of the coordinates.
    """
    edges = edges_of(corner)
    is_open = unbalanced(edges)[edges.of_half].reshape(-1, 3).any(axis=1)
    closed = [faces for faces in shell_faces(corner) if not is_open[faces].any()]
    outward = np.array([signed_volume(vertex, corner[faces]) > 0 for faces in closed], bool)
    hollow = _depth(vertex, [corner[faces] for faces in closed], distance) % 2 == 1
    wrong = np.zeros(len(corner), bool)
    for faces, turned in zip(closed, outward == hollow, strict=True):
        wrong[faces] = turned
    return wrong


def _depth(vertex, closed, distance):
    """Number of the closed shells that each of them lies in."""
    depth = np.zeros(len(closed), np.int64)
    if len(closed) < 2:
        return depth
    lower, upper = shell_boxes(vertex, closed)
    inner, outer = box_pairs(lower, upper, lower, upper)
    nested = (lower[inner] >= lower[outer]).all(axis=1) & (upper[inner] <= upper[outer]).all(axis=1)
    for i, j in zip(inner[nested], outer[nested], strict=True):
        if i != j and is_inside(vertex, closed[i], vertex, closed[j], distance):
            depth[i] += 1
    return depth
